"""What else is worth knowing of a characteristic: its flags, its rules, its data's habits, what is wanted."""

from __future__ import annotations

import datetime as dt

from holdsteady.monitor.finding import Finding
from holdsteady.project.settings import Specification
from holdsteady.site.moments import Clock
from holdsteady.site.numbers import Scale, counted, known, plain
from holdsteady.site.words import flag_said, rule_said, statistic_name
from holdsteady.times import to_microseconds

_ATTRIBUTES = {"p", "np", "c", "u"}


def remarks(finding: Finding) -> tuple[str, ...]:
    """Return one sentence for each thing that limits how far the chart can be trusted."""
    said = [f"{flag_said(flag)}." for flag in finding.flags]
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
    if finding.chart in _ATTRIBUTES and finding.panels and _no_lower_limit(finding):
        said.append("There is no lower limit: one point alone cannot show an improvement.")
    if finding.resolution is not None:
        unit = Scale(statistic="value", unit=finding.settings.unit)
        said.append(f"The smallest step between readings is {unit.figure(finding.resolution, unit=True)}.")
    if finding.censored:
        said.append(
            f"{counted(finding.censored, 'reading')} beyond what the gauge can read "
            f"{_was(finding.censored)} set aside."
        )
    if finding.points is not None and (left_out := int(finding.points.excluded.sum())):
        said.append(f"{counted(left_out, 'point')} {_was(left_out)} left out of the limits, yet drawn.")
    return tuple(said)


def legend(finding: Finding) -> str:
    """Return how to read the chart, naming only what is in it."""
    said = ["Band: the control limits, what this process does by itself; dotted while provisional."]
    if any(case.state == "open" for case in finding.cases):
        said.append("Ringed: part of an open case.")
    if finding.points is not None and bool(finding.points.excluded.any()):
        said.append("Hollow: left out of the limits.")
    if finding.points is not None and bool(finding.points.faulty.any()):
        said.append("Crossed: a measurement fault, not judged.")
    if finding.specification:
        apart = finding.panels[0].statistic in {"mean", "median"}
        vary = f", which vary more than their {finding.panels[0].statistic}s" if apart else ""
        said.append(f"Bracket in the margin: what is wanted of single pieces{vary}.")
    return " ".join(said)


def rules_said(finding: Finding) -> tuple[tuple[str, tuple[str, ...]], ...]:
    """Return for each panel the rules that are applied to it."""
    return tuple(
        (statistic_name(panel, finding.common_n), tuple(rule_said(rule) for rule in panel.rules))
        for panel in finding.panels
    )


def wanted(finding: Finding, clock: Clock) -> tuple[tuple[str, str], ...]:
    """Return what is wanted of single pieces and what was seen: never an index, never a prediction."""
    if not finding.specification:
        return ()
    lines = [(_name(s, clock), _specification(finding, s)) for s in finding.specification]
    for summary in finding.summaries[-1:]:
        where = "in this era" if len(finding.eras) > 1 else "so far"
        if summary.outside_observed is not None and summary.n:
            outside = plain(summary.outside_observed) if summary.outside_observed else "none"
            lines.append(("Seen", f"{outside} of {counted(summary.n, 'reading')} outside {where}"))
        if summary.mean is not None:
            unit = Scale(statistic="value", unit=finding.settings.unit, decimals=finding.settings.decimals)
            lines.append(("Mean", unit.value(summary.mean)))
        if summary.sigma_total is not None:
            unit = Scale(statistic="value", unit=finding.settings.unit)
            lines.append(
                ("Standard deviation", f"{unit.figure(summary.sigma_total, unit=True)} of all readings")
            )
    return tuple(lines)


def _no_lower_limit(finding: Finding) -> bool:
    lower = finding.panels[0].lower
    return lower.size > 0 and not known(float(lower[-1]))


def _name(specification: Specification, clock: Clock) -> str:
    since: dt.datetime | dt.date | None = specification.from_
    return "Wanted" if since is None else f"Wanted from {clock.day(to_microseconds(since, clock.zone))}"


def _specification(finding: Finding, specification: Specification) -> str:
    unit = Scale(statistic="value", unit=finding.settings.unit, decimals=finding.settings.decimals)
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


def _was(count: int) -> str:
    return "was" if count == 1 else "were"
