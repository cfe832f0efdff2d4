"""A finding as the columns that the live chart of one page binds, written as a classic script.

Times are milliseconds of the plant's wall clock, counted as if it were UTC. Limits are one entry for
each stretch they are in force; only limits that differ from point to point are columns. What differs
from the ordinary point is listed, the rest is silent. Missing numbers are null.
"""

from __future__ import annotations

import json
from typing import Any, Final
from zoneinfo import ZoneInfo

import numpy as np
import orjson

from holdsteady.arrays import Floats, Ints
from holdsteady.charts import picture
from holdsteady.charts.along import Along, along
from holdsteady.charts.labels import Labels
from holdsteady.monitor.finding import Finding, LimitsInForce, Panel
from holdsteady.times import wall

_MILLISECOND: Final = 1_000
_ESCAPES: Final = str.maketrans({"<": "\\u003c", ">": "\\u003e", "&": "\\u0026"})


def page_data(finding: Finding, zone: ZoneInfo, labels: Labels) -> bytes:
    """Return the script that hands a finding's columns to the page, ASCII and free of markup.

    Parameters
    ----------
    finding : Finding
        With points; a finding without any gives empty columns.
    zone : ZoneInfo
        The plant's, in which its clock is read.
    labels : Labels
        Who writes the words.
    """
    columns = _columns(finding, zone, labels)
    text = ",".join(f"{_text(name)}:{_value(value)}" for name, value in columns.items())
    return f"holdsteady.data({_text(finding.slug)},{{{text}}});\n".encode("ascii")


def _columns(finding: Finding, zone: ZoneInfo, labels: Labels) -> dict[str, Any]:
    points = finding.points
    count = 0 if points is None else len(points.n)
    axis = None if points is None else along(points, zone)
    return {
        "kind": finding.chart,
        "timed": axis is not None and axis.timed,
        "count": count,
        "x": [] if axis is None else _places(axis),
        # What to read at each point where the axis does not tell.
        "moments": axis.moments // _MILLISECOND
        if axis is not None and axis.moments is not None and axis.shared
        else None,
        "n": None if points is None else _constant_or_column(points.n),
        "label": list(points.label) if points is not None and any(points.label) else None,
        "pieces": [0]
        if points is None or count == 0
        else [0, *(np.flatnonzero(np.diff(points.segment)) + 1).tolist()],
        "panels": [_panel(finding, panel, labels) for panel in finding.panels],
        "limits": [
            _limits(finding, panel, row, labels, index)
            for index, panel in enumerate(finding.panels)
            for row in picture.limits_of(finding, panel)
        ],
        "eras": [
            {"from": e.start_index, "to": e.stop_index, "text": labels.era(finding, e)} for e in finding.eras
        ],
        "baselines": _baselines(finding, labels),
        "entries": [] if axis is None else _entries(finding, zone, labels, axis),
        "cases": _cases(finding, labels),
        "wanted": _wanted(finding, labels),
        "words": dict(labels.reading),
    }


def _places(axis: Along) -> Any:
    if not axis.timed or axis.moments is None:
        return {"from": 1, "step": 1}
    moments: Ints = axis.moments // _MILLISECOND
    steps = np.diff(moments)
    if steps.size and steps[0] > 0 and np.all(steps == steps[0]):
        return {"from": int(moments[0]), "step": int(steps[0])}
    return moments


def _constant_or_column(column: Floats) -> Any:
    return _finite(column[0]) if column.size and np.all(column == column[0]) else column


def _panel(finding: Finding, panel: Panel, labels: Labels) -> dict[str, Any]:
    marks = picture.marks(finding, panel)
    flagged = np.flatnonzero(marks)
    varies = any(row.varies for row in picture.limits_of(finding, panel))
    return {
        "name": panel.name,
        "title": labels.panel(finding, panel),
        "unit": labels.unit(finding, panel),
        "factor": 100 if panel.statistic == "fraction" else 1,
        "decimals": labels.decimals(finding, panel),
        "value": panel.value,
        "flagged": flagged,
        "marks": marks[flagged],
        "baseline": picture.baseline_spans(panel),
        "columns": {"centre": panel.centre, "lower": panel.lower, "upper": panel.upper} if varies else None,
        "floor": panel.name != "location" and labels.number(finding, panel, 0.0),
    }


