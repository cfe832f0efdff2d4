"""The accounting of a check on one screen: what was read, what could not be used, what has not come."""

from __future__ import annotations

from collections import Counter, defaultdict
from collections.abc import Iterator, Sequence

from holdsteady.intake.readings import FileAccount, SetAside
from holdsteady.monitor.arrivals import Arrivals
from holdsteady.report import Report
from holdsteady.site.aside_lines import by_reason
from holdsteady.site.moments import Clock, duration
from holdsteady.site.source_lines import detected_of

_FEW_FILES = 12  # all of them are listed
_FILES = 5  # of those with something set aside
_REASONS = 8
_LATE = 6
_MEMBERS = 6
_UNMATCHED = 6
_LONGEST = 60  # characters of a line's text
_OUTCOMES = ("rows", "used", "filtered", "repeated", "corrected", "set aside")


def accounting(report: Report) -> list[str]:
    """Return the account of a check, line by line; what is left out says where all of it is."""
    clock = Clock(zone=report.zone, now=report.as_of)
    return [
        *_sources(report.files),
        *_set_aside(report.set_aside),
        *_late(report.arrivals, clock),
        *_members(report.arrivals, clock),
        *_unmatched(report),
        "",
    ]


def _sources(files: Sequence[FileAccount]) -> Iterator[str]:
    of_source: dict[str, list[FileAccount]] = defaultdict(list)
    for account in files:
        of_source[account.source].append(account)
    few = len(files) <= _FEW_FILES
    odd = sorted((f for f in files if f.set_aside), key=lambda f: (-f.set_aside, f.file))
    listed = {id(f) for f in (files if few else odd[:_FILES])}
    names = [*of_source, *(f"  {f.file}" for f in files if id(f) in listed)]
    width = max(len("source"), *(len(name) for name in names))
    yield f"{'source':<{width}} {'files':>7} " + " ".join(f"{word:>10}" for word in _OUTCOMES) + "  read as"
    for source, members in of_source.items():
        ways = Counter(detected_of(f) for f in members)
        read_as = ways.most_common(1)[0][0] if len(ways) == 1 else f"{len(ways)} ways, see the data page"
        yield f"{source:<{width}} {len(members):>7,} {_numbers(members)}  {read_as}"
        for account in members:
            if id(account) in listed:
                yield f"{'  ' + account.file:<{width}} {'':>7} {_numbers([account])}".rstrip()
    if not few and len(odd) > _FILES:
        yield f"and {len(odd) - _FILES:,} more with something set aside, all of them on the data page"


def _numbers(files: Sequence[FileAccount]) -> str:
    totals = (sum(getattr(f, word.replace(" ", "_")) for f in files) for word in _OUTCOMES)
    return " ".join(f"{total:>10,}" for total in totals)


def _set_aside(set_aside: Sequence[SetAside]) -> Iterator[str]:
    if not set_aside:
        return
    yield ""
    yield "Set aside, by reason, each with its first line:"
    found = by_reason(set_aside)
    for reason, items in found[:_REASONS]:
        yield f"{len(items):>8,}  {reason}"
        item = items[0]
        place = item.file if item.line is None else f"{item.file}:{item.line}"
        column = f" {item.column}" if item.column else ""
        text = item.text if len(item.text) <= _LONGEST else item.text[:_LONGEST] + "…"
        yield f"{'':>10}{place}{column}{': ' + text if text else ''}"
    if len(found) > _REASONS:
        yield f"{'':>8}  and {len(found) - _REASONS:,} more, all of them on the data page"


def _late(arrivals: Arrivals, clock: Clock) -> Iterator[str]:
    late = arrivals.late
    if not arrivals.lateness:
        return
    yield ""
    if not late:
        yield f"On time: all {len(arrivals.lateness):,} with a cadence."
        return
    yield f"Late: {len(late):,} of {len(arrivals.lateness):,} with a cadence."
    for one in late[:_LATE]:
        due, last = clock.full(one.due), clock.full(one.last)
        yield f"  {one.name}: {duration(one.late)} late, due {due}, last read {last}"
    yield from _more(len(late) - _LATE)


def _members(arrivals: Arrivals, clock: Clock) -> Iterator[str]:
    for change, said in (("new", "New: first read"), ("gone", "Gone: not read since")):
        members = [one for one in arrivals.members if one.change == change]
        if members:
            yield ""
            yield said
            for one in members[:_MEMBERS]:
                yield f"  {one.name}: {clock.full(one.since)}"
            yield from _more(len(members) - _MEMBERS)


def _unmatched(report: Report) -> Iterator[str]:
    if not report.unmatched:
        return
    yield ""
    yield "Lines of logbook.csv that match no characteristic, gauge or case:"
    for entry in report.unmatched[:_UNMATCHED]:
        named = " ".join(part for part in (entry.characteristic, entry.case, entry.gauge) if part)
        yield f"  line {entry.line}, about {named or 'nothing'}: {entry.text[:_LONGEST]}"
    yield from _more(len(report.unmatched) - _UNMATCHED)


def _more(count: int) -> Iterator[str]:
    if count > 0:
        yield f"  and {count:,} more"
