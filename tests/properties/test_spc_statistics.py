"""Estimates and limits on random series: as the plain loops have it, and moving with shift and scale."""

from __future__ import annotations

import math
from fractions import Fraction

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from tests import naive

from holdsteady.arrays import Floats
from holdsteady.spc import (
    attributes,
    count,
    individuals,
    mean_range,
    mean_sd,
    median_range,
    number_nonconforming,
    proportion,
    rate,
    rules,
)  # fmt: skip
from holdsteady.spc.changepoint import likely_start
from holdsteady.spc.constants import d2, d3, median_error
from holdsteady.spc.result import Lines
from holdsteady.spc.subgroups import Subgroups, summarise

CLOSE = 1e-9
READING = st.one_of(st.integers(-30, 30).map(float), st.floats(-1e3, 1e3).map(lambda x: round(x, 3)))
GROUPS = st.lists(st.lists(READING, min_size=1, max_size=9), min_size=2, max_size=12)


def gathered(groups: list[list[float]]) -> Subgroups:
    starts = np.cumsum([0] + [len(group) for group in groups[:-1]])
    return summarise(np.array([v for group in groups for v in group]), starts.astype(np.int64))


def near(found: float, expected: float) -> bool:
    return math.isclose(found, expected, rel_tol=CLOSE, abs_tol=CLOSE)


@settings(max_examples=150, deadline=None)
@given(GROUPS)
def test_subgroups(groups: list[list[float]]) -> None:
    found = gathered(groups)
    for i, group in enumerate(groups):
        assert found.n[i] == len(group)
        assert near(found.mean[i], naive.mean(group))
        assert found.median[i] == pytest.approx(naive.median(group), rel=1e-15)
        if len(group) == 1:
            assert np.isnan(found.range[i])
            assert np.isnan(found.s[i])
        else:
            assert found.range[i] == max(group) - min(group)
            assert near(found.s[i], naive.standard_deviation(group))


@settings(max_examples=100, deadline=None)
@given(st.integers(1, 6), st.integers(1, 10), st.randoms(use_true_random=False))
def test_subgroups_of_one_size(n: int, many: int, random: object) -> None:
    values = np.random.default_rng(random.getrandbits(32)).normal(size=n * many).round(1)  # type: ignore[attr-defined]
    found = summarise(values, np.arange(many, dtype=np.int64) * n)
    assert np.allclose(found.median, np.median(values.reshape(many, n), axis=1), rtol=1e-15, atol=0)


@settings(max_examples=150, deadline=None)
@given(GROUPS, st.data())
def test_subgroup_charts(groups: list[list[float]], data: st.DataObject) -> None:
    use = data.draw(st.lists(st.booleans(), min_size=len(groups), max_size=len(groups)))
    used = [group for group, wanted in zip(groups, use, strict=True) if wanted]
    assume(any(len(group) > 1 and max(group) > min(group) for group in used))
    sizes = {len(group) for group in groups if len(group) > 1}
    factors = {n: d2(n) for n in sizes}, {n: d3(n) for n in sizes}
    expected = {
        "mean-range": naive.range_sigma(used, *factors),
        "mean-s": naive.mean_s_sigma(used),
        "pooled": naive.pooled_sigma(used),
        "weighted": naive.weighted_s_sigma(used),
    }
    summary, mask = gathered(groups), np.array(use)
    every = [value for group in used for value in group]
    for module, usual in ((mean_range, "mean-range"), (mean_sd, "pooled"), (median_range, "mean-range")):
        for estimator, sigma in expected.items():
            found = module.estimate(summary, mask, estimator)
            assert found.sigma is not None
            assert found.finding == ""
            assert near(found.sigma, sigma)
            assert found.points == len(used)
            assert found.overall_sigma is not None
            assert near(found.overall_sigma, naive.standard_deviation(every))
            centre = (
                naive.mean([naive.median(g) for g in used]) if module is median_range else naive.mean(every)
            )
            assert near(found.centre, centre)
        assert module.estimate(summary, mask).sigma == module.estimate(summary, mask, usual).sigma


