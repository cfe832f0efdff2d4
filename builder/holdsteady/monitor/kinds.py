"""One entry for each kind of chart: what its panels plot, how its limits are estimated and drawn.

A new kind is an entry here, beside its module in `spc`, its specification in `charts` and its sentence in
`site`.
"""

from __future__ import annotations

from collections.abc import Mapping
from types import ModuleType
from typing import Any, Literal, Protocol

import numpy as np

from holdsteady.arrays import Bools, Floats, Ints
from holdsteady.monitor.gather import Gathered
from holdsteady.project.settings import Characteristic
from holdsteady.spc import (
    attributes,
    count,
    individuals,
    mean_range,
    mean_sd,
    median_range,
    number_nonconforming,
    proportion,
    rate,
)
from holdsteady.spc.result import Estimate, Lines


class ChartKind(Protocol):
    """What the rest of the monitor asks of a kind of chart. Arrays are (N,), one entry a point."""

    @property
    def name(self) -> str:
        """The word of the settings."""

    @property
    def panels(self) -> Mapping[str, str]:
        """The statistic that each panel plots, in the order they are drawn."""

    @property
    def attribute(self) -> bool:
        """Whether things are counted rather than measured."""

    def fault(self, points: Gathered) -> tuple[str, str] | None:
        """Return what in the data allows no such chart, and the remedy; None when all is well."""

    def values(self, points: Gathered, usable: Bools) -> dict[str, Floats]:
        """Return the plotted statistic of each panel; `usable` leaves out points that were not real."""

    def estimate(
        self, points: Gathered, values: Mapping[str, Floats], use: Bools, settings: Characteristic
    ) -> Estimate:
        """Estimate centre and sigma from the points in `use`."""

    def lines(
        self,
        panel: str,
        centre: float,
        sigma: float | None,
        n: Floats,
        *,
        width: float,
        options: Mapping[str, Any],
    ) -> Lines:
        """Return centre line and limits of a panel, `width` sigmas wide, for points of size `n`.

        `sigma` is that of a single reading, None for counts; `options` are the chart's own settings.
        """


class Individuals:
    """Single values with their moving ranges."""

    name = "individuals"
    panels = {"location": "value", "spread": "moving-range"}  # noqa: RUF012  never changed
    attribute = False

    def fault(self, points: Gathered) -> tuple[str, str] | None:  # noqa: ARG002
        """Single values always allow the chart."""
        return None

    def values(self, points: Gathered, usable: Bools) -> dict[str, Floats]:
        """Return values and moving ranges, NaN at the first of each unbroken stretch."""
        value = np.where(usable, points.single, np.nan)
        return {"location": points.single, "spread": individuals.moving_range(value, points.segment)}

    def estimate(
        self, points: Gathered, values: Mapping[str, Floats], use: Bools, settings: Characteristic
    ) -> Estimate:
        """Estimate from the mean (or median) moving range; a range counts when both its ends do."""
        both = use & np.concatenate(([False], use[:-1]))
        return individuals.estimate(
            points.single,
            values["spread"],
            use,
            both & ~np.isnan(values["spread"]),
            settings.estimator or "mean-moving-range",
        )

    def lines(
        self,
        panel: str,
        centre: float,
        sigma: float | None,
        n: Floats,
        *,
        width: float,
        options: Mapping[str, Any],
    ) -> Lines:
        """Return limits of the values, or the upper limit of the moving ranges."""
        assert sigma is not None
        if panel == "location":
            return individuals.location(centre, sigma, n.size, width)
        return individuals.spread(sigma, n.size, options.get("moving_range_limit", "probability"))


class Subgrouped:
    """Means or medians of subgroups, with their ranges or standard deviations."""

    attribute = False

    def __init__(self, name: str, module: ModuleType, location: str, spread: str) -> None:
        self.name = name
        self.panels = {"location": location, "spread": spread}
        self._module = module

    def fault(self, points: Gathered) -> tuple[str, str] | None:
        """Subgroups of one reading each carry no spread."""
        assert points.groups is not None
        if points.points >= 8 and not np.any(points.groups.n > 1):
            return "every subgroup holds a single reading", "Use chart individuals, or another `subgroup`."
        return None

    def values(self, points: Gathered, usable: Bools) -> dict[str, Floats]:  # noqa: ARG002
        """Return the statistic of each subgroup."""
        assert points.groups is not None
        return {panel: getattr(points.groups, statistic) for panel, statistic in self.panels.items()}

    def estimate(
        self,
        points: Gathered,
        values: Mapping[str, Floats],  # noqa: ARG002
        use: Bools,
        settings: Characteristic,
    ) -> Estimate:
        """Estimate from the subgroups in use."""
        result: Estimate = self._module.estimate(points.groups, use, settings.estimator)
        return result

    def lines(
        self,
        panel: str,
        centre: float,
        sigma: float | None,
        n: Floats,
        *,
        width: float,
        options: Mapping[str, Any],  # noqa: ARG002
    ) -> Lines:
        """Return limits for subgroups of size n."""
        assert sigma is not None
        result: Lines = (
            self._module.location(centre, sigma, n, width)
            if panel == "location"
            else self._module.spread(sigma, n, width)
        )
        return result