def _limits(finding: Finding, panel: Panel, row: LimitsInForce, labels: Labels, index: int) -> dict[str, Any]:
    said = {
        name: labels.number(finding, panel, value) if np.isfinite(value) else None
        for name, value in zip(("lower", "centre", "upper"), picture.quoted(row, panel), strict=True)
    }
    return {
        "panel": index,
        "from": row.start_index,
        "to": row.stop_index,
        "varies": row.varies,
        "dotted": row.kind == "provisional",
        "drawn": picture.has_limits(row),
        "centre": _finite(row.centre),
        "lower": _finite(row.lower),
        "upper": _finite(row.upper),
        "said": said,
    }


def _baselines(finding: Finding, labels: Labels) -> list[dict[str, Any]]:
    if not finding.panels or not finding.eras:
        return []
    spans = picture.baseline_spans(finding.panels[0])
    eras = {
        start: next((e for e in finding.eras if e.start_index <= start < e.stop_index), finding.eras[-1])
        for start, _ in spans
    }
    return [
        {"from": start, "to": stop, "text": labels.baseline(finding, eras[start])} for start, stop in spans
    ]


def _entries(finding: Finding, zone: ZoneInfo, labels: Labels, axis: Along) -> list[dict[str, Any]]:
    if axis.moments is None:
        return []
    began = {e.entry.line for e in finding.eras if e.entry is not None}  # told by the era's own label
    lines = sorted((e for e in finding.logbook if e.line not in began), key=lambda e: (e.when, e.line))
    spans = [(e.when, e.when if e.until is None else e.until) for e in lines]
    moments = wall(np.array(spans, dtype=np.int64).reshape(-1), zone)
    places: list[Any] = (moments // _MILLISECOND if axis.timed else axis.at(moments)).tolist()
    return [
        {"from": start, "to": stop, "text": labels.entry(finding, entry)}
        for entry, start, stop in zip(lines, places[::2], places[1::2], strict=True)
    ]


def _cases(finding: Finding, labels: Labels) -> list[dict[str, Any]]:
    names = [panel.name for panel in finding.panels]
    return [
        {
            "from": case.first_index,
            "to": case.last_index + 1,
            "low": None if (start := picture.likely_start(case)) is None else start[0],
            "high": None if start is None else start[1],
            "panel": names.index(case.panel) if case.panel in names else 0,
            "tone": picture.case_tone(case),
            "text": labels.case(finding, case),
        }
        for case in finding.cases
        if case.state != "withdrawn"
    ]


def _wanted(finding: Finding, labels: Labels) -> dict[str, Any] | None:
    found = picture.wanted(finding)
    if found is None:
        return None
    lines = labels.wanted(finding, finding.panels[found.panel], found.specification)
    return {
        "panel": found.panel,
        "lower": found.specification.lower,
        "upper": found.specification.upper,
        "lines": list(lines),
    }


def _value(value: Any) -> str:
    """Write a value: arrays by orjson, which writes NaN as null, and text by json, which keeps to ASCII."""
    if isinstance(value, np.ndarray):
        return orjson.dumps(np.ascontiguousarray(value), option=orjson.OPT_SERIALIZE_NUMPY).decode("ascii")
    if not _holds_array(value):
        return _text(value)
    if isinstance(value, dict):
        return "{" + ",".join(f"{_text(key)}:{_value(item)}" for key, item in value.items()) + "}"
    return "[" + ",".join(_value(item) for item in value) + "]"


def _holds_array(value: Any) -> bool:
    if isinstance(value, dict):
        return any(_holds_array(item) for item in value.values())
    if isinstance(value, list):
        return bool(value) and isinstance(value[0], dict) and any(_holds_array(item) for item in value)
    return isinstance(value, np.ndarray)


def _text(value: Any) -> str:
    return json.dumps(value, ensure_ascii=True, allow_nan=False, separators=(",", ":")).translate(_ESCAPES)


def _finite(value: float | None) -> float | None:
    return None if value is None or not np.isfinite(value) else float(value)
