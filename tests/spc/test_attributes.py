"""Limits of counts against exact ones, whole-count limits, medians, overdispersion."""

from __future__ import annotations

import numpy as np
import pytest
from scipy import stats
from tests.spc import reference

from holdsteady.spc import attributes, count, number_nonconforming, proportion, rate

TABLE = reference.rows("attributes")  # computed


@pytest.mark.parametrize("row", TABLE, ids=lambda row: f"{row['chart'][:2]}-{row['n']}-{row['p0_or_c0']}")
def test_three_sigma_limits(row: dict[str, str]) -> None:
    centre, lower, upper = (float(row[key]) for key in ("centre", "lcl3_clipped", "ucl3"))
    counts = np.arange(0, 400.0)
    if row["n"]:
        n = float(row["n"])
        size = np.full(1, n)
        lines = number_nonconforming.lines(centre, size, 3.0)
        fraction = proportion.lines(float(row["p0_or_c0"]), size, 3.0)
        assert np.allclose(fraction.upper * n, lines.upper, rtol=1e-12, atol=0, equal_nan=True)
        assert np.allclose(fraction.lower * n, lines.lower, rtol=1e-12, atol=0, equal_nan=True)
        chance = stats.binom.pmf(counts, int(n), float(row["p0_or_c0"]))
    else:
        lines = count.lines(centre, 1, 3.0)
        chance = stats.poisson.pmf(counts, centre)
    if lower > 0:
        assert lines.lower[0] == pytest.approx(lower, abs=1e-8)
    else:
        assert np.isnan(lines.lower[0])
    assert lines.upper[0] == pytest.approx(upper, abs=1e-8)
    # The chance of a count strictly beyond tells whether a whole-count limit is told right.
    assert chance[counts > lines.upper[0]].sum() == pytest.approx(
        float(row["p_above_strict"]), rel=1e-6, abs=1e-12
    )
    assert chance[counts < lines.lower[0]].sum() == pytest.approx(
        float(row["p_below_strict"]), rel=1e-6, abs=1e-12
    )


@pytest.mark.parametrize(("mean", "limits"), [(4.0, (None, 10.0)), (9.0, (None, 18.0)), (16.0, (4.0, 28.0))])
def test_limits_that_are_whole_counts(mean: float, limits: tuple[float | None, float]) -> None:
    lines = count.lines(mean, 2, 3.0)
    assert lines.upper.tolist() == [limits[1]] * 2
    assert np.isnan(lines.lower).all() if limits[0] is None else lines.lower.tolist() == [limits[0]] * 2
    # The mean in sevenths: the same limits come back exactly from rates.
    size = np.full(1, 7.0)
    rates = rate.lines(mean / 7.0, size, 3.0)
    assert rates.upper[0] == limits[1] / 7.0


def test_upper_limit_of_a_fraction_not_below_one() -> None:
    lines = proportion.lines(0.9, np.array([5.0, 400.0]), 3.0)
    assert np.isnan(lines.upper[0])
    assert lines.upper[1] == pytest.approx(0.945)  # 0.9 + 3 * sqrt(0.09 / 400), exact
    assert np.isnan(number_nonconforming.lines(4.5, np.array([5.0]), 3.0).upper[0])


def test_baselines_without_variation() -> None:
    nothing, size, use = np.zeros(3), np.full(3, 50.0), np.ones(3, dtype=np.bool_)
    for found in (
        proportion.estimate(nothing, size, use),
        number_nonconforming.estimate(nothing, size, use),
        rate.estimate(nothing, size, use),
        count.estimate(nothing, use),
    ):
        assert (found.centre, found.finding, found.sigma) == (0.0, "no events in the baseline", None)
    assert proportion.estimate(size, size, use).finding == "every unit in the baseline counted"
    for lines in (
        proportion.lines(0.0, size, 3.0),
        proportion.lines(1.0, size, 3.0),
        count.lines(0.0, 3, 3.0),
    ):
        assert np.isnan([lines.lower, lines.upper, lines.sigma]).all()
    assert proportion.estimate(nothing, size, ~use).finding == "no points in the baseline"
    assert number_nonconforming.estimate(nothing, size, ~use).finding == "no points in the baseline"


