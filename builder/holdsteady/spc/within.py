"""Sigma of a single reading from the variation within subgroups, four published ways.

Every estimator is unbiased for normal readings and independent subgroups; all agree with the customary form
when every subgroup has the same size.

References
----------
Burr, I. W. (1969), Control charts for measurements with varying sample sizes, Journal of Quality
Technology 1(3), 163-167 (weights for unequal sizes).
Mahmoud, M. A., Henderson, G. R., Epprecht, E. K. & Woodall, W. H. (2010), Estimating the standard
deviation in quality-control applications, Journal of Quality Technology 42(4), 348-357 (pooled s / c4(v +
1)).
Patnaik, P. B. (1950), Biometrika 37, 78-87 (effective degrees of freedom, see `constants`).
ISO 7870-2:2013, Control charts - Part 2: Shewhart control charts (mean range and mean s).
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from types import MappingProxyType

import numpy as np

from holdsteady.arrays import Bools, Floats, frozen
from holdsteady.spc import result
from holdsteady.spc.constants import c4, d2, d3, degrees_of_freedom
from holdsteady.spc.result import Estimate, Figures, Lines
from holdsteady.spc.subgroups import Subgroups


@dataclass(frozen=True, slots=True, kw_only=True)
class WithinSigma:
    """Sigma of a single reading, its effective degrees of freedom, and how they came about."""

    sigma: float
    dof: float
    figures: Figures
    source: str


def estimate(groups: Subgroups, use: Bools, *, centre: float, centre_figure: str, estimator: str) -> Estimate:
    """Complete an estimate whose centre is known with sigma from the spread within the used subgroups.

    Subgroups of one reading have no spread; they count in the centre and in the overall sigma alone.

    Raises
    ------
    ValueError
        The estimator is none of `ESTIMATORS`.
    """
    if estimator not in ESTIMATORS:
        raise ValueError(f"estimator {estimator!r} is none of {', '.join(ESTIMATORS)}")
    spread = use & (groups.n > 1)
    within = None
    finding = result.NO_POINTS if not use.any() else result.NO_RANGES if not spread.any() else ""
    if not finding:
        within = ESTIMATORS[estimator](groups.n[spread], groups.range[spread], groups.s[spread])
        finding = "" if within.sigma > 0 else result.NO_VARIATION
    figures: Figures = ((centre_figure, centre, True),) if use.any() else ()
    return Estimate(
        centre=centre,
        sigma=within.sigma if within and not finding else None,
        estimator=estimator,
        points=int(use.sum()),
        dof=within.dof if within and not finding else None,
        overall_sigma=_overall_sigma(groups, use),
        figures=figures + (within.figures if within else ()),
        source=within.source if within else "",
        finding=finding,
    )


def grand_mean(groups: Subgroups, use: Bools) -> float:
    """Mean of all readings of the used subgroups: their means weighted by n; NaN without any."""
    if not use.any():
        return math.nan
    mean = groups.mean[use]
    # Rounding must not carry the mean of equal means past them.
    return float(np.clip(np.average(mean, weights=groups.n[use]), mean.min(), mean.max()))


def _overall_sigma(groups: Subgroups, use: Bools) -> float | None:
    n = groups.n[use]
    readings = float(n.sum())
    if readings < 2:
        return None
    within = np.where(n > 1, (n - 1) * np.nan_to_num(groups.s[use]) ** 2, 0.0)
    between = n * (groups.mean[use] - grand_mean(groups, use)) ** 2
    return math.sqrt(float(within.sum() + between.sum()) / (readings - 1.0))


def mean_range(n: Floats, spread: Floats, _: Floats) -> WithinSigma:
    """Sigma from ranges: their mean over d2, weighted by d2**2 / d3**2 where sizes differ (Burr 1969)."""
    first, second = d2(n), d3(n)
    weight = (first / second) ** 2
    sigma = float(np.sum(weight * spread / first) / np.sum(weight))
    figures: Figures
    if n.min() == n.max():
        figures = (
            ("mean range", float(spread.mean()), True),
            (f"d2 for n = {n[0]:.0f}", float(first[0]), False),
        )
        source = "ISO 7870-2:2013; d2 after Tippett 1925, computed"
    else:
        figures = (
            ("smallest subgroup", float(n.min()), False),
            ("largest subgroup", float(n.max()), False),
            ("sum of weights d2²/d3²", float(weight.sum()), False),
        )
        source = "Burr, Journal of Quality Technology 1969"
    dof = degrees_of_freedom(1.0 / float(weight.sum()))
    return WithinSigma(sigma=sigma, dof=dof, figures=(*figures, ("sigma", sigma, True)), source=source)


def mean_s(n: Floats, _: Floats, s: Floats) -> WithinSigma:
    """Sigma as the plain mean of s / c4(n) over subgroups (ISO 7870-2)."""
    factor = c4(n)
    sigma = float(np.mean(s / factor))
    figures: Figures = (("mean s", float(s.mean()), True),)
    if n.min() == n.max():
        figures += ((f"c4 for n = {n[0]:.0f}", float(factor[0]), False),)
    variance = float(np.mean(1.0 / factor**2 - 1.0)) / len(n)
    return WithinSigma(
        sigma=sigma,
        dof=degrees_of_freedom(variance),
        figures=(*figures, ("sigma", sigma, True)),
        source="ISO 7870-2:2013",
    )


def pooled(n: Floats, _: Floats, s: Floats) -> WithinSigma:
    """Sigma from the pooled s over c4(v + 1), v = sum of n - 1 (Mahmoud et al. 2010)."""
    degrees = float(np.sum(n - 1))
    together = math.sqrt(float(np.sum((n - 1) * s**2)) / degrees)
    factor = c4(degrees + 1.0)
    return WithinSigma(
        sigma=together / factor,
        dof=degrees,
        figures=(
            ("pooled s", together, True),
            ("degrees of freedom", degrees, False),
            (f"c4 for {degrees:.0f} degrees of freedom", factor, False),
            ("sigma", together / factor, True),
        ),
        source="Mahmoud, Henderson, Epprecht & Woodall, Journal of Quality Technology 2010",
    )


def weighted(n: Floats, _: Floats, s: Floats) -> WithinSigma:
    """Sigma as the mean of s / c4 with weights c4**2 / (1 - c4**2), of least variance (Burr 1969)."""
    factor = c4(n)
    weight = factor**2 / (1.0 - factor**2)
    sigma = float(np.sum(weight * s / factor) / np.sum(weight))
    return WithinSigma(
        sigma=sigma,
        dof=degrees_of_freedom(1.0 / float(weight.sum())),
        figures=(("sum of weights c4²/(1 − c4²)", float(weight.sum()), False), ("sigma", sigma, True)),
        source="Burr, Journal of Quality Technology 1969",
    )


ESTIMATORS: Mapping[str, Callable[[Floats, Floats, Floats], WithinSigma]] = MappingProxyType(
    {"mean-range": mean_range, "mean-s": mean_s, "pooled": pooled, "weighted": weighted}
)
"""Each takes sizes, ranges and standard deviations of the subgroups of two and more."""


def location_lines(centre: float, sigma: float | None, error: Floats, width: float) -> Lines:
    """Lines of a location panel whose statistic has the standard error `error` * sigma at each point."""
    if sigma is None:
        return result.lines(centre, np.nan, np.nan, np.nan, size=len(error))
    own = error * sigma
    return result.lines(centre, centre - width * own, centre + width * own, own, size=len(error))


def spread_lines(
    n: Floats, sigma: float | None, factors: Callable[[Floats], tuple[Floats, Floats]], width: float
) -> Lines:
    """Lines of a spread panel; `factors` gives mean and standard deviation of the statistic over sigma.

    Subgroups of one have no lines. A lower limit that is not above zero is none.
    """
    centre, own = np.full(len(n), np.nan), np.full(len(n), np.nan)
    several = n > 1
    if sigma is not None and several.any():
        mean, deviation = factors(n[several])
        centre[several], own[several] = mean * sigma, deviation * sigma
    lower = centre - width * own
    # Comparing with NaN is False, which keeps what is missing missing.
    lower[~(lower > 1e-9 * own)] = np.nan
    return Lines(
        centre=frozen(centre), lower=frozen(lower), upper=frozen(centre + width * own), sigma=frozen(own)
    )
