"""With how many decimals a characteristic is written where the settings do not say."""

from __future__ import annotations

import math

import numpy as np

from holdsteady.monitor.finding import Finding, Panel
from holdsteady.project.settings import Specification

_COUNTED = {"count", "fraction", "rate"}
_FINER = {"mean", "median", "s"}  # what is made of several readings falls between their steps
_MOST = 12


def of_panel(finding: Finding, panel: Panel) -> int | None:
    """Return the decimals in which the values and limits of a panel are written, None for four digits.

    Those of the settings; else, for what is measured, those of the step between readings, one more for means
    and standard deviations; without a step two digits of sigma. Never so many that a digit stands beyond the
    third of sigma, nor so few that limits 3 sigma away read as the centre.
    """
    given = finding.settings.decimals
    if given is not None or panel.statistic in _COUNTED:
        return None if panel.statistic == "count" else given
    sigma = _newest(panel)
    finest = None if sigma is None else max(0, 1 - math.floor(math.log10(sigma)))
    if finding.resolution is None:
        return finest
    decimals = of_step(finding.resolution) + (panel.statistic in _FINER)
    if sigma is None or finest is None:
        return decimals
    coarsest = max(0, -math.floor(math.log10(3 * sigma)))
    return min(max(decimals, coarsest), finest + 1)


def of_reading(finding: Finding) -> int | None:
    """Return the decimals in which single readings are written, None for four digits."""
    given = finding.settings.decimals
    if given is not None or finding.resolution is None:
        return given
    panel = of_panel(finding, finding.panels[0]) if finding.panels else None
    step = of_step(finding.resolution)
    return step if panel is None else min(step, panel)


def of_wanted(specification: Specification, decimals: int | None) -> int | None:
    """Return the decimals of a specification beside values of so many: enough to write it as it was."""
    if decimals is None:
        return None
    named = (specification.lower, specification.target, specification.upper)
    return max([decimals, *(_written(value) for value in named if value is not None)])


def of_step(step: float) -> int:
    """Return the decimals that write a step, at most up to its third digit."""
    most = min(max(0, 2 - math.floor(math.log10(abs(step)))), _MOST)
    for decimals in range(most):
        scaled = abs(step) * 10.0**decimals
        if abs(scaled - round(scaled)) <= 1e-9 * scaled:
            return decimals
    return most


def _written(value: float) -> int:
    return len(f"{value:.{_MOST}f}".rstrip("0").partition(".")[2])


def _newest(panel: Panel) -> float | None:
    """Return the newest sigma of the plotted statistic; before there is any, how the values scatter."""
    known = np.flatnonzero(panel.sigma > 0)
    if known.size:
        return float(panel.sigma[known[-1]])
    values = panel.value[~np.isnan(panel.value)]
    scatter = float(np.std(values)) if values.size > 1 else 0.0
    return scatter if scatter > 0 else None
