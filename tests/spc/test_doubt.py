"""Doubt about limits against a general library, its false alarms, and the smallest step of readings."""

from __future__ import annotations

import numpy as np
import pytest
from scipy import stats

from holdsteady.spc.doubt import compare, resolution


def test_p_values_of_a_general_library() -> None:
    """scipy.stats: ttest_ind with unequal variances, two-sided F from the f distribution."""
    rng = np.random.default_rng(1)
    baseline, recent = rng.normal(5, 1, 25), rng.normal(5.3, 1.4, 60)
    found = compare(baseline, recent)
    assert found.level_p == pytest.approx(stats.ttest_ind(baseline, recent, equal_var=False).pvalue, rel=1e-9)
    ratio = recent.var(ddof=1) / baseline.var(ddof=1)
    tail = min(stats.f.cdf(ratio, 59, 24), stats.f.sf(ratio, 59, 24))
    assert found.spread_p == pytest.approx(2 * tail, rel=1e-9)
    centred = recent - recent.mean()
    assert found.autocorrelation == pytest.approx(
        (centred[1:] * centred[:-1]).sum() / (centred**2).sum(), rel=1e-9
    )


def test_what_makes_limits_doubtful() -> None:
    rng = np.random.default_rng(2)
    baseline = rng.normal(size=50)
    steady = compare(baseline, rng.normal(size=200))
    assert (steady.doubtful, steady.reasons) == (False, ())
    assert compare(baseline, rng.normal(1.0, 1, 200)).reasons == ("the level differs from the baseline's",)
    assert compare(baseline, rng.normal(0, 2, 200)).reasons == ("the spread differs from the baseline's",)
    walk = rng.normal(size=200)
    for i in range(1, 200):
        walk[i] = 0.7 * walk[i - 1] + 0.714 * walk[i]
    related = compare(baseline, walk)
    assert related.doubtful
    assert "the autocorrelation differs from the baseline's" in related.reasons


def test_too_few_points_are_not_tested() -> None:
    baseline = np.arange(25.0)
    for few in (compare(baseline, np.full(29, 1e6)), compare(baseline[:7], np.full(99, 1e6))):
        assert not few.doubtful
        assert (few.level_p, few.spread_p, few.autocorrelation_p) == (1.0, 1.0, 1.0)
    gaps = np.full(60, np.nan)
    gaps[:29] = 1e6
    assert not compare(baseline, gaps).doubtful


def test_without_variation() -> None:
    flat = np.full(40, 0.1)
    same = compare(flat, flat)
    assert not same.doubtful
    assert same.autocorrelation == 0.0
    moved = compare(flat, np.full(40, 0.2))
    assert moved.doubtful
    assert (moved.level_p, moved.spread_p) == (0.0, 1.0)
    stuck = compare(np.arange(40.0), np.full(40, 19.5))
    assert stuck.reasons == ("the spread differs from the baseline's",)


@pytest.mark.parametrize(("before", "after"), [(25, 30), (25, 400), (100, 100)])
def test_false_alarms_stay_rare(before: int, after: int) -> None:
    """Three tests at 0.1 %: at most 0.3 % (exact bound), of 4000 at most 12 + 4 * sqrt(12)."""
    rng = np.random.default_rng(before + after)
    alarms = sum(compare(rng.normal(size=before), rng.normal(size=after)).doubtful for _ in range(4000))
    assert alarms <= 26


@pytest.mark.parametrize(
    ("step", "centre"),
    [
        (0.001, 12.0),
        (0.005, 12.0),
        (0.25, -3.0),
        (2.0, 1e6),
        (5.0, 300.0),
        (0.1, 1013.0),
        (1 / 64, 0.5),
        (0.01, 1e5),
    ],
)
def test_resolution_of_rounded_readings(step: float, centre: float) -> None:
    rng = np.random.default_rng(11)
    for count in (30, 3000):
        readings = np.round(rng.normal(centre, 20 * step, count) / step) * step
        assert resolution(readings) == pytest.approx(step, rel=1e-9)


def test_resolution_of_converted_readings() -> None:
    """Tenths of a degree Fahrenheit shown in Celsius lie 1/18 apart."""
    fahrenheit = np.round(np.random.default_rng(3).normal(68, 2, 400), 1)
    assert resolution((fahrenheit - 32) / 1.8) == pytest.approx(1 / 18, rel=1e-6)


def test_resolution_is_the_finest_step_seen() -> None:
    coarse = np.round(np.random.default_rng(4).normal(12, 0.5, 200_000), 2)
    assert resolution(coarse) == 0.01
    assert resolution(np.append(coarse, 12.003)) == 0.001
    thirds = np.round(np.random.default_rng(4).normal(12, 0.5, 200_000) * 30) / 30
    assert resolution(thirds) == pytest.approx(1 / 30, rel=1e-9)
    assert resolution(np.append(thirds, 12 + 1 / 60)) == pytest.approx(1 / 60, rel=1e-9)


def test_no_resolution() -> None:
    assert resolution(np.array([])) is None
    assert resolution(np.array([1.0])) is None
    assert resolution(np.array([2.5, 2.5, np.nan])) is None
    assert resolution(np.random.default_rng(5).normal(size=1000)) is None
    assert resolution(np.array([0.1 + 0.2, 0.3, 0.5])) == pytest.approx(0.2)