def test_missing_points_do_not_count() -> None:
    events, size = np.array([1.0, np.nan, 3.0]), np.array([10.0, 99.0, 30.0])
    found = proportion.estimate(events, size, np.ones(3, dtype=np.bool_))
    assert (found.centre, found.points) == (0.1, 2)
    assert [name for name, _, _ in found.figures] == ["sum of counts", "sum of sizes", "mean fraction"]


def test_unequal_sizes_point_to_the_other_chart() -> None:
    with pytest.raises(ValueError, match="use a p chart"):
        number_nonconforming.estimate(np.ones(2), np.array([10.0, 11.0]), np.ones(2, dtype=np.bool_))


def test_sides_of_the_median() -> None:
    counts, size = np.arange(6, dtype=np.float64), np.full(6, 5.0)
    # Binomial(5, 1/2) has the medians 2 and 3; neither lies on both, so 2 is below and 3 above.
    assert attributes.median_side("binomial", counts, size, 0.5).tolist() == [-1, -1, -1, 1, 1, 1]
    assert attributes.median_side("binomial", counts, size, 0.3).tolist() == [-1, 0, 1, 1, 1, 1]
    assert attributes.median_side("binomial", counts, size, 0.0).tolist() == [0, 1, 1, 1, 1, 1]
    assert attributes.median_side("binomial", counts, size, 1.0).tolist() == [-1, -1, -1, -1, -1, 0]
    # Median of Poisson(1) is 1 (exact: P(X = 0) = 0.368, P(X <= 1) = 0.736).
    assert attributes.median_side("poisson", counts, np.ones(6), 1.0).tolist() == [-1, 0, 1, 1, 1, 1]
    assert attributes.median_side("poisson", np.array([np.nan]), np.ones(1), 1.0).tolist() == [0]


@pytest.mark.parametrize(("size", "p"), [(50, 0.1), (317, 0.02), (2000, 0.37), (100_000, 0.013)])
def test_binomial_medians_of_a_general_library(size: int, p: float) -> None:
    median = float(stats.binom.median(size, p))
    near = np.array([median - 1, median, median + 1])
    assert attributes.median_side("binomial", near, np.full(3, float(size)), p).tolist() == [-1, 0, 1]
    mean = size * p
    median = float(stats.poisson.median(mean))
    near = np.array([median - 1, median, median + 1])
    assert attributes.median_side("poisson", near, np.full(3, float(size)), p).tolist() == [-1, 0, 1]


def test_expected_count() -> None:
    size = np.array([100.0, 20.0])
    assert attributes.expected("poisson", size, 0.5).tolist() == [50.0, 10.0]
    assert attributes.expected("binomial", size, 0.25).tolist() == [25.0, 5.0]
    assert attributes.expected("binomial", size, 0.75).tolist() == [25.0, 5.0]  # the others are the rarer


def test_overdispersion_needs_neighbours() -> None:
    z = np.array([0.0, 2.0, np.nan, 1.0, 4.0])
    use = np.ones(5, dtype=np.bool_)
    assert attributes.overdispersion(z, use) == pytest.approx(2.5 * np.sqrt(np.pi) / 2)
    segment = np.array([0, 0, 0, 0, 1], dtype=np.int64)
    assert attributes.overdispersion(z, use, segment) == pytest.approx(2.0 * np.sqrt(np.pi) / 2)
    use[1] = False
    assert attributes.overdispersion(z, use, segment) is None


def test_overdispersion_of_true_counts_is_about_one() -> None:
    rng = np.random.default_rng(2002)
    size = rng.integers(300, 900, size=4000).astype(np.float64)
    events = rng.binomial(size.astype(int), 0.08).astype(np.float64)
    lines = proportion.lines(0.08, size, 3.0)
    found = attributes.overdispersion((events / size - 0.08) / lines.sigma, np.ones(4000, dtype=np.bool_))
    assert found == pytest.approx(1.0, abs=0.05)
