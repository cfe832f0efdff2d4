"""The lanes of a static picture: eras and what people wrote above the plots, cases below the first."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Final
from zoneinfo import ZoneInfo

import numpy as np

from holdsteady.arrays import Floats
from holdsteady.charts import picture
from holdsteady.charts.along import Along
from holdsteady.charts.labels import Labels
from holdsteady.charts.sheet import Sheet, fitted, text_width
from holdsteady.monitor.finding import Finding, LimitsInForce
from holdsteady.times import wall

LEFT: Final = 6.0
_ROW: Final = 19.0
_OUTSIDE: Final = 6.0  # pixels a band reaches beyond its first and last point at most


@dataclass(frozen=True, slots=True, kw_only=True)
class Across:
    """The horizontal scale: `x` are the points' places in pixels, (N,)."""

    x: Floats
    first: float
    scale: float  # pixels for each unit of time or order
    start: float
    stop: float

    def at(self, place: float) -> float:
        """Return the pixel of a moment or an order."""
        return self.start + (place - self.first) * self.scale

    def between(self, index: int) -> float:
        """Return the pixel half-way between a point and the one before it."""
        last = len(self.x) - 1
        if index <= 0:
            return float(self.x[0] - (min(_OUTSIDE, (self.x[1] - self.x[0]) / 2) if last else _OUTSIDE))
        if index > last:
            return float(self.x[-1] + (min(_OUTSIDE, (self.x[-1] - self.x[-2]) / 2) if last else _OUTSIDE))
        return float(self.x[index - 1] + self.x[index]) / 2

    def around(self, first: int, last: int) -> tuple[float, float]:
        """Return the pixels around points first to last, not reaching far into a pause beside them."""
        start = max(self.between(first), float(self.x[first]) - _OUTSIDE)
        return start, min(self.between(last + 1), float(self.x[last]) + _OUTSIDE)

    def edge(self, row: LimitsInForce, index: int) -> float:
        """Return where a step of a row of limits begins or ends, a little apart from the row beside it."""
        place = self.between(index)
        inner = 1.0 if 0 < index < len(self.x) else 0.0
        if index == row.start_index:
            return float(max(place, self.x[index] - _OUTSIDE)) + inner
        if index == row.stop_index:
            return float(min(place, self.x[index - 1] + _OUTSIDE)) - inner
        return place


@dataclass(slots=True)
class _Lane:
    """Rows of things that must not touch, filled from the top; what finds no room shares one more row."""

    most: int
    crowded: bool = False
    rows: list[list[tuple[float, float]]] = field(default_factory=list)

    def place(self, start: float, stop: float) -> int | None:
        """Return the first row in which [start, stop] is free, and take it; None for the shared row."""
        for number in range(self.most):
            if number == len(self.rows):
                self.rows.append([])
            if all(stop + 10 <= a or start - 10 >= b for a, b in self.rows[number]):
                self.rows[number].append((start, stop))
                return number
        self.crowded = True
        return None

    def middle(self, row: int | None) -> float:
        """Return how far below the lane's top the middle of a row lies."""
        return (self.most if row is None else row) * _ROW + 9

    @property
    def height(self) -> float:
        """Return the height of all rows."""
        return (len(self.rows) + self.crowded) * _ROW


def draw_eras(sheet: Sheet, finding: Finding, labels: Labels, across: Across) -> float:
    """Draw a line for each era, its limits in words above it; return the height taken."""
    said = [labels.era(finding, era) for era in finding.eras]
    if not any(said) and len(said) < 2:
        return 0.0
    room = sheet.width
    for era, text in reversed(list(zip(finding.eras, said, strict=True))):
        x1, x2 = across.between(era.start_index), across.between(era.stop_index)
        inner = 3.0 if len(said) > 1 else 0.0
        sheet.line(
            "era", x1 + inner * (era.start_index > 0), 20, x2 - inner * (era.stop_index < len(across.x)), 20
        )
        shown = fitted(text, room - x1)
        if shown:
            sheet.words("era-words", max(x1, 0), 8, shown)
            room = x1 - 12
    return 28.0


def draw_entries(
    sheet: Sheet, finding: Finding, labels: Labels, across: Across, axis: Along, zone: ZoneInfo, top: float
) -> float:
    """Draw the baselines' brackets and the logbook's marks with their words; return where the lane ends."""
    lane = _Lane(most=4)
    for start, stop in picture.baseline_spans(finding.panels[0]):
        era = next((e for e in finding.eras if e.start_index <= start < e.stop_index), None)
        text = "" if era is None else labels.baseline(finding, era)
        _draw_noted(sheet, lane, (float(across.x[start]), float(across.x[stop - 1])), text, top, said=False)
    if axis.moments is not None and finding.logbook:
        began = {e.entry.line for e in finding.eras if e.entry is not None}
        entries = sorted((e for e in finding.logbook if e.line not in began), key=lambda e: (e.when, e.line))
        moments = [(e.when, e.when if e.until is None else e.until) for e in entries]
        clock = wall(np.array(moments, dtype=np.int64).reshape(-1), zone)
        for entry, (when, until) in zip(entries, axis.at(clock).reshape(-1, 2).tolist(), strict=True):
            x1, x2 = max(across.at(when), LEFT), min(across.at(until), across.stop)
            if x2 >= LEFT and x1 <= across.stop:
                _draw_noted(sheet, lane, (x1, x2), labels.entry(finding, entry), top, said=True)
    return top + lane.height + (3 if lane.rows else 0)


def _draw_noted(
    sheet: Sheet, lane: _Lane, ends: tuple[float, float], text: str, top: float, *, said: bool
) -> None:
    x1, x2 = ends
    right = sheet.width - x2 - 8
    shown = fitted(text, min(280.0, max(right, x1 - 8)))
    wide = text_width(shown) + 8
    to_right = wide <= right
    row = lane.place(x1, x2 + wide) if to_right else lane.place(x1 - wide, x2)
    y = top + lane.middle(row)
    tall, kind = (5.5, "entry") if said else (3.0, "baseline")
    if x2 - x1 > 2:
        sheet.line(kind, x1, y, x2, y)
    for x in (x1,) if said else (x1, x2):
        sheet.line(kind, x, y - tall, x, y + tall)
    if row is not None:
        sheet.words(
            f"{kind}-words", x2 + 7 if to_right else x1 - 7, y, shown, anchor="start" if to_right else "end"
        )


def draw_cases(sheet: Sheet, finding: Finding, labels: Labels, across: Across, top: float) -> float:
    """Draw each case as a bar as long as it lasted, with its words beside it; return where the lane ends."""
    lane = _Lane(most=4)
    order = {"open": 0, "said": 1, "past": 2}
    shown = [case for case in finding.cases if case.state != "withdrawn"]
    for case in sorted(shown, key=lambda c: (order[picture.case_tone(c)], -c.first_index)):
        tone = picture.case_tone(case)
        x1 = float(across.x[case.first_index])
        x2 = max(float(across.x[case.last_index]), x1 + 2)
        text = fitted(labels.case(finding, case), max(x1, sheet.width - x2) - 12)
        wide = text_width(text) + 12
        to_left = x1 - wide >= 0
        row = lane.place(x1 - wide, x2) if to_left else lane.place(x1, x2 + wide)
        y = top + lane.middle(row) + 3
        sheet.line(f"case {tone}", x1, y, x2, y)
        if row is not None:
            sheet.words(
                f"case-words {tone}",
                x1 - 9 if to_left else x2 + 9,
                y,
                text,
                anchor="end" if to_left else "start",
            )
    return top + lane.height + (8 if lane.rows else 0)
