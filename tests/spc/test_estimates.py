"""Degenerate baselines are named, degrees of freedom hold in simulation, limits that are none are empty."""

from __future__ import annotations

import math
from types import ModuleType

import numpy as np
import pytest

from holdsteady.arrays import Floats
from holdsteady.spc import individuals, mean_range, mean_sd, median_range
from holdsteady.spc.constants import degrees_of_freedom
from holdsteady.spc.subgroups import Subgroups, summarise

SUBGROUP_CHARTS = (mean_range, mean_sd, median_range)


def groups_of(*sizes: int, values: Floats | None = None) -> Subgroups:
    starts = np.concatenate([[0], np.cumsum(sizes)[:-1]]).astype(np.int64)
    return summarise(np.arange(sum(sizes), dtype=np.float64) if values is None else values, starts)


@pytest.mark.parametrize("module", SUBGROUP_CHARTS)
def test_constant_readings(module: ModuleType) -> None:
    # 0.1 three times adds up to more than 0.3; no variation must come of that.
    groups = groups_of(3, 3, 3, values=np.full(9, 0.1))
    assert groups.mean.tolist() == [0.1] * 3
    assert groups.s.tolist() == [0.0] * 3
    for estimator in ("mean-range", "mean-s", "pooled", "weighted"):
        found = module.estimate(groups, np.ones(3, dtype=np.bool_), estimator)
        assert (found.sigma, found.dof, found.finding) == (None, None, "no variation in the baseline")
        assert found.centre == pytest.approx(0.1, rel=1e-15)
        assert found.overall_sigma == 0.0


@pytest.mark.parametrize("module", SUBGROUP_CHARTS)
def test_subgroups_of_one(module: ModuleType) -> None:
    found = module.estimate(groups_of(1, 1, 1), np.ones(3, dtype=np.bool_))
    assert (found.sigma, found.finding) == (None, "no ranges in the baseline")
    assert found.centre == 1.0
    assert found.overall_sigma == 1.0
    lines = module.spread(2.0, np.array([1.0, 4.0]), 3.0)
    assert np.isnan([lines.centre[0], lines.upper[0], lines.lower[0], lines.sigma[0]]).all()
    assert lines.upper[1] > lines.centre[1] > 0
    alone = module.location(0.0, 2.0, np.array([1.0, 4.0]), 3.0)
    assert alone.upper[0] == 6.0
    assert alone.upper[1] < 6.0


@pytest.mark.parametrize("module", SUBGROUP_CHARTS)
def test_nothing_to_estimate_from(module: ModuleType) -> None:
    found = module.estimate(groups_of(3, 3), np.zeros(2, dtype=np.bool_))
    assert math.isnan(found.centre)
    assert (found.sigma, found.points, found.finding, found.figures) == (
        None,
        0,
        "no points in the baseline",
        (),
    )
    with pytest.raises(ValueError, match="none of mean-range, mean-s, pooled, weighted"):
        module.estimate(groups_of(3, 3), np.ones(2, dtype=np.bool_), "median-moving-range")


def test_centre_is_weighted_by_n() -> None:
    groups = groups_of(1, 3, values=np.array([0.0, 4.0, 5.0, 6.0]))
    use = np.ones(2, dtype=np.bool_)
    assert mean_range.estimate(groups, use).centre == mean_sd.estimate(groups, use).centre == 3.75
    assert median_range.estimate(groups, use).centre == 2.5  # the mean of the medians


def test_centre_line_without_sigma() -> None:
    for lines in (
        individuals.location(5.0, None, 2, 3.0),
        mean_range.location(5.0, None, np.array([3.0, 4.0]), 3.0),
    ):
        assert lines.centre.tolist() == [5.0, 5.0]
        assert np.isnan([lines.lower, lines.upper, lines.sigma]).all()
    assert np.isnan(mean_sd.spread(None, np.array([3.0]), 3.0).centre).all()
    assert np.isnan(individuals.spread(None, 2).centre).all()


