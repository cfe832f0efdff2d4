"""Factors against independent computation, published tables, and other ways to integrate."""

from __future__ import annotations

import math
import re

import numpy as np
import pytest
from scipy import integrate, stats
from tests.spc import reference

from holdsteady.arrays import Floats
from holdsteady.spc import individuals, mean_range, mean_sd
from holdsteady.spc.constants import MEDIAN_MOVING_RANGE, c4, d2, d3, degrees_of_freedom, median_error

TABLE = reference.rows("constants")  # sources and status stand in the rows
BASIC = {"d2": d2, "d3": d3, "c4": c4}


def factor(name: str, n: int) -> float:
    """A factor of the tables, read off limits that the charts draw; 0 for no lower limit."""
    if name in BASIC:
        return BASIC[name](n)
    size, sigma = np.array([float(n)]), 1.0
    if name == "E2":
        return float(individuals.location(0.0, 1 / d2(n), 1, 3.0).upper[0])
    over = {"A2": d2(n), "A3": c4(n), "D3": d2(n), "D4": d2(n), "B3": c4(n), "B4": c4(n)}.get(name, 1.0)
    if name.startswith("A"):
        return float(mean_range.location(0.0, sigma / over, size, 3.0).upper[0])
    lines = (mean_range if name.startswith("D") else mean_sd).spread(sigma / over, size, 3.0)
    limit = float((lines.lower if name in ("D1", "D3", "B3", "B5") else lines.upper)[0])
    return 0.0 if math.isnan(limit) else limit


@pytest.mark.parametrize("row", TABLE, ids=lambda row: f"{row['constant']}-{row['n']}")
def test_factors_of_the_tables(row: dict[str, str]) -> None:
    found = factor(row["constant"], int(row["n"]))
    assert found == pytest.approx(float(row["computed"]), abs=1e-8)
    if row["published"]:
        # Tables were made from rounded d2 and d3: up to 1.5 units of their last digit, see the note.
        units = 1.5 if row["note"] else 0.51
        assert found == pytest.approx(float(row["published"]), abs=units * 10.0 ** -int(row["decimals"]))


def test_every_note_is_about_the_last_digit() -> None:
    assert {re.split(r"[;(]", row["note"])[0].strip() for row in TABLE} <= {
        "", "published value is not the correctly rounded computed value",
    }  # fmt: skip


@pytest.mark.parametrize("n", [2, 3, 4, 7, 10, 25, 100, 1000])
def test_range_by_adaptive_integration(n: int) -> None:
    """Tippett (1925): d2 is the integral of 1 - F**n - (1 - F)**n; computed with scipy.integrate.quad."""

    def gap(x: float) -> float:
        return float(1 - stats.norm.cdf(x) ** n - stats.norm.sf(x) ** n)

    mean = 2 * integrate.quad(gap, 0, 12, epsabs=1e-12, epsrel=1e-12, limit=200)[0]
    assert d2(n) == pytest.approx(mean, abs=1e-10)


@pytest.mark.parametrize("n", [2, 3, 5, 12, 60])
def test_spread_of_the_range_by_the_joint_law_of_the_extremes(n: int) -> None:
    """E R**2 = 2 * integral of P(lowest <= x, highest > y) over x < y (David & Nagaraja 2003), on a grid."""
    step = 0.02
    x = np.arange(-8.0, 8.0 + step, step)
    low, high = stats.norm.cdf(x), stats.norm.sf(x)
    between = np.triu(low[np.newaxis, :] - low[:, np.newaxis])
    apart = 1 - low[np.newaxis, :] ** n - high[:, np.newaxis] ** n + between**n
    # The edge x = y, where half a cell lies inside, leaves an error of the order of the step squared.
    half = np.triu(np.ones_like(apart)) - 0.5 * np.eye(len(x))
    square = 2 * step**2 * float((apart * half).sum())
    assert d3(n) == pytest.approx(math.sqrt(square - d2(n) ** 2), abs=3e-4)


def test_closed_forms() -> None:
    """Range of two and three: d2 = 2/sqrt(pi), 3/sqrt(pi), d3(2) = sqrt(2 - 4/pi) (David & Nagaraja 2003)."""
    assert d2(2) == pytest.approx(2 / math.sqrt(math.pi), abs=1e-10)
    assert d2(3) == pytest.approx(3 / math.sqrt(math.pi), abs=1e-10)
    assert d3(2) == pytest.approx(math.sqrt(2 - 4 / math.pi), abs=1e-10)
    # Var R for n = 3: E R**2 = 2 + 3 sqrt(3) / pi by the bivariate normal orthant (exact).
    assert d3(3) == pytest.approx(math.sqrt(2 + 3 * math.sqrt(3) / math.pi - 9 / math.pi), abs=1e-10)


