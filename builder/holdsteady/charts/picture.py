"""What there is to draw of a finding, decided once for the live chart and for the static picture.

Indices count points from 0; spans of points are half-open.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final, Literal

import numpy as np

from holdsteady.arrays import Bools, Ints
from holdsteady.monitor.finding import Case, Finding, LimitsInForce, Panel
from holdsteady.project.settings import Specification

Tone = Literal["open", "said", "past"]
POINT: Final = 0
RING: Final = 1  # part of an open case
HOLLOW: Final = 2  # left out of the limits
FAULT: Final = 3  # a measurement fault
INCOMPLETE: Final = 4
BELOW: Final = 5  # drawn at a limit that the reading lies below
ABOVE: Final = 6
RING_BELOW: Final = 7
RING_ABOVE: Final = 8


@dataclass(frozen=True, slots=True, kw_only=True)
class Wanted:
    """The specification beside a panel."""

    panel: int
    specification: Specification


def case_tone(case: Case) -> Tone:
    """Return how a case's bar is drawn: open, answered by people, or history."""
    return "open" if case.state == "open" else "said" if case.state == "answered" else "past"


def likely_start(case: Case) -> tuple[int, int] | None:
    """Return the first and the last point at which a case may have begun, None where none is likely.

    A step that lies after the point at which the rule was met cannot be what met it.
    """
    low, high = case.start_low_index, case.start_high_index
    if low is None or high is None or (case.start_index is not None and case.start_index > case.fired_index):
        return None
    return low, high


def in_open_case(finding: Finding, panel: Panel) -> Bools:
    """Return which points of a panel are part of an open case, (N,)."""
    part = np.zeros(len(panel.value), dtype=np.bool_)
    open_cases = {case.id for case in finding.cases if case.state == "open"}
    for signal in finding.signals:
        if signal.panel == panel.name and signal.case in open_cases:
            part[signal.first_index : signal.last_index + 1] = True
    return part & panel.judged


def marks(finding: Finding, panel: Panel) -> Ints:
    """Return how each point is drawn, (N,): a fault before all else, a ring before a hollow point.

    What is made of a reading known only by a limit shows its side on location alone; a spread is hollow.
    """
    points = finding.points
    result = np.zeros(len(panel.value), dtype=np.int64)
    if points is None:
        return result
    result[points.excluded] = HOLLOW
    ringed = in_open_case(finding, panel)
    result[ringed] = RING
    if panel.name == "spread":
        result[points.side != 0] = HOLLOW
    else:
        result[points.side < 0] = BELOW
        result[points.side > 0] = ABOVE
        result[ringed & (points.side < 0)] = RING_BELOW
        result[ringed & (points.side > 0)] = RING_ABOVE
    result[points.open] = INCOMPLETE
    result[points.faulty] = FAULT
    return result


def baseline_spans(panel: Panel) -> list[tuple[int, int]]:
    """Return the stretches [start, stop) from a baseline's first point to its last, one an unbroken run.

    Points left out inside a baseline do not break it.
    """
    inside = np.flatnonzero(panel.in_baseline)
    if inside.size == 0:
        return []
    breaks = np.flatnonzero(np.diff(inside) > max(3, inside.size // 4))
    starts = inside[np.append(0, breaks + 1)]
    stops = inside[np.append(breaks, inside.size - 1)] + 1
    return list(zip(starts.tolist(), stops.tolist(), strict=True))


def has_limits(row: LimitsInForce) -> bool:
    """Return whether a row draws more than a centre line."""
    return row.limited and (row.varies or row.lower is not None or row.upper is not None)


def quoted(row: LimitsInForce, panel: Panel) -> tuple[float, float, float]:
    """Return lower limit, centre and upper limit to quote for a row, NaN for none.

    Where they vary with the size of each point, those of its newest complete one.
    """
    if row.varies and row.at_index is not None:
        at = row.at_index
        return float(panel.lower[at]), float(panel.centre[at]), float(panel.upper[at])
    lower, centre, upper = (
        float("nan") if line is None else line for line in (row.lower, row.centre, row.upper)
    )
    return lower, centre, upper


def limits_of(finding: Finding, panel: Panel) -> list[LimitsInForce]:
    """Return the rows of a panel that hold over at least one point, in order."""
    rows = [row for row in finding.limits if row.panel == panel.name and row.stop_index > row.start_index]
    return sorted(rows, key=lambda row: row.start_index)


def wanted(finding: Finding) -> Wanted | None:
    """Return the specification in force, beside the panel that shows location."""
    named = [index for index, panel in enumerate(finding.panels) if panel.name in {"location", "single"}]
    if not named or not finding.specification:
        return None
    latest = finding.specification[-1]
    if latest.lower is None and latest.upper is None:
        return None
    return Wanted(panel=named[0], specification=latest)