def test_limits_of_moving_ranges() -> None:
    """Of a steady normal process 0.27 % of ranges pass 3 * sqrt(2) sigma (exact); 3.686 from tables of D2."""
    assert individuals.spread(1.0, 1).upper[0] == pytest.approx(3 * math.sqrt(2), rel=1e-15)
    assert individuals.spread(1.0, 1, "three-sigma").upper[0] == pytest.approx(3.686, abs=5e-4)
    assert math.erfc(3 * math.sqrt(2) / 2) == pytest.approx(0.0027, abs=5e-6)
    with pytest.raises(ValueError, match="none of probability, three-sigma"):
        individuals.spread(1.0, 1, "two-sigma")
    one = np.ones(1)
    with pytest.raises(ValueError, match="none of mean-moving-range"):
        individuals.estimate(one, one, one > 0, one > 0, "pooled")


def test_spread_lower_limits_start_at_seven_readings() -> None:
    """D3 is 0 up to n = 6, B3 up to n = 5 (ISO 7870-2 tables, from memory)."""
    n = np.arange(2, 12, dtype=np.float64)
    assert np.isnan(mean_range.spread(1.0, n, 3.0).lower).sum() == 5
    assert np.isnan(mean_sd.spread(1.0, n, 3.0).lower).sum() == 4


@pytest.mark.parametrize("estimator", ["mean-moving-range", "median-moving-range"])
def test_degrees_of_freedom_of_moving_ranges(estimator: str) -> None:
    rng, segment = np.random.default_rng(3), np.repeat([0, 1], 50).astype(np.int64)
    use = np.ones(100, dtype=np.bool_)
    sigmas, dof = [], 0.0
    for _ in range(3000):
        x = rng.normal(size=100)
        found = individuals.estimate(x, individuals.moving_range(x, segment), use, use, estimator)
        assert found.sigma is not None
        assert found.dof is not None
        sigmas.append(found.sigma)
        dof = found.dof
    relative = float(np.var(sigmas) / np.mean(sigmas) ** 2)
    # A variance from 3000 draws has a standard error of 2.6 %; the median's is a large-sample value.
    assert dof == pytest.approx(degrees_of_freedom(relative), rel=0.10)


@pytest.mark.parametrize("estimator", ["mean-range", "mean-s", "pooled", "weighted"])
def test_subgroup_estimators_are_unbiased_with_their_degrees_of_freedom(estimator: str) -> None:
    rng, sizes = np.random.default_rng(9), (2, 3, 5, 5, 8, 1, 4)
    use = np.ones(len(sizes), dtype=np.bool_)
    sigmas, dof = [], 0.0
    for _ in range(4000):
        found = mean_sd.estimate(groups_of(*sizes, values=rng.normal(10.0, 2.0, sum(sizes))), use, estimator)
        assert found.sigma is not None
        assert found.dof is not None
        sigmas.append(found.sigma)
        dof = found.dof
    assert np.mean(sigmas) == pytest.approx(2.0, abs=4 * float(np.std(sigmas)) / math.sqrt(4000))
    assert dof == pytest.approx(degrees_of_freedom(float(np.var(sigmas) / 4.0)), rel=0.10)


def test_what_summarise_refuses() -> None:
    values = np.arange(4.0)
    for starts in ([1, 2], [0, 2, 2], [0, 4]):
        with pytest.raises(ValueError, match="starts must begin with 0"):
            summarise(values, np.array(starts, dtype=np.int64))
    with pytest.raises(ValueError, match="without a subgroup"):
        summarise(values, np.array([], dtype=np.int64))
    assert summarise(np.array([]), np.array([], dtype=np.int64)).n.shape == (0,)


def test_figures_tell_the_calculation() -> None:
    found = mean_range.estimate(groups_of(3, 3), np.ones(2, dtype=np.bool_))
    names = [name for name, _, _ in found.figures]
    assert names == ["grand mean", "mean range", "d2 for n = 3", "sigma"]
    values = {name: value for name, value, _ in found.figures}
    assert values["mean range"] / values["d2 for n = 3"] == pytest.approx(values["sigma"], rel=1e-12)
    assert found.sigma == values["sigma"]
    assert [unit for _, _, unit in found.figures] == [True, True, False, True]
