"""A characteristic on its chart: the points, what is plotted, and which points may be used for what."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from holdsteady.arrays import Bools, Floats
from holdsteady.monitor.context import Context
from holdsteady.monitor.finding import Era
from holdsteady.monitor.gather import Gathered
from holdsteady.monitor.kinds import ChartKind
from holdsteady.project.logbook import LogbookEntry
from holdsteady.project.settings import Characteristic


@dataclass(frozen=True, slots=True, kw_only=True)
class Charted:
    """What limits, signals and cases are worked out from. Arrays are (N,), one entry a point.

    `values` maps each panel to its plotted statistic. `real` leaves out measurement faults; `usable` also
    leaves out what the logbook excludes, what is drawn at a limit, what is missing and what is still open.
    """

    name: str
    settings: Characteristic
    context: Context
    kind: ChartKind
    points: Gathered
    values: Mapping[str, Floats]
    eras: tuple[Era, ...]
    entries: tuple[LogbookEntry, ...]
    excluded: Bools
    real: Bools
    usable: Bools
