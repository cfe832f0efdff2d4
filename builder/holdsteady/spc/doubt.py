"""Whether limits still fit the points they judge, and how finely the readings are taken."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from scipy.special import fdtr, fdtrc, ndtr, stdtr

from holdsteady.arrays import Floats

LEVEL = 0.001  # of each test
_LARGEST = 1e100  # beyond it counting decimals overflows, and no gauge reads so
RECENT_AT_LEAST = 30
BASELINE_AT_LEAST = 8


@dataclass(frozen=True, slots=True, kw_only=True)
class Doubt:
    """How recent points compare with the baseline; p-values are 1 where there was too little to test."""

    level_p: float
    spread_p: float
    autocorrelation: float  # lag 1, of the recent points; 0 where they do not vary
    autocorrelation_p: float
    doubtful: bool
    reasons: tuple[str, ...]  # in words, one for each test that fails


def compare(baseline: Floats, recent: Floats) -> Doubt:
    """Compare the points since limits came into force with those the limits were made from.

    Level by Welch's t, spread by F (two-sided), lag-1 autocorrelations by Fisher's z, each at the 0.1 %
    level. t and F take the points as independent; where they are not, doubt is right as well, for the
    limits then mislead.

    Parameters
    ----------
    baseline : (B,) plotted points, NaN where missing
    recent : (R,) plotted points; fewer than 30, or a baseline below 8, are not tested

    References
    ----------
    Welch, B. L. (1947), Biometrika 34, 28-35. Fisher, R. A. (1921), Metron 1, 3-32.
    """
    baseline, recent = baseline[~np.isnan(baseline)], recent[~np.isnan(recent)]
    correlation = _autocorrelation(recent)
    if len(recent) < RECENT_AT_LEAST or len(baseline) < BASELINE_AT_LEAST:
        return Doubt(
            level_p=1.0,
            spread_p=1.0,
            autocorrelation=correlation,
            autocorrelation_p=1.0,
            doubtful=False,
            reasons=(),
        )
    level = _level_p(baseline, recent)
    spread = _spread_p(_variance(baseline), len(baseline), _variance(recent), len(recent))
    related = _autocorrelation_p(baseline, recent)
    named = (
        (level, "the level differs from the baseline's"),
        (spread, "the spread differs from the baseline's"),
        (related, "the autocorrelation differs from the baseline's"),
    )
    reasons = tuple(words for p, words in named if p < LEVEL)
    return Doubt(
        level_p=level,
        spread_p=spread,
        autocorrelation=correlation,
        autocorrelation_p=related,
        doubtful=bool(reasons),
        reasons=reasons,
    )


def resolution(values: Floats) -> float | None:
    """Return the smallest step of the readings: the largest one of which all their differences are multiples.

    Readings written with few decimals are counted in units of their last decimal, and the step is the
    greatest common divisor of the differences of these whole numbers, exactly. Others (converted units) go
    through Euclid's algorithm on the gaps between sorted readings, all gaps at once: divide by the smallest,
    go on with the smallest remainder that is more than a ten-thousandth of the step. It is the finest step
    *seen*: few distinct readings can make it too large.

    Parameters
    ----------
    values : (R,) readings, NaN where missing

    Returns
    -------
    float, or None where the readings are all equal, or so fine that the step drowns in rounding.
    """
    known = values[np.isfinite(values)]
    if len(known) < 2 or np.ptp(known) == 0 or np.abs(known).max() > _LARGEST:
        return None
    decimals = _decimals(known)
    if decimals is not None:
        scaled = np.round(known * 10.0**decimals).astype(np.int64)
        return float(np.gcd.reduce(scaled - scaled[0])) / 10.0**decimals
    # A sample finds the step of a large set; readings that miss it join the sample until none does.
    lowest, highest = known.min(), known.max()
    sample = np.append(known[:: max(1, len(known) // 20_000)], [lowest, highest])
    for _ in range(12):
        step = _common_step(np.unique(sample))
        if step is None:
            return None
        multiples = (known - lowest) / step
        misfit = known[np.abs(multiples - np.round(multiples)) > 1e-3]
        if len(misfit) == 0:
            return step
        sample = np.append(sample, misfit[:20_000])
    return None


def _decimals(values: Floats) -> int | None:
    """Count the decimals that write every value, but for rounding; None where twelve do not suffice."""
    some = values[:100]
    for decimals in range(13):
        if not _whole(some, decimals):
            continue
        if _whole(values, decimals):
            return decimals
    return None


def _whole(values: Floats, decimals: int) -> bool:
    scaled = np.abs(values) * 10.0**decimals
    rounding = 4.0 * np.finfo(np.float64).eps * scaled
    return bool(((np.abs(scaled - np.round(scaled)) <= rounding) & (rounding < 1e-3)).all())


def _common_step(distinct: Floats) -> float | None:
    gaps = np.diff(distinct)
    rounding = 8.0 * np.finfo(np.float64).eps * np.maximum(np.abs(distinct[1:]), np.abs(distinct[:-1]))
    gaps, rounding = gaps[gaps > rounding], rounding[gaps > rounding]
    if len(gaps) == 0:
        return None
    step = float(gaps.min())
    while step > 100.0 * float(np.median(rounding)):
        remainder = np.abs(gaps - np.round(gaps / step) * step)
        coarse = remainder[remainder > 1e-4 * step + rounding]
        if len(coarse) == 0:
            # Averaged over all gaps, the step loses most of the rounding of a single one.
            return float(gaps.sum() / np.round(gaps / step).sum())
        step = float(coarse.min())
    return None


def _variance(x: Floats) -> float:
    return float(np.var(x, ddof=1)) if np.ptp(x) > 0 else 0.0


def _level_p(first: Floats, second: Floats) -> float:
    parts = np.array([_variance(first) / len(first), _variance(second) / len(second)])
    difference = float(second.mean() - first.mean())
    error = float(parts.sum())
    if error == 0:
        return 1.0 if first[0] == second[0] else 0.0
    degrees = error**2 / float(np.sum(parts**2 / (np.array([len(first), len(second)]) - 1.0)))
    return float(2.0 * stdtr(degrees, -abs(difference) / math.sqrt(error)))


def _spread_p(first: float, first_n: int, second: float, second_n: int) -> float:
    if first == 0 or second == 0:
        return 1.0 if first == second else 0.0
    ratio, above, below = second / first, second_n - 1, first_n - 1
    return min(1.0, 2.0 * float(min(fdtr(above, below, ratio), fdtrc(above, below, ratio))))


def _autocorrelation(x: Floats) -> float:
    """Lag-1 autocorrelation about the common mean; 0 without variation."""
    if len(x) < 2 or np.ptp(x) == 0:
        return 0.0
    deviation = x - x.mean()
    return float(deviation[1:] @ deviation[:-1] / (deviation @ deviation))


def _autocorrelation_p(first: Floats, second: Floats) -> float:
    if np.ptp(first) == 0 or np.ptp(second) == 0:
        return 1.0
    pairs = np.array([len(first) - 1, len(second) - 1])
    difference = math.atanh(_autocorrelation(second)) - math.atanh(_autocorrelation(first))
    return float(2.0 * ndtr(-abs(difference) / math.sqrt(float(np.sum(1.0 / (pairs - 3.0))))))
