"""Worked examples; source and status of each stand in its file under reference/spc."""

from __future__ import annotations

import numpy as np
import pytest
from tests.spc import reference

from holdsteady.arrays import Bools, Floats
from holdsteady.spc import (
    attributes,
    count,
    individuals,
    mean_range,
    mean_sd,
    number_nonconforming,
    proportion,
    rate,
)
from holdsteady.spc.result import Lines
from holdsteady.spc.rules import RULES, find
from holdsteady.spc.subgroups import summarise


def column(rows: list[dict[str, str]], name: str) -> Floats:
    return np.array([float(row[name]) for row in rows])


def all_of(values: Floats) -> Bools:
    return np.ones(len(values), dtype=np.bool_)


def outside(value: Floats, lines: Lines) -> list[int]:
    """Points beyond the limits, counted from 1."""
    z = (value - lines.centre) / lines.sigma
    found = find(
        RULES["outside-limits"], value=value, z=z, lower=lines.lower, upper=lines.upper, sigma=lines.sigma,
        segment=np.zeros(len(value), dtype=np.int64),
    )  # fmt: skip
    return (np.flatnonzero(found.met) + 1).tolist()


def test_individuals_and_moving_range() -> None:
    rows, results = reference.example("imr_nist_flowrate")
    x = column(rows, "value")
    ranges = individuals.moving_range(x, np.zeros(len(x), dtype=np.int64))
    found = individuals.estimate(x, ranges, all_of(x), all_of(x))
    assert found.sigma is not None
    lines = individuals.location(found.centre, found.sigma, len(x), 3.0)
    customary = individuals.spread(found.sigma, len(x), "three-sigma")
    exact, published = results["computed"], results["published"]
    assert found.centre == pytest.approx(exact["mean"], rel=1e-9)
    assert found.sigma == pytest.approx(exact["sigma"], rel=1e-9)
    assert lines.upper[0] == pytest.approx(exact["ucl"], rel=1e-9)
    assert lines.lower[0] == pytest.approx(exact["lcl"], rel=1e-9)
    assert customary.upper[0] == pytest.approx(exact["mr_ucl"], rel=1e-9)
    assert np.isnan(customary.lower).all()
    # The handbook divides by 1.128; the exact d2 moves its limits by 0.002.
    assert found.centre == pytest.approx(published["mean"], abs=0.005)
    assert {name: value for name, value, _ in found.figures}["mean moving range"] == pytest.approx(
        published["mr_bar"], abs=5e-5
    )
    assert lines.upper[0] == pytest.approx(published["ucl"], abs=0.002)
    assert lines.lower[0] == pytest.approx(published["lcl"], abs=0.002)
    assert outside(x, lines) == exact["out"]
    by_median = individuals.estimate(x, ranges, all_of(x), all_of(x), "median-moving-range")
    assert by_median.sigma == pytest.approx(exact["median_mr"] / 0.9538725524, rel=1e-9)


