"""What else is worth knowing of a characteristic: its flags, its rules, its data's habits, what is wanted."""

from __future__ import annotations

import datetime as dt

from holdsteady.charts.picture import quoted
from holdsteady.monitor.finding import Finding
from holdsteady.project.settings import Specification
from holdsteady.site import decimals
from holdsteady.site.moments import Clock
from holdsteady.site.numbers import Scale, counted, known, listed, plain
from holdsteady.site.words import flag_said, rule_said, statistic_name
from holdsteady.times import to_microseconds

_MANY = 0.1  # of the points; common practice, no source


def remarks(finding: Finding) -> tuple[str, ...]:
    """Return one sentence for each thing that limits how far the chart can be trusted."""
    said = [_flag(finding, flag) for flag in finding.flags]
    if (sigma_z := finding.overdispersion) is not None:
        said.append(
            f"The points vary {plain(sigma_z, significant=3)} times as much as their sizes alone explain "
            "(sigma_z); 1 would be exactly as much."
        )
    if (ratio := finding.sigma_ratio) is not None:
        said.append(
            f"Overall standard deviation ÷ sigma from moving ranges is {plain(ratio, significant=3)}; "
            "well above 1 would speak of drift, well below of alternation."
        )
    said += _one_sided(finding)
    if finding.resolution is not None:
        unit = Scale(statistic="value", unit=finding.settings.unit)
        said.append(f"The smallest step between readings is {unit.figure(finding.resolution, unit=True)}.")
    said += _not_taken(finding)
    if finding.points is not None and (left_out := int(finding.points.excluded.sum())):
        said.append(f"{counted(left_out, 'point')} {_was(left_out)} left out of the limits, yet drawn.")
    return tuple(said)


def _flag(finding: Finding, flag: str) -> str:
    if flag == "doubtful-limits" and finding.doubts:
        return f"{flag_said(flag)}: {listed(list(finding.doubts))}."
    return f"{flag_said(flag)}."


def _one_sided(finding: Finding) -> list[str]:
    """Return which way one point alone cannot show, where a count's limits have a single side."""
    row = next((row for row in finding.limits_now if row.limited and row.panel == "single"), None)
    if row is None or (row.varies and row.at_index is None):
        return []
    lower, _, upper = quoted(row, finding.panels[0])
    improving, worsening = ("upper", "lower") if finding.settings.better == "higher" else ("lower", "upper")
    missing = {"lower": not known(lower), "upper": not known(upper)}
    ways = ((improving, "an improvement"), (worsening, "that it got worse"))
    said = "There is no {} limit: one point alone cannot show {}."
    return [said.format(side, way) for side, way in ways if missing[side]]


def _not_taken(finding: Finding) -> list[str]:
    """Return what is known of readings that are beyond the gauge, or beyond belief."""
    said = []
    of_all = ", of all its members together" if finding.settings.each else ""
    if at_limit := finding.at_limit:
        many = counted(at_limit, "reading")
        said.append(
            f"{many} beyond what the gauge can read {_was(at_limit)} drawn at the least or most it can, "
            "and left out of the limits."
        )
        said += _leaning(finding)
    if censored := finding.censored:
        many = counted(censored, "reading")
        said.append(f"{many} beyond what the gauge can read {_was(censored)} set aside{of_all}.")
    if (implausible := finding.implausible) and (bounds := finding.settings.plausible) is not None:
        unit = Scale(statistic="value", unit=finding.settings.unit)
        said.append(
            f"{counted(implausible, 'reading')} not plausible ({_between(bounds.lower, bounds.upper, unit)}) "
            f"{_was(implausible)} set aside{of_all}."
        )
    return said


def _leaning(finding: Finding) -> list[str]:
    """Return that the centre leans to one side, where many points of the other are left out of it."""
    if finding.points is None:
        return []
    side = finding.points.side
    below, above = int((side < 0).sum()), int((side > 0).sum())
    if max(below, above) < _MANY * side.size or min(below, above):
        return []
    way = "high" if below else "low"
    return [f"The centre, from the others alone, is too {way} for the process as a whole."]


