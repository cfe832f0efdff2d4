"""The chart of single readings and their moving ranges.

References
----------
ISO 7870-2:2013 (individuals and moving range).
Roes, K. C. B., Does, R. J. M. M. & Schurink, Y. (1993), Shewhart-type control charts for individual
observations, Journal of Quality Technology 25(3), 188-198; Rigdon, S. E., Cruthis, E. N. & Champ, C. W.
(1994), Design strategies for individuals and moving range control charts, Journal of Quality Technology
26(4), 274-287 (the moving range adds little, and no run rule belongs on it).
Cryer, J. D. & Ryan, T. P. (1990), The estimation of sigma for an X chart: MR/d2 or S/c4?, Journal of
Quality Technology 22(3), 187-192 (variance of the mean moving range).
Bryce, G. R., Gaudard, M. A. & Joiner, B. L. (1997), Estimating the standard deviation for individuals
control charts, Quality Engineering 10(2), 331-341 (median moving range).
"""

from __future__ import annotations

import math
from functools import lru_cache
from typing import Literal

import numpy as np
from scipy.special import ndtr

from holdsteady.arrays import Bools, Floats, Ints, frozen
from holdsteady.spc import result
from holdsteady.spc.constants import MEDIAN_MOVING_RANGE, d2, d3, degrees_of_freedom
from holdsteady.spc.result import Estimate, Figures, Lines

OVER_HALF_ZERO = "over half of the moving ranges in the baseline are zero"


def moving_range(x: Floats, segment: Ints) -> Floats:
    """Return the absolute difference of each reading from the one before it.

    Parameters
    ----------
    x : (N,) readings, NaN where missing
    segment : (N,) unbroken stretches; no range is taken across a change

    Returns
    -------
    (N,) NaN at the first reading of each segment and where either end is missing.
    """
    ranges = np.full(len(x), np.nan)
    ranges[1:] = np.where(segment[1:] == segment[:-1], np.abs(np.diff(x)), np.nan)
    return frozen(ranges)


def estimate(
    x: Floats,
    moving_range: Floats,
    use: Bools,
    use_range: Bools,
    estimator: Literal["mean-moving-range", "median-moving-range"] | str | None = "mean-moving-range",
) -> Estimate:
    """Estimate the centre, the mean of the used readings, and sigma from their moving ranges.

    Mean moving range * sqrt(pi) / 2, or median moving range / 0.9539. The overall standard deviation stands
    beside it: a ratio above 1 tells of drift, below 1 of alternation.

    Parameters
    ----------
    x, moving_range : (N,)
    use, use_range : (N,) which readings and which ranges are the baseline; missing ones never count
    estimator : "mean-moving-range" (also when None) or "median-moving-range"

    Raises
    ------
    ValueError
        The estimator is neither.
    """
    estimator = estimator or "mean-moving-range"
    if estimator not in ("mean-moving-range", "median-moving-range"):
        raise ValueError(f"estimator {estimator!r} is none of mean-moving-range, median-moving-range")
    readings = x[use & ~np.isnan(x)]
    ranged = use_range & ~np.isnan(moving_range)
    ranges = moving_range[ranged]
    mean = estimator == "mean-moving-range"
    finding = _finding(readings, ranges, mean=mean)
    figures: Figures = (("mean", float(readings.mean()), True),) if len(readings) else ()
    sigma = dof = None
    if len(ranges):
        typical = float(ranges.mean() if mean else np.median(ranges))
        factor = d2(2) if mean else MEDIAN_MOVING_RANGE
        figures += (
            ("mean moving range" if mean else "median moving range", typical, True),
            ("d2 for n = 2" if mean else "median of the range of two, over sigma", factor, False),
            ("sigma", typical / factor, True),
        )
        if not finding:
            sigma = typical / factor
            dof = degrees_of_freedom(_relative_variance(ranged, mean=mean))
    return Estimate(
        centre=float(readings.mean()) if len(readings) else math.nan,
        sigma=sigma,
        estimator=estimator,
        points=len(readings),
        dof=dof,
        overall_sigma=_overall_sigma(readings),
        figures=figures,
        source="ISO 7870-2:2013" if mean else "Bryce, Gaudard & Joiner, Quality Engineering 1997",
        finding=finding,
    )


