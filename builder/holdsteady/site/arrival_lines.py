"""What has come in late, newly, or no longer, as rows of the data page."""

from __future__ import annotations

from dataclasses import dataclass

from holdsteady.monitor.arrivals import Arrivals, Lateness
from holdsteady.site.moments import Clock, duration
from holdsteady.site.numbers import counted, grouped

_MOST_LATE = 60  # in sight
_MOST_ON_TIME = 200  # shown when asked for
_MOST_MEMBERS = 60


@dataclass(frozen=True, slots=True, kw_only=True)
class LateRow:
    """When the next reading of a characteristic is due."""

    title: str
    href: str
    cadence: str
    last: str
    due: str
    late: str  # "" while it is not


@dataclass(frozen=True, slots=True, kw_only=True)
class MemberRow:
    """A member of `each` that is new or has gone."""

    title: str
    href: str
    said: str


@dataclass(frozen=True, slots=True, kw_only=True)
class ArrivalLines:
    """What the data page says of arrivals; sentences are "" where there is nothing to say."""

    sentence: str
    late: tuple[LateRow, ...]
    late_more: int
    on_time: tuple[LateRow, ...]
    on_time_more: int
    members: tuple[MemberRow, ...]
    members_more: int


def arrival_lines(arrivals: Arrivals, clock: Clock) -> ArrivalLines:
    """Write out what has come and what has not."""
    late = arrivals.late
    on_time = sorted((one for one in arrivals.lateness if not one.late), key=lambda one: (one.due, one.name))
    gone_first = sorted(arrivals.members, key=lambda one: one.change)
    return ArrivalLines(
        sentence=_sentence(len(late), len(arrivals.lateness)),
        late=tuple(_late(one, clock) for one in late[:_MOST_LATE]),
        late_more=max(len(late) - _MOST_LATE, 0),
        on_time=tuple(_late(one, clock) for one in on_time[:_MOST_ON_TIME]),
        on_time_more=max(len(on_time) - _MOST_ON_TIME, 0),
        members=tuple(
            MemberRow(
                title=one.title,
                href=f"characteristic/{one.slug}.html",
                said=f"new: its first reading came {clock.on(one.since)}"
                if one.change == "new"
                else f"gone: no reading since {clock.said(one.since)}, while others of its kind still come",
            )
            for one in gone_first[:_MOST_MEMBERS]
        ),
        members_more=max(len(arrivals.members) - _MOST_MEMBERS, 0),
    )


def _sentence(late: int, with_cadence: int) -> str:
    if not with_cadence:
        return ""
    if not late:
        said = "The one characteristic" if with_cadence == 1 else f"All {grouped(str(with_cadence))}"
        return f"{said} with a cadence {'is' if with_cadence == 1 else 'are'} on time."
    return (
        f"{grouped(str(late))} of {counted(with_cadence, 'characteristic')} with a cadence "
        f"{'is' if late == 1 else 'are'} late, counted in the hours of their calendars."
    )


def _late(one: Lateness, clock: Clock) -> LateRow:
    return LateRow(
        title=one.title,
        href=f"characteristic/{one.slug}.html",
        cadence=f"every {duration(one.cadence)}",
        last=clock.short(one.last),
        due=clock.short(one.due),
        late=duration(one.late) if one.late else "",
    )