class Attribute:
    """Counts of things that are wrong, as they are or by the size of what was looked at."""

    attribute = True

    def __init__(self, name: str, module: ModuleType, statistic: str) -> None:
        self.name = name
        self.panels = {"single": statistic}
        self._module = module

    @property
    def distribution(self) -> Literal["binomial", "poisson"]:
        """The distribution of a count in control."""
        return "binomial" if self.name in ("p", "np") else "poisson"

    def fault(self, points: Gathered) -> tuple[str, str] | None:
        """Plain counts compare only when each comes from as much."""
        complete = points.n[~points.open]
        if self.name in ("np", "c") and complete.size and np.ptp(complete) > 0:
            instead = "p" if self.name == "np" else "u"
            smallest, largest = complete.min(), complete.max()
            reason = f"the size varies from {smallest:g} to {largest:g}, and {self.name} needs one size"
            return reason, f'Set chart = "{instead}"' + (", and `size`." if self.name == "c" else ".")
        return None

    def values(self, points: Gathered, usable: Bools) -> dict[str, Floats]:  # noqa: ARG002
        """Return counts, or counts by size."""
        assert points.count is not None
        if points.size is None or self.name not in ("p", "u"):
            return {"single": points.count}
        return {"single": points.count / points.size}

    def estimate(
        self,
        points: Gathered,
        values: Mapping[str, Floats],  # noqa: ARG002
        use: Bools,
        settings: Characteristic,  # noqa: ARG002
    ) -> Estimate:
        """Estimate the centre from the points in use."""
        sized = (points.count, use) if self.name == "c" else (points.count, points.size, use)
        result: Estimate = self._module.estimate(*sized)
        return result

    def lines(
        self,
        panel: str,  # noqa: ARG002
        centre: float,
        sigma: float | None,  # noqa: ARG002
        n: Floats,
        *,
        width: float,
        options: Mapping[str, Any],  # noqa: ARG002
    ) -> Lines:
        """Return limits for sizes n; sigma follows from the centre."""
        result: Lines = self._module.lines(centre, n.size if self.name == "c" else n, width)
        return result


KINDS: Mapping[str, ChartKind] = {
    kind.name: kind
    for kind in (
        Individuals(),
        Subgrouped("mean-range", mean_range, "mean", "range"),
        Subgrouped("mean-sd", mean_sd, "mean", "s"),
        Subgrouped("median-range", median_range, "median", "range"),
        Attribute("p", proportion, "fraction"),
        Attribute("np", number_nonconforming, "count"),
        Attribute("c", count, "count"),
        Attribute("u", rate, "rate"),
    )
}


def choose(settings: Characteristic, points: Gathered) -> ChartKind:
    """Return the kind asked for, or the one that fits.

    Single values: individuals. Subgroups: mean-range up to n = 8 where the sizes are equal, else mean-sd;
    where the settings do not fix the size, the first baseline's worth of points decides, so that a later
    subgroup of another size does not change the chart. Counts: p with a size, c without.
    """
    if settings.chart is not None:
        return KINDS[settings.chart]
    if settings.count is not None:
        return KINDS["p" if points.size is not None else "c"]
    if points.groups is None:
        return KINDS["individuals"]
    fixed = len(settings.values or ()) or (settings.subgroup.size if settings.subgroup else None)
    sizes = np.array([fixed]) if fixed else points.n[: settings.baseline.points]
    equal_and_small = np.ptp(sizes) == 0 and sizes[0] <= 8
    return KINDS["mean-range" if equal_and_small else "mean-sd"]


def sides(kind: ChartKind, points: Gathered, centre: Floats) -> tuple[Ints, Floats] | None:
    """Return on which side of the median each count lies, and the expected counts, both (N,).

    Of a fraction, units that do not count are expected too: near 1 it is as coarse as near 0. None for
    variables.
    """
    if not isinstance(kind, Attribute):
        return None
    assert points.count is not None
    size = points.n if points.size is not None else np.ones(points.points)
    per_unit = centre / size if kind.name == "np" else centre
    side = attributes.median_side(kind.distribution, points.count, size, per_unit)
    return side, attributes.expected(kind.distribution, size, per_unit)
