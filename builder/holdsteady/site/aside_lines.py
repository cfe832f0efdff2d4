"""What could not be used, by reason, with the lines' text: a few of each, so that no reason hides another."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Sequence
from dataclasses import dataclass

from holdsteady.intake.readings import SetAside
from holdsteady.site.numbers import counted, grouped

_MOST_REASONS = 40
_IN_SIGHT = 5  # lines of a reason
_FOLDED = 45  # further lines of a reason, shown when asked for
_MOST_FOLDED = 400  # of all reasons; tables/set-aside.csv has all
_LONGEST = 160  # characters of a line's text
_HINTS = {
    "censored": 'Beyond what the gauge can read. With `censored = "at-limit"` they are drawn there, marked.',
    "not plausible": "Outside the bounds that `plausible` of their characteristic names.",
    "not a number": "Where it stands for a missing value, name it under `missing` of its source.",
}


@dataclass(frozen=True, slots=True, kw_only=True)
class AsideRow:
    """A row, cell or file that could not be used."""

    place: str
    column: str
    text: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Reason:
    """All that could not be used for one reason."""

    reason: str
    count: str
    where: str
    hint: str  # what the settings have to do with it, "" for nothing
    rows: tuple[AsideRow, ...]
    folded: tuple[AsideRow, ...]
    more: str  # how many more there are, "" for none


def reasons(set_aside: Sequence[SetAside]) -> tuple[tuple[Reason, ...], int]:
    """Gather what was set aside by reason, and how many reasons are not shown."""
    ranked = by_reason(set_aside)
    found: list[Reason] = []
    room = _MOST_FOLDED
    for reason, items in ranked[:_MOST_REASONS]:
        found.append(_reason(reason, items, room))
        room -= len(found[-1].folded)
    return tuple(found), max(len(ranked) - _MOST_REASONS, 0)


def by_reason(set_aside: Sequence[SetAside]) -> list[tuple[str, list[SetAside]]]:
    """Return what was set aside by reason: whole files first, then by how many."""
    alike: dict[str, list[SetAside]] = defaultdict(list)
    for item in set_aside:
        alike[item.reason].append(item)

    def rank(one: tuple[str, list[SetAside]]) -> tuple[bool, int, str]:
        return (one[1][0].line is not None or bool(one[1][0].column), -len(one[1]), one[0])

    return sorted(alike.items(), key=rank)


def _reason(reason: str, items: Sequence[SetAside], room: int) -> Reason:
    files = len({item.file for item in items})
    shown = _of_many_files(items, _IN_SIGHT)
    rest = [item for item in items if item not in shown][: max(min(_FOLDED, room), 0)]
    more = len(items) - len(shown) - len(rest)
    return Reason(
        reason=reason,
        count=grouped(str(len(items))),
        where=f"in {counted(files, 'file')}",
        hint=_HINTS.get(reason, ""),
        rows=tuple(map(_row, shown)),
        folded=tuple(map(_row, rest)),
        more=grouped(str(more)) if more else "",
    )


def _of_many_files(items: Sequence[SetAside], most: int) -> list[SetAside]:
    """Return some of the items in their order, of as many files as possible."""
    first_of_file = {item.file: item for item in reversed(items)}
    chosen = {id(item) for item in list(first_of_file.values())[::-1][:most]}
    for item in items:
        if len(chosen) >= most:
            break
        chosen.add(id(item))
    return [item for item in items if id(item) in chosen]


def _row(item: SetAside) -> AsideRow:
    text = item.text if len(item.text) <= _LONGEST else item.text[:_LONGEST] + "…"
    place = item.file if item.line is None else f"{item.file}:{item.line}"
    return AsideRow(place=place, column=item.column, text=text)
