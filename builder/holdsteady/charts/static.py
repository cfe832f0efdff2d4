"""A chart drawn by the builder: for paper, and for readers whose browser runs no scripts.

The same parts in the same order as the live chart, at one width; what must be right in both is decided
in `picture`. Colours come from the page's style sheet by class.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final
from zoneinfo import ZoneInfo

import numpy as np

from holdsteady.arrays import Floats, Ints
from holdsteady.charts import lanes, picture
from holdsteady.charts.along import Along, along
from holdsteady.charts.labels import Labels
from holdsteady.charts.sheet import Sheet, fitted, text_width, thinned
from holdsteady.charts.ticks import order_ticks, time_ticks
from holdsteady.monitor.finding import Finding, LimitsInForce, Panel
from holdsteady.project.settings import Specification

_WIDTH: Final = 860.0
_TALL: Final = {"location": 200.0, "single": 230.0}
_SPREAD_TALL: Final = 95.0
_DOTS: Final = 600  # points up to which each is drawn, not only the line through them


@dataclass(frozen=True, slots=True, kw_only=True)
class _Heights:
    """The vertical scale of one panel."""

    low: float
    high: float
    top: float
    bottom: float

    def at(self, value: Floats) -> Floats:
        """Return pixels from the top, kept inside the plot."""
        share = (np.clip(value, self.low, self.high) - self.low) / (self.high - self.low)
        return self.bottom - share * (self.bottom - self.top)


def static_chart(finding: Finding, zone: ZoneInfo, labels: Labels) -> str:
    """Return a finding's chart as SVG markup, or '' where there is no point to draw.

    All text is escaped; there are no scripts, no style attributes and no references in it.
    """
    points = finding.points
    if points is None or len(points.n) == 0 or not finding.panels:
        return ""
    wanted = picture.wanted(finding)
    lines = (
        () if wanted is None else labels.wanted(finding, finding.panels[wanted.panel], wanted.specification)
    )
    numbers = max((text_width(text) for text in _numbers(finding, labels)), default=0.0)
    right = 14 + numbers + (30 + max(map(text_width, lines)) if lines else 0.0)
    axis = along(points, zone)
    across = _across(axis.place, _WIDTH - lanes.LEFT - right)
    sheet = Sheet(width=_WIDTH)
    top = lanes.draw_eras(sheet, finding, labels, across)
    top = lanes.draw_entries(sheet, finding, labels, across, axis, zone, top)
    for index, panel in enumerate(finding.panels):
        sheet.words("title", 0, top + 10, labels.panel(finding, panel))
        top += 24
        tall = _TALL.get(panel.name, _SPREAD_TALL)
        beside = wanted.specification if wanted is not None and wanted.panel == index else None
        low, high = _domain(finding, panel, beside, labels.decimals(finding, panel))
        heights = _Heights(low=low, high=high, top=top, bottom=top + tall)
        _draw_panel(sheet, finding, panel, across, heights)
        _draw_margin(sheet, finding, panel, labels, heights, across.stop + 10)
        if wanted is not None and wanted.panel == index:
            _draw_bracket(sheet, wanted, lines, heights, across.stop + 20 + numbers)
        top += tall + 6
        if index == 0:
            top = lanes.draw_cases(sheet, finding, labels, across, top)
    _draw_ticks(sheet, axis, across, top)
    if axis.shared:
        sheet.words("when", lanes.LEFT, top + 33, labels.reading["order"])
        top += 18
    return sheet.svg(top + 26)


def _across(place: Floats, width: float) -> lanes.Across:
    span = float(place[-1] - place[0])
    usable = width - 12
    scale = usable / span if span > 0 else 0.0
    start = lanes.LEFT + (6 if span > 0 else width / 2)
    return lanes.Across(
        x=start + (place - place[0]) * scale,
        first=float(place[0]),
        scale=scale,
        start=start,
        stop=lanes.LEFT + width,
    )


def _numbers(finding: Finding, labels: Labels) -> list[str]:
    texts = []
    for panel in finding.panels:
        values = [panel.centre[-1], panel.lower[-1], panel.upper[-1]]
        if not any(picture.has_limits(row) for row in picture.limits_of(finding, panel)):
            values += (
                [np.nanmin(panel.value), np.nanmax(panel.value)] if not np.all(np.isnan(panel.value)) else []
            )
        texts += [labels.number(finding, panel, float(value)) for value in values if not np.isnan(value)]
    return texts


def _domain(
    finding: Finding, panel: Panel, beside: Specification | None, decimals: int | None
) -> tuple[float, float]:
    """Return the vertical domain: limits, values in reach of them, and a specification that is near."""
    everything = _values_in_reach(finding, panel)
    low, high = (float(everything.min()), float(everything.max())) if everything.size else (0.0, 1.0)
    grounded = panel.name != "location" and low >= 0 and (panel.name == "spread" or low < 0.6 * high)
    low = 0.0 if grounded else low
    factor = 100 if panel.statistic == "fraction" else 1
    least = 0.0 if decimals is None else 4 * 10.0**-decimals / factor  # rounding noise must not fill the plot
    if high - low < least and not grounded:
        low, high = (low + high - least) / 2, (low + high + least) / 2
    span = high - low or abs(high) * 0.02 or 1.0
    ends = [] if beside is None else [beside.lower, beside.upper]
    near = [value for value in ends if value is not None and low - 0.4 * span < value < high + 0.4 * span]
    low, high = min([low, *near]), max([high, *near])
    span = high - low or span
    return (0.0 if grounded and low == 0 else low - span * 0.07), high + span * 0.07


def _values_in_reach(finding: Finding, panel: Panel) -> Floats:
    """Return limits and values, without faults and what lies so far out that it would flatten the rest."""
    limits = np.concatenate([panel.centre, panel.lower, panel.upper])
    limits = limits[~np.isnan(limits)]
    real = ~np.isnan(panel.value)
    values = panel.value[real if finding.points is None else real & ~finding.points.faulty]
    if limits.size and not np.all(np.isnan(panel.upper)):
        reach = 3 * (limits.max() - limits.min())
        values = values[(values >= limits.min() - reach) & (values <= limits.max() + reach)]
    everything = np.concatenate([values, limits])
    return everything if everything.size else panel.value[real]


def _draw_panel(
    sheet: Sheet, finding: Finding, panel: Panel, across: lanes.Across, heights: _Heights
) -> None:
    rows = picture.limits_of(finding, panel)
    for row in rows:
        _draw_limits(sheet, panel, row, across, heights)
    for case in finding.cases:
        start = picture.likely_start(case)
        if case.state == "open" and case.panel == panel.name and start is not None:
            x1, x2 = across.around(*start)
            sheet.rectangle("start", x1, heights.top, x2, heights.bottom)
    marks = picture.marks(finding, panel)
    shown = thinned(across.x, panel.value, marks != picture.POINT)
    x, y, kind = across.x[shown], heights.at(panel.value[shown]), marks[shown]
    _draw_line(sheet, finding, panel, shown, x, y, kind)
    if shown.size <= _DOTS:
        sheet.dots("dots", x[kind == picture.POINT], y[kind == picture.POINT])
    sheet.circles("hollow", x[kind == picture.HOLLOW], y[kind == picture.HOLLOW], 3)
    sheet.circles("incomplete", x[kind == picture.INCOMPLETE], y[kind == picture.INCOMPLETE], 3.2)
    ringed = np.isin(kind, (picture.RING, picture.RING_BELOW, picture.RING_ABOVE))
    sheet.circles("ring", x[ringed], y[ringed], 3.2)
    _draw_bars(sheet, x, y, kind)
    for a, b in zip(x[kind == picture.FAULT].tolist(), y[kind == picture.FAULT].tolist(), strict=True):
        sheet.path(
            "fault",
            [
                (np.array([a - 3, a + 3]), np.array([b - 3, b + 3])),
                (np.array([a - 3, a + 3]), np.array([b + 3, b - 3])),
            ],
        )


def _draw_bars(sheet: Sheet, x: Floats, y: Floats, kind: Ints) -> None:
    """Draw a bar at each limit that stands for a reading, its stem pointing to where the reading lies."""
    for name, below, above in (
        ("bar", picture.BELOW, picture.ABOVE),
        ("bar open", picture.RING_BELOW, picture.RING_ABOVE),
    ):
        way = np.where(kind == below, 1.0, -1.0)
        chosen = np.flatnonzero((kind == below) | (kind == above)).tolist()
        bars = [(x[i] + np.array([-4.0, 4.0]), np.array([y[i], y[i]])) for i in chosen]
        stems = [(np.array([x[i], x[i]]), np.array([y[i], y[i] + 6 * way[i]])) for i in chosen]
        sheet.path(name, bars + stems)


def _draw_line(
    sheet: Sheet, finding: Finding, panel: Panel, shown: Ints, x: Floats, y: Floats, kind: Ints
) -> None:
    """Draw the connecting line, broken where the history is and where a point is missing."""
    assert finding.points is not None
    missing = np.cumsum(np.isnan(panel.value))
    key = np.stack([finding.points.segment[shown], missing[shown]])[:, kind != picture.FAULT]
    inside = np.flatnonzero(kind != picture.FAULT)
    breaks = np.flatnonzero(np.any(np.diff(key, axis=1) != 0, axis=0)) + 1
    pieces = np.split(inside, breaks)
    sheet.path("through", [(x[piece], y[piece]) for piece in pieces])


def _draw_limits(
    sheet: Sheet, panel: Panel, row: LimitsInForce, across: lanes.Across, heights: _Heights
) -> None:
    """Draw the band of a row, stepped where limits differ from point to point, its edges and centre."""
    span = slice(row.start_index, row.stop_index)
    columns = np.stack([panel.centre[span], panel.lower[span], panel.upper[span]])
    if not row.varies:
        columns = np.array([[np.nan if v is None else v] for v in (row.centre, row.lower, row.upper)])
    same = (columns[:, 1:] == columns[:, :-1]) | (np.isnan(columns[:, 1:]) & np.isnan(columns[:, :-1]))
    starts = np.append(0, np.flatnonzero(~np.all(same, axis=0)) + 1)
    stops = np.append(starts[1:], row.stop_index - row.start_index)
    edges = np.array([[across.edge(row, row.start_index + int(i)) for i in ends] for ends in (starts, stops)])
    x = edges.T.reshape(-1)
    centre, lower, upper = (np.repeat(column[starts], 2) for column in columns)
    if picture.has_limits(row):
        low, high = (
            np.where(np.isnan(lower), heights.low, lower),
            np.where(np.isnan(upper), heights.high, upper),
        )
        outline = (np.concatenate([x, x[::-1]]), np.concatenate([heights.at(high), heights.at(low)[::-1]]))
        sheet.path("band", [outline], closed=True)
        kind = "edge provisional" if row.kind == "provisional" else "edge"
        sheet.path(kind, [_real(x, line, heights) for line in (lower, upper)])
    sheet.path("middle", [_real(x, centre, heights)])


def _real(x: Floats, line: Floats, heights: _Heights) -> tuple[Floats, Floats]:
    real = ~np.isnan(line)
    return x[real], heights.at(line[real])


def _draw_margin(
    sheet: Sheet, finding: Finding, panel: Panel, labels: Labels, heights: _Heights, left: float
) -> None:
    rows = picture.limits_of(finding, panel)
    values = list(picture.quoted(rows[-1], panel)) if rows else []
    if not rows or not picture.has_limits(rows[-1]):
        values += [] if np.all(np.isnan(panel.value)) else [np.nanmax(panel.value), np.nanmin(panel.value)]
    said = {labels.number(finding, panel, float(v)): float(v) for v in values if not np.isnan(v)}
    if heights.low == 0 and panel.name != "location" and all(v > 0 for v in said.values()):
        said[labels.number(finding, panel, 0.0)] = 0.0
    last = -np.inf
    for text, value in sorted(said.items(), key=lambda item: -item[1]):
        last = max(float(heights.at(np.array(value))), last + 14)
        sheet.words("limit-value", left, last, text)


def _draw_bracket(
    sheet: Sheet, wanted: picture.Wanted, lines: tuple[str, ...], heights: _Heights, left: float
) -> None:
    ends = {}
    for name, beyond in (("upper", heights.top), ("lower", heights.bottom)):
        value = getattr(wanted.specification, name)
        inside = value is not None and heights.low <= value <= heights.high
        ends[name] = float(heights.at(np.array(value))) if inside else beyond
        if inside:
            sheet.line("bracket", left, ends[name], left + 6, ends[name])
    sheet.line("bracket", left + 6, ends["upper"], left + 6, ends["lower"])
    middle = (ends["upper"] + ends["lower"]) / 2 - (len(lines) - 1) * 7.5
    for number, text in enumerate(lines):
        sheet.words("wanted", left + 13, middle + number * 15, text)


def _draw_ticks(sheet: Sheet, axis: Along, across: lanes.Across, top: float) -> None:
    most = 7
    if axis.moments is None or not axis.timed:
        ticks = order_ticks(len(axis.place), most)
    else:
        ticks = time_ticks(int(axis.moments[0]), int(axis.moments[-1]), most)
    for place, text in ticks:
        x = across.at(place)
        half = text_width(text) / 2
        sheet.line("tick", x, top, x, top + 5)
        sheet.words("when", min(max(x - half, 0), across.stop - half), top + 15, fitted(text, 120))
