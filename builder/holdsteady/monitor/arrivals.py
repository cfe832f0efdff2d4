"""What has come in and what has not: members that are new or have gone, and readings that are overdue."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Literal

from holdsteady.intake.readings import Readings
from holdsteady.monitor.context import Context
from holdsteady.monitor.finding import Finding
from holdsteady.monitor.gather import up_to
from holdsteady.project.calendar import parse_calendar
from holdsteady.project.settings import Characteristic

_GONE_AFTER = 2  # cadences


@dataclass(frozen=True, slots=True, kw_only=True)
class Span:
    """When the first and the last reading of a characteristic were taken, microseconds UTC."""

    first: int
    last: int


@dataclass(frozen=True, slots=True, kw_only=True)
class Member:
    """A value of `each` that has appeared of late, or that no longer comes while others of it do.

    `since` is its first reading where it is new, its last where it has gone. `family` is the
    characteristic's id in the settings.
    """

    family: str
    name: str
    slug: str
    title: str
    change: Literal["new", "gone"]
    since: int


@dataclass(frozen=True, slots=True, kw_only=True)
class Lateness:
    """The next reading of a characteristic with a cadence.

    `due` is one cadence of calendar time after `last`; `late` is how much calendar time has passed since
    then, 0 while it is not late. All are microseconds, moments UTC.
    """

    name: str
    slug: str
    title: str
    last: int
    due: int
    late: int
    cadence: int


@dataclass(frozen=True, slots=True, kw_only=True)
class Arrivals:
    """New and gone members in the order of the findings, and lateness, the latest first."""

    members: tuple[Member, ...] = ()
    lateness: tuple[Lateness, ...] = ()

    @property
    def late(self) -> tuple[Lateness, ...]:
        """Those that are late."""
        return tuple(one for one in self.lateness if one.late)


def arrivals(findings: Sequence[Finding], spans: Mapping[str, Span], context: Context) -> Arrivals:
    """Tell what has come and what has not.

    Parameters
    ----------
    spans: by name, of each characteristic that has readings with times.

    A member is new when its first reading lies within the attention span and another of its family is
    older. It has gone when its last reading lies further back than the attention span and two cadences of
    calendar time, while another of its family still comes.
    """
    families: dict[str, list[Finding]] = {}
    for finding in findings:
        if finding.name in spans:
            families.setdefault(finding.settings.id, []).append(finding)
    members = [one for family in families.values() for one in _members(family, spans, context)]
    found = [_lateness(f, spans[f.name], context) for family in families.values() for f in family]
    lateness = sorted((one for one in found if one is not None), key=lambda one: (-one.late, one.name))
    return Arrivals(members=tuple(members), lateness=tuple(lateness))


def _members(family: Sequence[Finding], spans: Mapping[str, Span], context: Context) -> list[Member]:
    settings = family[0].settings
    if not settings.each:
        return []
    recent = context.as_of - context.attention
    new = [spans[one.name].first > recent for one in family]
    gone = [_has_gone(spans[one.name].last, settings, context) for one in family]
    found = []
    for finding, is_new, is_gone in zip(family, new, gone, strict=True):
        span = spans[finding.name]
        if is_gone and not all(gone):
            found.append(_member(finding, "gone", span.last))
        elif is_new and not all(new):
            found.append(_member(finding, "new", span.first))
    return found


def _member(finding: Finding, change: Literal["new", "gone"], since: int) -> Member:
    return Member(
        family=finding.settings.id,
        name=finding.name,
        slug=finding.slug,
        title=finding.title,
        change=change,
        since=since,
    )


def _has_gone(last: int, settings: Characteristic, context: Context) -> bool:
    if last > context.as_of - context.attention:
        return False
    if settings.cadence is None:
        return True
    passed = parse_calendar(settings.calendar).elapsed(last, context.as_of, context.zone)
    return passed > _GONE_AFTER * settings.cadence.microseconds


def _lateness(finding: Finding, span: Span, context: Context) -> Lateness | None:
    settings = finding.settings
    if settings.cadence is None:
        return None
    calendar, cadence = parse_calendar(settings.calendar), settings.cadence.microseconds
    passed = calendar.elapsed(span.last, context.as_of, context.zone)
    return Lateness(
        name=finding.name,
        slug=finding.slug,
        title=finding.title,
        last=span.last,
        due=calendar.moment_after(span.last, cadence, context.zone),
        late=max(passed - cadence, 0),
        cadence=cadence,
    )


def spans_of(readings: Mapping[str, Sequence[Readings]], as_of: int) -> dict[str, Span]:
    """Return when each characteristic was first and last read, up to a moment; by name."""
    known = [up_to(member, as_of) for members in readings.values() for member in members]
    return {
        one.name: Span(first=int(one.time[0]), last=int(one.time[-1]))
        for one in known
        if one.time is not None and one.time.size
    }
