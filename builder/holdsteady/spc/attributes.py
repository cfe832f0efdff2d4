"""What charts of counts share: whole-count limits, sides of the median, expected counts, overdispersion."""

from __future__ import annotations

import math
from typing import Literal

import numpy as np
from scipy.special import betaincc, gammaincc

from holdsteady.arrays import Bools, Floats, Ints, frozen
from holdsteady.spc import result
from holdsteady.spc.result import Estimate, Lines

Distribution = Literal["binomial", "poisson"]

NO_EVENTS = "no events in the baseline"
ALL_EVENTS = "every unit in the baseline counted"


def estimate(
    count: Floats, size: Floats, use: Bools, *, name: str, units_name: str = "sum of sizes", binomial: bool
) -> Estimate:
    """Estimate an attribute chart's centre, the sum of counts over the sum of sizes of the used points.

    Missing points (NaN) never count. There is no sigma: it follows from the centre at each point.
    """
    used = use & ~np.isnan(count) & ~np.isnan(size)
    total, units = float(count[used].sum()), float(size[used].sum())
    finding = result.NO_POINTS if not used.any() else NO_EVENTS if total == 0 else ""
    if binomial and total and total == units:
        finding = ALL_EVENTS
    centre = total / units if used.any() else math.nan
    return Estimate(
        centre=centre,
        sigma=None,
        estimator="",
        points=int(used.sum()),
        dof=None,
        overall_sigma=None,
        figures=(("sum of counts", total, False), (units_name, units, False), (name, centre, binomial))
        if used.any()
        else (),
        source="ISO 7870-2:2013; three-sigma limits: Shewhart 1931",
        finding=finding,
    )


def lines(
    centre: float, own: Floats, size: Floats, width: float, *, highest: Floats | float = math.inf
) -> Lines:
    """Limits centre ± width * own sigma of a count over `size` (N,), snapped to whole counts.

    A lower limit not above 0 and an upper one not below `highest` are none, and where sigma is 0 there
    are none: no count could lie beyond them.
    """
    own = np.where(own > 0, own, np.nan)
    lower = snapped(centre - width * own, size)
    upper = snapped(centre + width * own, size)
    lower = np.where(lower > 0, lower, np.nan)
    upper = np.where(upper < highest, upper, np.nan)
    return result.lines(centre, lower, upper, own, size=len(size))


def snapped(limit: Floats, size: Floats | float) -> Floats:
    """Return limits that are whole counts but for rounding as exactly that count over `size`.

    With a mean count of 16 the limits are 4 and 28; a count of 28 is on the limit, not beyond it.
    """
    counts = limit * size
    whole = np.round(counts)
    near = np.abs(counts - whole) < 1e-9 * np.maximum(1.0, np.abs(counts))
    snapped_limits: Floats = np.where(near, whole / size, limit)
    return snapped_limits


def median_side(kind: Distribution, count: Floats, size: Floats, centre: Floats | float) -> Ints:
    """Tell on which side of the exact median of its distribution each count lies.

    A count is above where P(X < count) >= 1/2, below where P(X > count) >= 1/2, and on the median
    otherwise; where a distribution has two medians, the lower is below and the higher above.

    Parameters
    ----------
    kind : "binomial" or "poisson"
    count : (N,) whole numbers
    size : (N,) trials, or units of opportunity
    centre : float or (N,) probability, or mean count a unit

    Returns
    -------
    (N,) int64: +1 above, -1 below, 0 on it; 0 where anything is missing.
    """
    if kind == "binomial":
        # P(X >= k) = I_p(k, n - k + 1), so P(X < k) is its complement; the edges have no beta function.
        fewer = _binomial_below(count, size, np.asarray(centre))
        at_most = _binomial_below(count + 1.0, size, np.asarray(centre))
    else:
        mean = size * centre
        fewer = np.where(count < 0.5, 0.0, gammaincc(np.maximum(count, 0.5), mean))
        at_most = gammaincc(count + 1.0, mean)
    side = np.where(fewer >= 0.5 - 1e-11, 1, np.where(at_most <= 0.5 + 1e-11, -1, 0))
    missing = np.isnan(count) | np.isnan(size) | np.isnan(centre)
    return frozen(np.where(missing, 0, side).astype(np.int64))


def _binomial_below(count: Floats, size: Floats, probability: Floats) -> Floats:
    """P(X < count) for whole counts from 0 to size + 1."""
    inside = betaincc(np.maximum(count, 0.5), np.maximum(size - count + 1.0, 0.5), probability)
    below: Floats = np.where(count < 0.5, 0.0, np.where(count > size + 0.5, 1.0, inside))
    return below


def expected(kind: Distribution, size: Floats, centre: Floats | float) -> Floats:
    """Return the expected count of each point (N,).

    For "binomial" that of the units that are not counted, where it is smaller: a fraction near 1 is as coarse
    as one near 0.
    """
    counted = size * centre
    return np.minimum(counted, size - counted) if kind == "binomial" else counted


def overdispersion(z: Floats, use: Bools, segment: Ints | None = None) -> float | None:
    """Return sigma_z: how much wider than binomial or Poisson the points scatter from one to the next.

    The mean moving range of z times sqrt(pi) / 2 (Laney, D. B. (2002), Improved control charts for
    attributes, Quality Engineering 14(4), 531-537). Near 1 the limits fit; None where no two neighbours
    are used.

    Parameters
    ----------
    z : (N,) points in sigmas from the centre, NaN where missing
    use : (N,) which points count; a moving range needs both ends
    segment : (N,) unbroken stretches, or None for a single one
    """
    pairs = use[1:] & use[:-1]
    if segment is not None:
        pairs &= segment[1:] == segment[:-1]
    ranges = np.abs(np.diff(z))[pairs]
    ranges = ranges[~np.isnan(ranges)]
    return float(ranges.mean() * math.sqrt(math.pi) / 2.0) if len(ranges) else None