def test_means_with_ranges_and_standard_deviations() -> None:
    rows, results = reference.example("xbar_r_s_montgomery_flowwidth")
    values = np.array([[float(row[name]) for name in "abcde"] for row in rows])
    groups = summarise(values.ravel(), np.arange(len(rows), dtype=np.int64) * 5)
    exact, published = results["computed"], results["published"]
    by_range = mean_range.estimate(groups, all_of(groups.n))
    by_s = mean_sd.estimate(groups, all_of(groups.n), "mean-s")
    pooled = mean_sd.estimate(groups, all_of(groups.n))
    assert by_range.centre == pytest.approx(exact["grand_mean"], rel=1e-9)
    assert groups.range.mean() == pytest.approx(exact["rbar"], rel=1e-9)
    assert groups.s.mean() == pytest.approx(exact["sbar"], rel=1e-9)
    means = mean_range.location(by_range.centre, by_range.sigma, groups.n, 3.0)
    ranges = mean_range.spread(by_range.sigma, groups.n, 3.0)
    assert means.upper[0] == pytest.approx(exact["xbar_ucl_R"], rel=1e-8)
    assert means.lower[0] == pytest.approx(exact["xbar_lcl_R"], rel=1e-8)
    assert ranges.upper[0] == pytest.approx(exact["r_ucl"], rel=1e-8)
    assert np.isnan(ranges.lower).all()  # published as 0
    means_by_s = mean_sd.location(by_s.centre, by_s.sigma, groups.n, 3.0)
    deviations = mean_sd.spread(by_s.sigma, groups.n, 3.0)
    assert means_by_s.upper[0] == pytest.approx(exact["xbar_ucl_S"], rel=1e-8)
    assert means_by_s.lower[0] == pytest.approx(exact["xbar_lcl_S"], rel=1e-8)
    assert deviations.upper[0] == pytest.approx(exact["s_ucl"], rel=1e-8)
    assert {name: value for name, value, _ in pooled.figures}["pooled s"] == pytest.approx(
        exact["pooled_s"], rel=1e-8
    )
    assert pooled.dof == 100
    # Published with A2 = .577 and D4 = 2.114, three decimals: 2e-4 is what that costs.
    assert by_range.centre == pytest.approx(published["grand_mean"], abs=5e-5)
    assert groups.range.mean() == pytest.approx(published["rbar"], abs=5e-6)
    assert means.upper[0] == pytest.approx(published["xbar_ucl"], abs=2e-4)
    assert means.lower[0] == pytest.approx(published["xbar_lcl"], abs=2e-4)
    assert ranges.upper[0] == pytest.approx(published["r_ucl"], abs=2e-4)


def test_fractions() -> None:
    rows, results = reference.example("p_nist_wafer_chips")
    events, size = column(rows, "nonconforming"), column(rows, "n")
    found = proportion.estimate(events, size, all_of(size))
    lines = proportion.lines(found.centre, size, 3.0)
    exact, published = results["computed"], results["published"]
    assert found.centre == pytest.approx(exact["pbar"], rel=1e-9)
    assert lines.upper[0] == pytest.approx(exact["ucl"], rel=1e-9)
    assert lines.lower[0] == pytest.approx(exact["lcl"], rel=1e-9)
    assert outside(events / size, lines) == exact["out"]
    for value, printed in ((found.centre, "pbar"), (lines.upper[0], "ucl"), (lines.lower[0], "lcl")):
        assert value == pytest.approx(published[printed], abs=6e-5)
    # The same counts on an np chart lead to the same points.
    counts = number_nonconforming.estimate(events, size, all_of(size))
    assert outside(events, number_nonconforming.lines(counts.centre, size, 3.0)) == exact["out"]


def test_counts_with_one_exactly_on_the_limit() -> None:
    rows, results = reference.example("c_nist_wafer_defects")
    events = column(rows, "count")
    found = count.estimate(events, all_of(events))
    lines = count.lines(found.centre, len(events), 3.0)
    exact, published = results["computed"], results["published"]
    assert (found.centre, lines.upper[0], lines.lower[0]) == (
        published["cbar"],
        published["ucl"],
        published["lcl"],
    )
    assert outside(events, lines) == exact["out_strictly_beyond"]
    assert events[exact["on_a_limit"][0] - 1] == lines.upper[0]
    # One unit of opportunity each: the u chart is the c chart.
    ones = np.ones(len(events))
    assert outside(
        events, rate.lines(rate.estimate(events, ones, all_of(ones)).centre, ones, 3.0)
    ) == outside(events, lines)


def test_overdispersion_of_large_fractions() -> None:
    """Method of Laney (2002); data made up, results computed."""
    rows, results = reference.example("laney_p_made_up")
    events, size = column(rows, "nonconforming"), column(rows, "n")
    exact = results["computed"]
    found = proportion.estimate(events, size, all_of(size))
    lines = proportion.lines(found.centre, size, 3.0)
    z = (events / size - lines.centre) / lines.sigma
    assert found.centre == pytest.approx(exact["centre"], rel=1e-9)
    assert lines.sigma.tolist() == pytest.approx(exact["sd"], rel=1e-8)
    assert z.tolist() == pytest.approx(exact["z"], rel=1e-8)
    assert attributes.overdispersion(z, all_of(z)) == pytest.approx(exact["sigma_z"], rel=1e-8)
    assert outside(events / size, lines) == exact["out_plain"]
