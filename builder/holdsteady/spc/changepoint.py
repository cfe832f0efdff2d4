"""When a sustained shift most likely began."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from holdsteady.arrays import Floats

BAND = 2.5  # log-likelihood units below the maximum


@dataclass(frozen=True, slots=True, kw_only=True)
class Step:
    """The likely first point of a new level, 0-based, its band, and the shift in sigmas of the statistic."""

    start: int
    low: int  # earliest and latest first point whose log-likelihood lies within the band
    high: int
    shift: float  # mean of z from `start` on


def likely_start(z: Floats) -> Step:
    """Return the maximum-likelihood step change of the mean away from 0, at known unit sigma.

    For a new level from point t on (N - t points), the log-likelihood rises over no change by (N - t) *
    mean(z[t:])**2 / 2; the start is the t that makes it largest, the band every t within 2.5 of that
    (Samuel, T. R., Pignatiello, J. J. & Calvin, J. A. (1998), Identifying the time of a step change with
    X-bar control charts, Quality Engineering 10(3), 521-527).

    Parameters
    ----------
    z : (N,) points in sigmas from the centre, from the era's start to the signal's last; none missing, N >= 1

    Raises
    ------
    ValueError
        There is no point.
    """
    if len(z) == 0:
        raise ValueError("a step needs at least one point")
    after = np.arange(len(z), 0, -1)
    mean = np.cumsum(z[::-1])[::-1] / after
    gain = after * mean**2 / 2.0
    start = int(np.argmax(gain))
    inside = np.flatnonzero(gain >= gain[start] - BAND)
    return Step(start=start, low=int(inside[0]), high=int(inside[-1]), shift=float(mean[start]))
