"""The points that signal or are treated apart, as rows: what a chart shows, for those who cannot see it."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from holdsteady.arrays import Ints
from holdsteady.monitor.finding import Finding, Panel
from holdsteady.site.moments import Clock
from holdsteady.site.numbers import known
from holdsteady.site.sentences import beyond, point_short
from holdsteady.site.words import RULES, SPREADS, scale, statistic_name, statistic_said

_MOST = 60  # rows; tables/points has all


@dataclass(frozen=True, slots=True, kw_only=True)
class PointRow:
    """One point."""

    number: int
    when: str
    label: str
    values: tuple[tuple[str, str], ...]  # by panel: the value, and the limits it is judged by
    said: tuple[str, ...]
    origin: str


def flagged_rows(finding: Finding, clock: Clock) -> tuple[tuple[PointRow, ...], int]:
    """Return the newest points that meet a rule or stand apart, and how many more there are."""
    points = finding.points
    if points is None:
        return (), 0
    flagged = points.excluded | points.faulty | points.open
    for panel in finding.panels:
        for met in panel.met.values():
            flagged = flagged | (met != 0)
    # Where many are known only by a limit, they must not push the signals out of the table.
    if np.count_nonzero(flagged | (points.side != 0)) <= _MOST:
        flagged = flagged | (points.side != 0)
    indices: Ints = np.flatnonzero(flagged)[::-1]
    return tuple(_row(finding, int(i), clock) for i in indices[:_MOST]), max(len(indices) - _MOST, 0)


def headings(finding: Finding) -> tuple[tuple[str, str], ...]:
    """Return for each panel the headings of its values and of their limits, both with their unit."""
    found = []
    for panel in finding.panels:
        unit = scale(finding, panel).with_unit("").strip()
        of = f", {unit}" if unit else ""
        found.append((f"{statistic_name(panel, finding.common_n)}{of}", f"Limits{of}"))
    return tuple(found)


def _row(finding: Finding, index: int, clock: Clock) -> PointRow:
    points = finding.points
    assert points is not None
    said = [
        _met(panel, rule, index)
        for panel in finding.panels
        for rule in panel.met
        if panel.met[rule][index] != 0
    ]
    if points.faulty[index]:
        said.append("measurement fault: not judged")
    elif points.excluded[index]:
        said.append("left out of the limits by the logbook")
    if points.open[index]:
        said.append("incomplete: not judged")
    if points.side[index]:
        said.append("known only by the limit it lies beyond")
    return PointRow(
        number=index + 1, when=point_short(points, index, clock), label=points.label[index],
        values=tuple(_value(finding, panel, index) for panel in finding.panels), said=tuple(said),
        origin=f"{points.files[points.file[index]]}:{points.line[index]}",
    )  # fmt: skip


def _met(panel: Panel, rule: str, index: int) -> str:
    way = {1: ", high", -1: ", low"}.get(int(panel.met[rule][index]), "")
    subject = f"{statistic_said(panel)}: " if panel.statistic in SPREADS else ""
    return f"{subject}{RULES.get(rule, rule)}{way}"


def _value(finding: Finding, panel: Panel, index: int) -> tuple[str, str]:
    written = scale(finding, panel)
    value, lower, upper = (float(column[index]) for column in (panel.value, panel.lower, panel.upper))
    if known(lower) and known(upper):
        between = f"{written.bare(lower)} – {written.bare(upper)}"
    elif known(upper):
        between = f"up to {written.bare(upper)}"
    else:
        between = f"from {written.bare(lower)}" if known(lower) else "none"
    sign = beyond(finding, index) if panel.name != "spread" else ""
    return (f"{sign}{written.bare(value)}" if known(value) else "none", between)