def _between(lower: float | None, upper: float | None, unit: Scale) -> str:
    if lower is not None and upper is not None:
        return f"plausible is {unit.bare(lower)} to {unit.value(upper)}"
    if lower is not None:
        return f"plausible is at least {unit.value(lower)}"
    return f"plausible is at most {unit.value(upper)}" if upper is not None else "no bounds"


def legend(finding: Finding) -> str:
    """Return how to read the chart, naming only what is in it."""
    if any(row.limited for row in finding.limits):
        said = ["Band: the control limits, what this process does by itself; dotted while provisional."]
    else:
        said = ["Line: the centre; there are no limits, so nothing can signal."]
    if any(case.state == "open" for case in finding.cases):
        said.append("Ringed: part of an open case.")
    if finding.points is not None and bool(finding.points.excluded.any()):
        said.append("Hollow: left out of the limits.")
    if finding.points is not None and bool(finding.points.faulty.any()):
        said.append("Crossed: a measurement fault, not judged.")
    if finding.at_limit:
        said.append("Bar with a stem: known only to lie on the stem's side; left out of the limits.")
    if finding.specification:
        apart = finding.panels[0].statistic in {"mean", "median"}
        vary = f", which vary more than their {finding.panels[0].statistic}s" if apart else ""
        said.append(f"Bracket in the margin: what is wanted of single pieces{vary}.")
    return " ".join(said)


def rules_said(finding: Finding) -> tuple[tuple[str, tuple[str, ...]], ...]:
    """Return for each panel the rules that are applied to it."""
    return tuple(
        (statistic_name(panel, finding.common_n), tuple(rule_said(rule, panel) for rule in panel.rules))
        for panel in finding.panels
    )


def wanted(finding: Finding, clock: Clock) -> tuple[tuple[str, str], ...]:
    """Return what is wanted of single pieces and what was seen: never an index, never a prediction."""
    if not finding.specification:
        return ()
    lines = [(_name(s, clock), _specification(finding, s)) for s in finding.specification]
    for summary in finding.summaries[-1:]:
        where = "in this era" if len(finding.eras) > 1 else "so far"
        if summary.outside_observed is not None and summary.n + summary.censored:
            outside = plain(summary.outside_observed) if summary.outside_observed else "none"
            seen = summary.n + summary.censored
            lines.append(("Seen", f"{outside} of {counted(seen, 'reading')} outside {where}"))
        if summary.mean is not None:
            unit = _unit(finding, decimals.of_reading(finding))
            lines.append(("Mean", unit.value(summary.mean)))
        if summary.sigma_total is not None:
            unit = Scale(statistic="value", unit=finding.settings.unit)
            lines.append(
                ("Standard deviation", f"{unit.figure(summary.sigma_total, unit=True)} of all readings")
            )
    return tuple(lines)


def _name(specification: Specification, clock: Clock) -> str:
    since: dt.datetime | dt.date | None = specification.from_
    return "Wanted" if since is None else f"Wanted from {clock.day(to_microseconds(since, clock.zone))}"


def _specification(finding: Finding, specification: Specification) -> str:
    places = decimals.of_reading(finding)
    if finding.settings.decimals is None:
        places = decimals.of_wanted(specification, places)
    unit = _unit(finding, places)
    lower, upper, target = specification.lower, specification.upper, specification.target
    if lower is not None and upper is not None:
        said = f"{unit.bare(lower)} to {unit.value(upper)}"
    elif lower is not None:
        said = f"at least {unit.value(lower)}"
    elif upper is not None:
        said = f"at most {unit.value(upper)}"
    else:
        said = ""
    aim = "" if target is None else f"target {unit.value(target)}"
    return ", ".join(part for part in (said, aim) if part)


def _unit(finding: Finding, places: int | None) -> Scale:
    return Scale(statistic="value", unit=finding.settings.unit, decimals=places)


def _was(count: int) -> str:
    return "was" if count == 1 else "were"