@settings(max_examples=100, deadline=None)
@given(st.lists(st.integers(1, 9), min_size=1, max_size=8), st.floats(0.1, 50), st.floats(1, 5))
def test_subgroup_limits(sizes: list[int], sigma: float, width: float) -> None:
    n = np.array(sizes, dtype=np.float64)
    for i, size in enumerate(sizes):
        means = mean_range.location(7.0, sigma, n, width)
        assert near(means.upper[i], 7.0 + width * sigma / math.sqrt(size))
        assert near(mean_sd.location(7.0, sigma, n, width).lower[i], 7.0 - width * sigma / math.sqrt(size))
        medians = median_range.location(7.0, sigma, n, width)
        assert near(medians.upper[i], 7.0 + width * sigma * median_error(size))
        ranges, deviations = mean_range.spread(sigma, n, width), mean_sd.spread(sigma, n, width)
        if size == 1:
            assert all(
                np.isnan([line.upper[i], line.centre[i], line.sigma[i]]).all()
                for line in (ranges, deviations)
            )
            continue
        c4 = naive.bias_of_s(size - 1)
        for lines, centre, own in (
            (ranges, d2(size) * sigma, d3(size) * sigma),
            (deviations, c4 * sigma, math.sqrt(1 - c4**2) * sigma),
        ):
            assert near(lines.centre[i], centre)
            assert near(lines.upper[i], centre + width * own)
            lower = centre - width * own
            assert near(lines.lower[i], lower) if lower > 1e-9 * own else np.isnan(lines.lower[i])


@settings(max_examples=150, deadline=None)
@given(st.lists(st.one_of(READING, st.just(math.nan)), min_size=2, max_size=40), st.data())
def test_individuals(values: list[float], data: st.DataObject) -> None:
    n = len(values)
    breaks = data.draw(st.lists(st.sampled_from([0, 0, 0, 1]), min_size=n, max_size=n))
    use = np.array(data.draw(st.lists(st.booleans(), min_size=n, max_size=n)))
    segment = np.cumsum(breaks, dtype=np.int64)
    x = np.array(values)
    ranges = individuals.moving_range(x, segment)
    expected = naive.moving_ranges(values, segment.tolist())
    assert np.array_equal(ranges, np.array(expected), equal_nan=True)
    use_range = use & np.append(False, use[:-1])
    kept = [v for v, wanted in zip(values, use, strict=True) if wanted and not math.isnan(v)]
    kept_ranges = [r for r, wanted in zip(expected, use_range, strict=True) if wanted and not math.isnan(r)]
    found = individuals.estimate(x, ranges, use, use_range)
    by_median = individuals.estimate(x, ranges, use, use_range, "median-moving-range")
    assert found.points == len(kept)
    if kept:
        assert near(found.centre, naive.mean(kept))
    if len(kept) > 1:
        assert found.overall_sigma is not None
        assert near(found.overall_sigma, naive.standard_deviation(kept))
    if not kept_ranges:
        assert found.sigma is None
        assert found.finding == ("no ranges in the baseline" if kept else "no points in the baseline")
    elif max(kept_ranges) == 0:
        assert found.sigma is None
        assert found.finding == by_median.finding == "no variation in the baseline"
    else:
        assert found.sigma is not None
        assert near(found.sigma, naive.mean(kept_ranges) * math.sqrt(math.pi) / 2)
        if naive.median(kept_ranges) > 0:
            assert by_median.sigma is not None
            assert by_median.sigma == pytest.approx(naive.median(kept_ranges) / 0.9538725524, rel=1e-9)
        else:
            assert by_median.sigma is None
            assert by_median.finding == individuals.OVER_HALF_ZERO


@settings(max_examples=100, deadline=None)
@given(
    st.lists(st.tuples(st.integers(1, 400), st.floats(0, 1)), min_size=1, max_size=20),
    st.floats(0.5, 4),
)
def test_attribute_charts(drawn: list[tuple[int, float]], width: float) -> None:
    size = np.array([n for n, _ in drawn], dtype=np.float64)
    events = np.array([round(n * share) for n, share in drawn], dtype=np.float64)
    use = np.ones(len(size), dtype=np.bool_)
    centre = sum(round(n * share) for n, share in drawn) / sum(n for n, _ in drawn)
    for module, limits in ((proportion, naive.fraction_limits), (rate, naive.rate_limits)):
        found = module.estimate(events, size, use)
        assert found.sigma is None
        assert near(found.centre, centre)
        lines = module.lines(centre, size, width)
        for i, n in enumerate(size):
            check_limits(lines, i, limits(centre, float(n), width))
    mean_count = naive.mean(events.tolist())
    assert near(count.estimate(events, use).centre, mean_count)
    check_limits(count.lines(mean_count, 3, width), 2, naive.rate_limits(mean_count, 1.0, width))
    one = np.full(len(size), size.max())
    whole = number_nonconforming.estimate(events, one, use)
    assert near(whole.centre, mean_count)
    lines = number_nonconforming.lines(mean_count, one, width)
    lower, upper = naive.fraction_limits(mean_count / one[0], one[0], width)
    check_limits(lines, 0, (lower and lower * one[0], upper and upper * one[0]))


