"""Centre, sigma and limits in plain loops, from the definitions of each chart."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Any

from tests.naive_way_factors import c4, d2, d3, median_error, median_moving_range

if TYPE_CHECKING:
    from holdsteady.project.settings import Characteristic

NAN = math.nan


@dataclass(frozen=True)
class Basis:
    """What limits are drawn from: sigma is that of a single reading, `full` says that limits follow."""

    kind: str
    centre: float | None
    sigma: float | None
    width: float
    full: bool

    def as_kind(self, kind: str) -> Basis:
        return replace(self, kind=kind)


@dataclass(frozen=True)
class Line:
    centre: float = NAN
    lower: float = NAN
    upper: float = NAN
    sigma: float = NAN


def median_only(usable: list[int], values: dict[str, list[float]]) -> dict[str, Basis]:
    """Without limits the first panel has the median of its usable points, and nothing else is drawn."""
    bases = {}
    for number, (name, value) in enumerate(values.items()):
        ordered = sorted(value[index] for index in usable)
        centre, half = NAN, len(ordered) // 2
        if ordered and number == 0:
            centre = ordered[half] if len(ordered) % 2 else (ordered[half - 1] + ordered[half]) / 2
        bases[name] = Basis(kind="", centre=centre, sigma=None, width=NAN, full=False)
    return bases


def learn(
    points: Sequence[Any],
    chosen: list[int],
    values: dict[str, list[float]],
    settings: Characteristic,
    kept: dict[str, Basis],
) -> dict[str, Basis]:
    """Estimate from the baseline points; a sigma that is kept takes the place of the estimated one."""
    if "single" in values:
        centre, most = learned_count(points, chosen, settings)
        full = 0 < centre < most
        return {
            "single": Basis(kind="provisional", centre=centre, sigma=None, width=settings.width, full=full)
        }
    sigma = learned_sigma(points, chosen, values["spread"], settings)
    if kept:
        kept_sigma = kept["location"].sigma
        assert kept_sigma is not None
        sigma = kept_sigma
    # Means are weighted by their readings; medians are not.
    equal = settings.chart == "median-range"
    weighted = [(1 if equal else len(points[index].values), values["location"][index]) for index in chosen]
    centre = math.fsum(n * v for n, v in weighted) / sum(n for n, _ in weighted)
    full = sigma > 0
    return {
        "location": Basis(kind="provisional", centre=centre, sigma=sigma, width=settings.width, full=full),
        "spread": Basis(kind="provisional", centre=None, sigma=sigma, width=settings.width, full=full),
    }


def learned_count(points: Sequence[Any], chosen: list[int], settings: Characteristic) -> tuple[float, float]:
    """Return the centre, and the value it takes when everything counts."""
    count = math.fsum(points[index].count for index in chosen)
    size = math.fsum(points[index].size for index in chosen)
    centre = count / len(chosen) if settings.chart in ("np", "c") else count / size
    most = {"p": 1.0, "np": size / len(chosen)}.get(settings.chart or "", math.inf)
    return centre, most


def learned_sigma(
    points: Sequence[Any], chosen: list[int], spread: list[float], settings: Characteristic
) -> float:
    if settings.chart == "individuals":
        ranges = sorted(spread[i] for i in chosen if i - 1 in chosen and not math.isnan(spread[i]))
        if not ranges:
            return NAN
        if settings.estimator == "median-moving-range":
            half = len(ranges) // 2
            median = ranges[half] if len(ranges) % 2 else (ranges[half - 1] + ranges[half]) / 2
            return median / median_moving_range()
        return math.fsum(ranges) / len(ranges) * math.sqrt(math.pi) / 2
    groups = [points[i].values for i in chosen if len(points[i].values) > 1]
    if not groups:
        return NAN
    usual = "pooled" if settings.chart == "mean-sd" else "mean-range"
    return within_sigma(groups, settings.estimator or usual)


def within_sigma(groups: list[list[float]], estimator: str) -> float:
    if estimator == "mean-range":
        # Burr (1969): each R / d2 weighted by the inverse of its variance.
        weights = [(d2(len(x)) / d3(len(x))) ** 2 for x in groups]
        each = [(max(x) - min(x)) / d2(len(x)) for x in groups]
        return math.fsum(w * e for w, e in zip(weights, each, strict=True)) / math.fsum(weights)
    squares = []
    for x in groups:
        mean = math.fsum(x) / len(x)
        squares.append(math.fsum((v - mean) ** 2 for v in x))
    freedom = [len(x) - 1 for x in groups]
    if estimator == "pooled":
        return math.sqrt(math.fsum(squares) / sum(freedom)) / c4(sum(freedom) + 1)
    each = [math.sqrt(s / f) / c4(f + 1) for s, f in zip(squares, freedom, strict=True)]
    if estimator == "mean-s":
        return math.fsum(each) / len(each)
    weights = [c4(f + 1) ** 2 / (1 - c4(f + 1) ** 2) for f in freedom]
    return math.fsum(w * e for w, e in zip(weights, each, strict=True)) / math.fsum(weights)


def line(panel: str, basis: Basis, n: int, size: float, settings: Characteristic) -> Line:
    """Return the limits of one point of n readings (of `size` units looked at, for counts)."""
    if not basis.full:
        return Line(centre=NAN if basis.centre is None else basis.centre)
    if panel == "single":
        assert basis.centre is not None
        return count_line(basis.centre, basis.width, size, settings.chart or "")
    assert basis.sigma is not None
    if panel == "location":
        assert basis.centre is not None
        error = median_error(n) if settings.chart == "median-range" else 1 / math.sqrt(n)
        reach = basis.width * basis.sigma * error
        return Line(basis.centre, basis.centre - reach, basis.centre + reach, basis.sigma * error)
    if settings.chart == "individuals":
        return moving_range_line(basis, settings)
    if n < 2:
        return Line()
    if settings.chart == "mean-sd":
        centre, error = c4(n) * basis.sigma, math.sqrt(1 - c4(n) ** 2) * basis.sigma
    else:
        centre, error = d2(n) * basis.sigma, d3(n) * basis.sigma
    lower = centre - basis.width * error
    return Line(centre, lower if lower > 0 else NAN, centre + basis.width * error, error)


def moving_range_line(basis: Basis, settings: Characteristic) -> Line:
    assert basis.sigma is not None
    centre, error = d2(2) * basis.sigma, d3(2) * basis.sigma
    # Both limits are pinned, whatever the width.
    if settings.chart_options.get("moving_range_limit") == "three-sigma":
        return Line(centre, NAN, centre + 3 * error, error)
    return Line(centre, NAN, 3 * math.sqrt(2) * basis.sigma, error)


def count_line(centre: float, width: float, size: float, chart: str) -> Line:
    if chart == "p":
        variance, top = centre * (1 - centre) / size, 1.0
    elif chart == "np":
        variance, top = centre * (1 - centre / size), size
    elif chart == "u":
        variance, top = centre / size, math.inf
    else:
        variance, top = centre, math.inf
    if variance <= 0:
        return Line(centre=centre)
    sigma = math.sqrt(variance)
    lower, upper = centre - width * sigma, centre + width * sigma
    near = 1e-9 * sigma  # a limit that is 0 or `top` but for rounding is no limit
    return Line(centre, lower if lower > near else NAN, upper if upper < top - near else NAN, sigma)
