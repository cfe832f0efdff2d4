"""Where a table begins in a file that no settings describe yet: delimiter and header."""

from __future__ import annotations

import re
from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass

from holdsteady.intake.dialect import DELIMITERS
from holdsteady.intake.lines import Quoting, split_cells

_LOOKED_AT = 200  # lines
_BELOW = 30  # rows that a header is compared with
_COMPARED = 200  # columns
_DATA = re.compile(
    r"""
    [<>≤≥]?=?\s*[+-]?[0-9][0-9.,'’ \u00a0\u202f]*(?:[eE][+-]?[0-9]+)?   # a number
    | [+-]?[.,][0-9]+
    | [0-9]{1,2}:[0-9]{2}(?::[0-9]{2}.*)?                                # a time of day
    | [0-9]{1,4}[-/.][0-9]{1,2}[-/.][0-9]{1,4}(?:[T ,].*)?               # a date
    """,
    re.VERBOSE,
)


@dataclass(frozen=True, slots=True, kw_only=True)
class Header:
    """A header as it stands in a file: `line` counts from 1, `names` are trimmed and may be empty."""

    line: int
    delimiter: str
    names: tuple[str, ...]

    @property
    def usable(self) -> tuple[str, ...]:
        """The names that stand once, in their order."""
        counts = Counter(self.names)
        return tuple(name for name in self.names if name and counts[name] == 1)


def find_header(lines: Sequence[str]) -> Header | None:
    """Return the header of the table in a file's first lines; None where there is no table with one.

    The delimiter is the one that cuts the most lines into the same number of fields, more than one
    where any does. The header is, among the lines of that width with the most filled fields, the first
    that has words where the lines below it have numbers or times.
    """
    lines = lines[:_LOOKED_AT]
    found = [one for delimiter in DELIMITERS if (one := _with(lines, delimiter)) is not None]
    if not found:
        return None
    return max(found, key=lambda one: (one[1] > 1, one[0]))[2]


def is_data(text: str) -> bool:
    """Whether a cell looks like a number, a time of day or a date."""
    return _DATA.fullmatch(text.strip()) is not None


def _with(lines: Sequence[str], delimiter: str) -> tuple[tuple[int, int], int, Header] | None:
    """Return how well a delimiter fits, the width it gives, and the header it finds."""
    rows = [_cells(line, delimiter) for line in lines]
    widths = Counter(len(row) for row in rows if any(row))
    if not widths:
        return None
    width = max(widths, key=lambda one: (one > 1, widths[one] * one, one))
    places = [index for index, row in enumerate(rows) if len(row) == width and any(row)]
    best: tuple[int, int] = (0, 0)
    at = -1
    for order, index in enumerate(places):
        below = [rows[place] for place in places[order + 1 : order + 1 + _BELOW]]
        contrast = _contrast(rows[index], below)
        score = (sum(map(bool, rows[index])), contrast)
        if contrast and score[0] > best[0]:
            best, at = score, index
        if at >= 0 and order - places.index(at) > _BELOW:
            break
    if at < 0:
        return None
    header = Header(line=at + 1, delimiter=delimiter, names=tuple(rows[at]))
    return (widths[width] * best[1], width), width, header


def _cells(line: str, delimiter: str) -> list[str]:
    cells, quoting = split_cells(line, delimiter)
    if quoting is not Quoting.FINE:
        cells = line.split(delimiter)
    return [cell.strip() for cell in cells]


def _contrast(row: Sequence[str], below: Sequence[Sequence[str]]) -> int:
    """Count the columns that hold words here and mostly numbers or times below."""
    found = 0
    for column, cell in enumerate(row[:_COMPARED]):
        if not cell or is_data(cell):
            continue
        filled = [other[column] for other in below if other[column]]
        if filled and sum(map(is_data, filled)) * 2 > len(filled):
            found += 1
    return found