@pytest.mark.parametrize(("n", "mean", "deviation"), [(500, 6.0, 0.6), (1000, 6.5, 0.5)])
def test_large_samples_by_simulation(n: int, mean: float, deviation: float) -> None:
    draws = np.random.default_rng(4).normal(size=(4000, n))
    ranges = np.ptp(draws, axis=1)
    error = ranges.std() / math.sqrt(4000)
    assert d2(n) == pytest.approx(float(ranges.mean()), abs=4 * error)
    assert d3(n) == pytest.approx(float(ranges.std()), rel=0.06)
    assert (d2(n), d3(n)) == pytest.approx((mean, deviation), abs=0.1)
    medians = np.median(draws, axis=1)
    assert median_error(n) == pytest.approx(float(medians.std()), rel=0.05)


def test_error_of_the_median() -> None:
    """Odd n through the beta distribution of the middle quantile, even n by simulation and a table."""
    assert median_error(1) == 1.0
    assert median_error(2) == pytest.approx(math.sqrt(0.5), abs=1e-12)
    for n in (3, 5, 9, 25):
        # The median of an odd sample is the quantile at a beta variable.
        half = (n + 1) / 2
        square = integrate.quad(
            lambda p, h=half: stats.norm.ppf(p) ** 2 * stats.beta.pdf(p, h, h), 0, 1, epsabs=1e-13, limit=400
        )[0]
        assert median_error(n) == pytest.approx(math.sqrt(square), abs=1e-8)
    rng = np.random.default_rng(8)
    for n in (4, 6, 10):
        medians = np.median(rng.normal(size=(400_000, n)), axis=1)
        assert median_error(n) == pytest.approx(float(medians.std()), rel=4 / math.sqrt(2 * 400_000))
    # n = 4 from the tabulated covariances of order statistics: (V22 + C23) / 2, V22 = 0.3604553434,
    # C23 = 0.2359438935 (Sarhan & Greenberg 1962, from memory).
    assert median_error(4) == pytest.approx(math.sqrt((0.3604553434 + 0.2359438935) / 2), abs=1e-9)


def test_c4_is_smooth_where_the_series_takes_over() -> None:
    sizes = np.array([1000.0, 1000.999999, 1001.000001, 1002.0])
    assert np.all(np.diff(c4(sizes)) > 0)
    for degrees in (900.0, 5000.0):
        exact = math.sqrt(2 / degrees) * math.exp(math.lgamma((degrees + 1) / 2) - math.lgamma(degrees / 2))
        assert c4(degrees + 1) == pytest.approx(exact, abs=1e-11)
    assert c4(1e9) == pytest.approx(1 - 0.25e-9, abs=1e-15)


def test_median_moving_range() -> None:
    assert pytest.approx(0.9539, abs=5e-5) == MEDIAN_MOVING_RANGE  # definition, to its printed digits
    assert float(stats.halfnorm.median()) * math.sqrt(2) == pytest.approx(MEDIAN_MOVING_RANGE, rel=1e-12)


def test_arrays_are_taken_size_by_size() -> None:
    n = np.array([5, 2, 2, 9])
    for function in (d2, d3, c4, median_error):
        found = function(n)
        assert found.tolist() == [function(int(size)) for size in n]
    assert d2(np.array([4.0, 4.0])).tolist() == [d2(4)] * 2
    assert d2(np.array([], dtype=np.int64)).shape == (0,)


@pytest.mark.parametrize("wrong", [1, 0, np.array([2, 1]), np.array([2.5])])
def test_sizes_must_be_whole_and_two_at_least(wrong: int | Floats) -> None:
    with pytest.raises(ValueError, match="whole number of at least 2"):
        d2(wrong)
    with pytest.raises(ValueError, match="c4 needs n above 1"):
        c4(1)


@pytest.mark.parametrize("degrees", [0.5, 1.0, 7.3, 24.0, 1e5])
def test_degrees_of_freedom_invert_the_relative_variance(degrees: float) -> None:
    assert degrees_of_freedom(1 / c4(degrees + 1) ** 2 - 1) == pytest.approx(degrees, rel=1e-6)
