"""What lies in a folder: its tables, and which files are written alike."""

from __future__ import annotations

import re
from collections import Counter
from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass, field
from pathlib import Path, PurePosixPath

from holdsteady.intake.lines import physical_lines
from holdsteady.intake.scan import ENDINGS, Found, Scanner
from holdsteady.project.settings import Settings, Site
from holdsteady.start.header import Header, find_header
from holdsteady.start.rows import head_of

Progress = Callable[[str, int, int], None]

_HEAD = 65_536
_LARGER_HEAD = 4_000_000  # where lines are so long that the head holds hardly any
_FEW_LINES = 50
_ALIKE = 0.5  # of the columns of two files of one series
WILD = "\0"  # stands for a part of a name that differs from file to file
_MONTH = (
    "(?:jan(?:uary)?|feb(?:ruary)?|mar(?:ch)?|apr(?:il)?|may|june?|july?|aug(?:ust)?|sept?(?:ember)?"
    "|oct(?:ober)?|nov(?:ember)?|dec(?:ember)?)"
)
_CLOCK = r"[-T_.\ ]*[0-9]{2}[-:_.h]?[0-9]{2}(?:[-:_.m]?[0-9]{2})?"
_DATED = re.compile(
    r"""
    (?<![0-9])(?:
        (?:19|20)[0-9]{2}[-_.\ ]?(?:W|KW|wk)\ ?[0-9]{1,2}  # a week
      | (?:19|20)[0-9]{2}[-_.\ ]?[0-9]{2}(?:[-_.\ ]?[0-9]{2}(?:CLOCK)?)?  # a month, a day, a moment
      | [0-9]{1,2}[-_.][0-9]{1,2}[-_.](?:19|20)?[0-9]{2}
      | (?:19|20)[0-9]{2}(?:[-_.\ ]?Q[1-4])?
    )(?![0-9])
    | (?<![a-z])MONTH(?![a-z])
    """.replace("MONTH", _MONTH).replace("CLOCK", _CLOCK),
    re.VERBOSE | re.IGNORECASE,
)


@dataclass(frozen=True, slots=True, kw_only=True)
class Series:
    """Files of one kind of name in one folder, with the same columns, in the order of their paths.

    `folder` and `stem` are what their paths have in common, with `WILD` for dates. `names` are all
    columns that any of them has, those of the commonest header first.
    """

    folder: str
    stem: str
    ending: str
    names: tuple[str, ...]
    files: tuple[tuple[Found, Header], ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Survey:
    """A folder as it was found.

    `left` are files without a table that could be used, with the reason; `others` are all their names
    and those of tables, for telling what a glob would match.
    """

    folder: Path
    site: Site
    series: tuple[Series, ...]
    left: tuple[tuple[str, str], ...]
    scanner: Scanner = field(compare=False)


def look_through(folder: Path, site: Site, progress: Progress | None = None) -> Survey:
    """Look at the beginning of every file below a folder, and group those that are written alike."""
    scanner = Scanner(folder, Settings(site=site))
    globs = [f"**/*{ending}{packed}" for ending in ENDINGS for packed in ("", ".gz")]
    found = scanner.files(tuple(globs))
    tables: list[tuple[Found, Header]] = []
    left: list[tuple[str, str]] = []
    for done, one in enumerate(found):
        header, why = _header_of(one)
        if header is None:
            left.append((one.name, why))
        else:
            tables.append((one, header))
        if progress is not None:
            progress("Looking at files", done + 1, len(found))
    left += [(line.file, line.reason) for line in scanner.closed_folders()]
    return Survey(
        folder=folder, site=site, series=tuple(_series(tables)), left=tuple(sorted(left)), scanner=scanner
    )


def _header_of(found: Found) -> tuple[Header | None, str]:
    if found.trouble:
        return None, found.trouble
    try:
        head, complete = head_of(found.path, _HEAD)
        if not complete and head.text.count(b"\n") < _FEW_LINES:
            head, _ = head_of(found.path, _LARGER_HEAD)
    except (OSError, EOFError) as error:
        return None, f"cannot be read: {getattr(error, 'strerror', None) or error}"
    if head.trouble or not head.text.strip():
        return None, head.trouble or "empty"
    lines, _ = physical_lines(head.text.decode("utf-8", "replace").removeprefix("\ufeff"))
    header = find_header(lines)
    if header is None or not header.usable:
        return None, "no table with a header and numbers below it"
    return header, ""


def _series(tables: Iterable[tuple[Found, Header]]) -> list[Series]:
    by_name: dict[tuple[str, str, str], list[tuple[Found, Header]]] = {}
    for one, header in tables:
        by_name.setdefault(kind_of_name(one.name), []).append((one, header))
    return [
        Series(folder=key[0], stem=key[1], ending=key[2], names=_columns(group), files=tuple(group))
        for key, files in sorted(by_name.items())
        for group in _by_columns(files)
    ]


def kind_of_name(name: str) -> tuple[str, str, str]:
    """Split a path into folder, stem and ending, with `WILD` for what looks like a date in the first two."""
    path = PurePosixPath(name)
    stem, ending = path.name, ""
    for _ in range(2 if path.suffix.lower() == ".gz" else 1):
        suffix = PurePosixPath(stem).suffix
        stem, ending = stem[: len(stem) - len(suffix)], suffix.lower() + ending
    folder = "" if str(path.parent) == "." else str(path.parent)
    return _DATED.sub(WILD, folder), _DATED.sub(WILD, stem), ending


def _by_columns(files: Sequence[tuple[Found, Header]]) -> list[list[tuple[Found, Header]]]:
    """Group files by their columns; a file that lacks some, or has more, stays with the others."""
    shapes = Counter(frozenset(header.usable) for _, header in files).most_common()
    leaders: list[frozenset[str]] = []
    leader_of: dict[frozenset[str], int] = {}
    for shape, _ in shapes:
        near = [i for i, one in enumerate(leaders) if len(one & shape) > _ALIKE * len(one | shape)]
        if not near:
            leaders.append(shape)
        leader_of[shape] = near[0] if near else len(leaders) - 1
    groups: list[list[tuple[Found, Header]]] = [[] for _ in leaders]
    for one in files:
        groups[leader_of[frozenset(one[1].usable)]].append(one)
    return groups


def _columns(files: Sequence[tuple[Found, Header]]) -> tuple[str, ...]:
    headers = Counter(header.usable for _, header in files).most_common()
    return tuple(dict.fromkeys(name for names, _ in headers for name in names))