def location(centre: float, sigma: float | None, size: int, width: float) -> Lines:
    """Lines for `size` single readings: centre ± width * sigma; centre alone without sigma."""
    if sigma is None:
        return result.lines(centre, np.nan, np.nan, np.nan, size=size)
    return result.lines(centre, centre - width * sigma, centre + width * sigma, sigma, size=size)


def spread(
    sigma: float | None, size: int, limit: Literal["probability", "three-sigma"] | str = "probability"
) -> Lines:
    """Lines for `size` moving ranges; there is never a lower limit.

    "probability": 3 * sqrt(2) * sigma, which 0.27 % of the ranges of a steady normal process pass;
    "three-sigma": the customary (d2 + 3 d3) * sigma = 3.686 sigma, which 0.9 % pass.

    Raises
    ------
    ValueError
        The limit is neither.
    """
    if limit not in ("probability", "three-sigma"):
        raise ValueError(f"limit {limit!r} is none of probability, three-sigma")
    if sigma is None:
        return result.lines(np.nan, np.nan, np.nan, np.nan, size=size)
    upper = 3.0 * math.sqrt(2.0) if limit == "probability" else d2(2) + 3.0 * d3(2)
    return result.lines(d2(2) * sigma, np.nan, upper * sigma, d3(2) * sigma, size=size)


def _finding(readings: Floats, ranges: Floats, *, mean: bool) -> str:
    if len(readings) == 0:
        return result.NO_POINTS
    if len(ranges) == 0:
        return result.NO_RANGES
    if not ranges.any():
        return result.NO_VARIATION
    if not mean and np.median(ranges) == 0:
        return OVER_HALF_ZERO
    return ""


def _overall_sigma(readings: Floats) -> float | None:
    if len(readings) < 2:
        return None
    # Rounding in the mean must not lend variation to readings that are all equal.
    return float(np.std(readings, ddof=1)) if np.ptp(readings) > 0 else 0.0


def _relative_variance(ranged: Bools, *, mean: bool) -> float:
    """Variance of the estimate over sigma squared, neighbouring ranges sharing a reading.

    The mean of m ranges with a neighbouring pairs has variance (m V + 2 a C) / m**2, V and C the variance
    of one range and the covariance of two neighbours. The same for the median with those of the indicator
    of lying below the median over the squared density there, which holds for many ranges and is
    approximate for few.
    """
    count = int(ranged.sum())
    neighbours = int((ranged[1:] & ranged[:-1]).sum())
    if mean:
        # Absolute product moment of two normal differences with correlation -1/2.
        covariance = (4.0 / math.pi) * (math.sqrt(0.75) + 0.5 * math.asin(0.5)) - d2(2) ** 2
        variance, scale = d3(2) ** 2, d2(2)
    else:
        variance, covariance = 0.25, _both_below_median() - 0.25
        density = math.exp(-(MEDIAN_MOVING_RANGE**2) / 4.0) / math.sqrt(math.pi)
        scale = MEDIAN_MOVING_RANGE * density
    return (count * variance + 2.0 * neighbours * covariance) / (count * scale) ** 2


@lru_cache(maxsize=1)
def _both_below_median() -> float:
    """Chance that two neighbouring moving ranges both lie below their median."""
    step = 0.05
    shared = np.arange(-10.0, 10.0 + step, step)
    near = ndtr(shared + MEDIAN_MOVING_RANGE) - ndtr(shared - MEDIAN_MOVING_RANGE)
    return float(np.sum(np.exp(-0.5 * shared**2) * near**2) * step / math.sqrt(2.0 * math.pi))