def check_limits(lines: Lines, i: int, expected: tuple[float | None, float | None]) -> None:
    for found, limit in zip((lines.lower[i], lines.upper[i]), expected, strict=True):
        assert np.isnan(found) if limit is None else near(found, limit)


@settings(max_examples=60, deadline=None)
@given(st.integers(1, 60), st.integers(0, 20), st.integers(1, 20))
def test_sides_of_the_binomial_median(size: int, above: int, below: int) -> None:
    probability = Fraction(above, above + below)
    counts = np.arange(size + 1, dtype=np.float64)
    found = attributes.median_side("binomial", counts, np.full(size + 1, float(size)), float(probability))
    assert found.tolist() == [naive.binomial_side(k, size, probability) for k in range(size + 1)]


@settings(max_examples=60, deadline=None)
@given(st.floats(0.05, 60), st.sampled_from([1.0, 2.5, 40.0]))
def test_sides_of_the_poisson_median(expected: float, size: float) -> None:
    counts = np.arange(90, dtype=np.float64)
    found = attributes.median_side("poisson", counts, np.full(90, size), expected / size)
    assert found.tolist() == [naive.poisson_side(k, expected) for k in range(90)]


@settings(max_examples=100, deadline=None)
@given(st.lists(st.floats(-5, 5), min_size=1, max_size=40))
def test_likely_start(z: list[float]) -> None:
    step = likely_start(np.array(z))
    start, low, high, shift = naive.likely_start(z)
    gains = [naive.mean(z[t:]) ** 2 * (len(z) - t) / 2 for t in (step.start, start)]
    assert near(gains[0], gains[1])  # where two starts are equally likely, either may be told
    if step.start == start:
        assert near(step.shift, shift)
    edge = [naive.mean(z[t:]) ** 2 * (len(z) - t) / 2 for t in (step.low, step.high)]
    if not any(near(gain, gains[1] - 2.5) for gain in edge):
        assert (step.low, step.high) == (low, high)


@settings(max_examples=60, deadline=None)
@given(
    st.lists(st.integers(-20, 20), min_size=10, max_size=60).filter(lambda x: len(set(x)) > 1),
    st.sampled_from([0.001, 0.5, 3.0, 100.0]),
    st.integers(-50, 50),
)
def test_individuals_move_with_shift_and_scale(values: list[int], scale: float, shift: int) -> None:
    def judged(x: Floats) -> tuple[float, float, list[list[int]]]:
        segment = np.zeros(len(x), dtype=np.int64)
        use = np.ones(len(x), dtype=np.bool_)
        found = individuals.estimate(x, individuals.moving_range(x, segment), use, use)
        assert found.sigma is not None
        lines = individuals.location(found.centre, found.sigma, len(x), 3.0)
        z = (x - lines.centre) / lines.sigma
        signals = [
            rules.find(
                rule, value=x, z=z, lower=lines.lower, upper=lines.upper, sigma=lines.sigma, segment=segment
            )
            for rule in rules.NELSON
        ]
        return found.centre, found.sigma, [[*s.direction, *s.first, *s.fired, *s.last] for s in signals]

    plain = np.array(values, dtype=np.float64)
    centre, sigma, signals = judged(plain)
    moved_centre, moved_sigma, moved_signals = judged(scale * (plain + shift))
    assert moved_centre == pytest.approx(scale * (centre + shift), rel=1e-9, abs=1e-9 * scale)
    assert moved_sigma == pytest.approx(scale * sigma, rel=1e-9)
    assert moved_signals == signals


@settings(max_examples=60, deadline=None)
@given(
    st.lists(st.lists(st.integers(-20, 20).map(float), min_size=2, max_size=6), min_size=4, max_size=12),
    st.sampled_from([0.001, 0.5, 3.0, 100.0]),
    st.integers(-50, 50),
)
def test_subgroup_charts_move_with_shift_and_scale(
    groups: list[list[float]], scale: float, shift: int
) -> None:
    assume(any(max(group) > min(group) for group in groups))
    moved = [[scale * (value + shift) for value in group] for group in groups]
    use = np.ones(len(groups), dtype=np.bool_)
    for module in (mean_range, mean_sd, median_range):
        for estimator in ("mean-range", "mean-s", "pooled", "weighted"):
            plain, other = (module.estimate(gathered(g), use, estimator) for g in (groups, moved))
            assert plain.sigma is not None
            assert other.sigma == pytest.approx(scale * plain.sigma, rel=1e-9)
            assert other.centre == pytest.approx(scale * (plain.centre + shift), rel=1e-9, abs=1e-9 * scale)
            assert other.dof == plain.dof
