"""Each source on the data page: how its files were read, with an example, and what became of their rows."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from holdsteady.intake.readings import Example, ExampleCell, FileAccount
from holdsteady.site.moments import Clock
from holdsteady.site.numbers import counted, exact, grouped, opened

_FEW_FILES = 12  # of one source, shown without being asked for
_MOST_ODD = 20  # files of one source with something set aside, in sight
_MOST_FOLDED = 150  # other files of one source, shown when asked for
_MOST_ROWS = 600  # files of all sources; tables/files.csv has all
_MOST_LAYOUTS = 4  # of one source
_MOST_CELLS = 30  # of an example
_MOST_OTHERS = 12  # names of columns that nothing asks for
_OUTCOMES = ("rows", "used", "filtered", "repeated", "corrected")
_ALWAYS = ("rows", "used")
_DELIMITERS = {",": "comma", ";": "semicolon", "tab": "tab", "\t": "tab", "|": "bar", " ": "blank"}
_MARKS = {".": "point", ",": "comma"}


@dataclass(frozen=True, slots=True, kw_only=True)
class FileRow:
    """One file's account, written out."""

    file: str
    detected: str
    reach: str
    counts: tuple[str, ...]  # under the source's `outcomes`
    set_aside: str
    odd: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class Layout:
    """Files that were read alike, with the first usable row of one: (column, as written, read as)."""

    detected: str
    files: str
    place: str
    cells: tuple[tuple[str, str, str], ...]
    cells_more: int
    others: str  # columns that nothing asks for


@dataclass(frozen=True, slots=True, kw_only=True)
class SourceFiles:
    """The files of one source."""

    source: str
    summary: str
    detected: str  # what was detected, where it is the same for all files
    outcomes: tuple[str, ...]  # what became of rows, without what became of none
    layouts: tuple[Layout, ...]
    layouts_more: int
    files: tuple[FileRow, ...]  # in sight: all of a few, else those with something set aside
    folded: tuple[FileRow, ...]
    more: int


def sources(accounts: Sequence[FileAccount], clock: Clock) -> tuple[SourceFiles, ...]:
    """Gather the sources by name."""
    of_source: dict[str, list[FileAccount]] = defaultdict(list)
    for account in sorted(accounts, key=lambda a: (a.source, a.file)):
        of_source[account.source].append(account)
    found = []
    room = _MOST_ROWS
    for source, members in of_source.items():
        found.append(_source(source, members, clock, room))
        room -= len(found[-1].folded)
    return tuple(found)


def _source(source: str, accounts: Sequence[FileAccount], clock: Clock, room: int) -> SourceFiles:
    # Files with most set aside come first, so that a cut list never hides the ones that matter.
    ordered = sorted(accounts, key=lambda a: (-a.set_aside, a.file))
    few = len(ordered) <= _FEW_FILES
    odd = [a for a in ordered if few or a.set_aside > 0][:_MOST_ODD]
    plain = [a for a in ordered if not few and a.set_aside == 0][: max(min(_MOST_FOLDED, room), 0)]
    detected = {detected_of(a) for a in accounts}
    layouts = _layouts(accounts, clock)
    totals = _totals(accounts)
    outcomes = tuple(name for name in _OUTCOMES if name in _ALWAYS or totals[name])
    return SourceFiles(
        source=source,
        summary=_summary(accounts, totals),
        outcomes=tuple(opened(name) for name in outcomes),
        detected=detected.pop() if len(detected) == 1 else "",
        layouts=layouts[:_MOST_LAYOUTS],
        layouts_more=max(len(layouts) - _MOST_LAYOUTS, 0),
        files=tuple(_file(a, outcomes, clock) for a in (sorted(odd, key=lambda a: a.file) if few else odd)),
        folded=tuple(_file(a, outcomes, clock) for a in plain),
        more=len(ordered) - len(odd) - len(plain),
    )


def _totals(accounts: Sequence[FileAccount]) -> dict[str, int]:
    return {name: sum(getattr(a, name) for a in accounts) for name in (*_OUTCOMES, "set_aside")}


def _summary(accounts: Sequence[FileAccount], totals: Mapping[str, int]) -> str:
    outcomes = ", ".join(
        f"{grouped(str(total))} {name.replace('_', ' ')}"
        for name, total in totals.items()
        if name != "rows" and (total or name in {"used", "set_aside"})
    )
    return f"{counted(len(accounts), 'file')}, {counted(totals['rows'], 'row')}: {outcomes}"


def detected_of(account: FileAccount) -> str:
    """Return how a file was read: 'utf-8 · semicolon · decimal comma · %d.%m.%Y'."""
    delimiter = _DELIMITERS.get(account.delimiter, account.delimiter)
    mark = f"decimal {_MARKS.get(account.decimal, account.decimal)}" if account.decimal else ""
    parts = (account.encoding, delimiter, mark, account.time_format)
    return " · ".join(part for part in parts if part) or "nothing read"


def _layouts(accounts: Sequence[FileAccount], clock: Clock) -> tuple[Layout, ...]:
    """Return the ways in which files were read, the commonest first, each with an example."""
    alike: dict[tuple[str, tuple[str, ...], int], list[FileAccount]] = defaultdict(list)
    for account in accounts:
        if account.example is not None:
            alike[detected_of(account), account.header, account.columns].append(account)
    ranked = sorted(alike.values(), key=lambda members: (-len(members), members[0].file))
    return tuple(_layout(members, members[0].example, clock) for members in ranked if members[0].example)


def _layout(accounts: Sequence[FileAccount], example: Example, clock: Clock) -> Layout:
    first = accounts[0]
    asked = {cell.column for cell in example.cells}
    others = [name for name in first.header if name not in asked and name]
    beyond = first.columns - len(asked) - len(others[:_MOST_OTHERS])
    named = ", ".join(others[:_MOST_OTHERS])
    return Layout(
        detected=detected_of(first),
        files=counted(len(accounts), "file"),
        place=f"{first.file}:{example.line}",
        cells=tuple((cell.column, cell.text, _read_as(cell, clock)) for cell in example.cells[:_MOST_CELLS]),
        cells_more=max(len(example.cells) - _MOST_CELLS, 0),
        others=f"{named} and {counted(beyond, 'more column')}" if named and beyond > 0 else named,
    )


def _read_as(cell: ExampleCell, clock: Clock) -> str:
    if cell.role == "time":
        return "no time" if cell.time is None else clock.to_the_second(cell.time)
    if cell.role == "label":
        return "text"
    if cell.number is None:
        text = cell.text.strip()
        return "empty" if not text else "a limit, no value" if text[0] in "<>≤≥" else "no number"
    return exact(cell.number)


def _file(account: FileAccount, outcomes: Sequence[str], clock: Clock) -> FileRow:
    reach = ""
    if account.first_time is not None and account.last_time is not None:
        first, last = clock.short(account.first_time), clock.short(account.last_time)
        reach = first if first == last else f"{first} to {last}"
    return FileRow(
        file=account.file,
        detected=detected_of(account),
        reach=reach,
        counts=tuple(grouped(str(getattr(account, name))) for name in outcomes),
        set_aside=grouped(str(account.set_aside)),
        odd=account.set_aside > 0,
    )
