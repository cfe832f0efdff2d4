"""Limits in words: the figures, and where they came from."""

from __future__ import annotations

from dataclasses import dataclass

from holdsteady.charts.picture import quoted
from holdsteady.monitor.finding import TOO_FEW, Calculation, Finding, LimitsInForce, Panel
from holdsteady.site.moments import Clock
from holdsteady.site.numbers import Scale, counted, known, plain
from holdsteady.site.words import LIMITS_KINDS, estimator_said, panel_named, scale, statistic_name


@dataclass(frozen=True, slots=True, kw_only=True)
class LimitsRow:
    """One set of limits in a table."""

    panel: str
    since: str
    kind: str
    lower: str
    centre: str
    upper: str
    origin: str


def current_limits(finding: Finding, clock: Clock) -> list[tuple[str, str]]:
    """Return the limits in force at the newest point as pairs of name and text, their origin below them."""
    lines: list[tuple[str, str]] = []
    origins: list[list[tuple[str, str]]] = []
    for panel in finding.panels:
        row = next((row for row in finding.limits_now if row.panel == panel.name), None)
        if row is None:
            continue
        said = limits_said(row, panel, scale(finding, panel))
        lines.append((statistic_name(panel, finding.common_n), said))
        origins.append(_origin(finding, row, clock))
    for position, origin in enumerate(origins):
        if position == 0 or origin != origins[0]:
            lines += origin
    for row in finding.limits_waiting:
        panel = panel_named(finding, row.panel)
        said = limits_said(row, panel, scale(finding, panel))
        when = f", from {clock.full(row.in_force_from)} on" if row.in_force_from is not None else ""
        lines.append(("To come", f"{statistic_name(panel, finding.common_n)} {said}{when}"))
    return lines


def estimate_lead(finding: Finding, calculation: Calculation) -> str:
    """Return what a calculation is where the limits in force do not come from it."""
    kinds = {row.kind for row in finding.limits_now if row.limited}
    kept = any("kept" in row.note for row in finding.limits_now)
    if kept:
        said = "The limits in force, or their sigma, are kept from the era before."
    elif kinds and kinds <= {"adopted", "given"}:
        said = f"The limits in force are {' and '.join(sorted(kinds))}."
    else:
        said = "There are no limits in force."
    where = "this era" if len(finding.eras) > 1 else "this history"
    return f"{said} An estimate made anew from {counted(calculation.points, 'point')} of {where} gives:"


def limits_said(row: LimitsInForce, panel: Panel, written: Scale) -> str:
    """Return '11.989 – 12.000 – 12.011 mm', or what is missing and why."""
    lower, centre, upper = quoted(row, panel)
    middle = "" if not known(centre) else written.bare(centre)
    if known(lower) and known(upper):
        said = written.with_unit(f"{written.bare(lower)} – {middle} – {written.bare(upper)}")
    elif known(upper):
        said = f"centre {written.with_unit(middle)}, upper limit {written.value(upper)}; no lower limit"
    elif known(lower):
        said = f"lower limit {written.value(lower)}, centre {written.with_unit(middle)}; no upper limit"
    else:
        said = (
            f"{'median' if row.estimator == 'median' else 'centre'} {written.with_unit(middle)}; no limits"
            if middle
            else "none"
        )
    if row.varies:
        said += ", at the newest point; they vary with the size of each"
    return f"{said} ({row.note})" if row.note else said


def limits_table(finding: Finding, clock: Clock) -> tuple[LimitsRow, ...]:
    """Return every set of limits that was in force, newest first."""
    rows = []
    for row in sorted(finding.limits, key=lambda r: (-r.start_index, r.panel)):
        panel = panel_named(finding, row.panel)
        written = scale(finding, panel)
        lower, centre, upper = (
            "varies" if row.varies and v is None else "none" if v is None else written.value(v)
            for v in (row.lower, row.centre, row.upper)
        )
        rows.append(
            LimitsRow(
                panel=statistic_name(panel, finding.common_n), since=_since(finding, row, clock),
                kind=LIMITS_KINDS[row.kind],
                lower=lower, centre=centre, upper=upper, origin=_points_said(row, clock),
            )
        )  # fmt: skip
    return tuple(rows)


def _origin(finding: Finding, row: LimitsInForce, clock: Clock) -> list[tuple[str, str]]:
    lines = [("Origin", _kind_said(row, clock))]
    if row.kind != "given" and (points := _points_said(row, clock)):
        lines.append(("From", points))
    if row.sigma is not None:
        unit = Scale(statistic="value", unit=finding.settings.unit)
        by = f", from {estimator_said(row.estimator)}" if row.estimator and row.kind != "given" else ""
        lines.append(("Sigma", f"{unit.figure(row.sigma, unit=True)} of a single reading{by}"))
    if row.limited:
        lines.append(("In force since", _since(finding, row, clock)))
    return lines


def _kind_said(row: LimitsInForce, clock: Clock) -> str:
    if row.kind == "adopted":
        by = f" by {row.by}" if row.by else ""
        when = f" on {clock.day(row.adopted_at)}" if row.adopted_at is not None else ""
        return f"adopted{by}{when}" + (f": {row.reason}" if row.reason else "")
    if not row.limited:
        if row.note == TOO_FEW:
            return "the median of the points so far; there are no limits yet"
        return "the baseline's centre; it allows no limits"
    if row.kind == "given":
        return "given in the settings, not estimated"
    return "provisional: nobody has adopted them"


def _points_said(row: LimitsInForce, clock: Clock) -> str:
    if row.points is None:
        return ""
    said = counted(row.points, "point")
    if row.baseline_from is not None and row.baseline_to is not None:
        said += f", {clock.days(row.baseline_from, row.baseline_to)}"
    if row.excluded:
        said += f"; {plain(row.excluded)} left out by the logbook"
    return said


def _since(finding: Finding, row: LimitsInForce, clock: Clock) -> str:
    if row.in_force_from is not None:
        return clock.full(row.in_force_from)
    if finding.points is not None and finding.points.time is not None and row.start_index > 0:
        return clock.full(int(finding.points.time[row.start_index]))
    return "the first point" if row.start_index == 0 else f"point {row.start_index + 1}"
