"""What a file's text says about how it is written: delimiter, header, decimal mark."""

from __future__ import annotations

import codecs
import re
from dataclasses import dataclass
from itertools import islice

from holdsteady.intake.demand import Demand
from holdsteady.intake.lines import QUOTE, Quoting, physical_lines, split_cells
from holdsteady.intake.numbers import MarkEvidence, evidence
from holdsteady.intake.scale import scale_of

DELIMITERS = (",", ";", "\t", "|")
_SAMPLE = 65_536
_LARGER = 16  # times, while the header is not in it
_LARGEST_SAMPLE = 1 << 26
_DEEPEST_HEADER = 1_000
_MOST_HEADER_LINES = 5
_COMPARED = 50
_FIRST_ROWS_FOR_MARK = 20
_ROWS_FOR_MARK = 200
_LINE_END = re.compile(r"\r\n|\n|\r")


@dataclass(frozen=True, slots=True, kw_only=True)
class Layout:
    """How a file is laid out.

    `header_line` is the last physical line of the header, from 1; `offset` the byte at which the line
    after it begins; `position` where each wanted column stands; `missing` and `twice` the wanted columns
    that are not there once. `marks` is what a sample of cells says about the decimal mark.
    """

    delimiter: str
    header_line: int
    offset: int
    names: tuple[str, ...]
    position: dict[str, int]
    missing: tuple[str, ...]
    twice: tuple[str, ...]
    marks: MarkEvidence

    @property
    def width(self) -> int:
        """Fields a row must have: nameless columns at the end are no columns."""
        return max((index + 1 for index, name in enumerate(self.names) if name), default=len(self.names))

    def fault(self, column: str) -> str:
        """Return why a wanted column cannot be used, or an empty text."""
        if column in self.missing:
            return f"no column '{column}'"
        return f"column '{column}' stands twice" if column in self.twice else ""


def detect(data: bytes, demand: Demand) -> Layout | None:
    """Find header, delimiter and decimal mark; None where there is no line with text.

    The header is the first line that holds all columns that are wanted; failing that the line that
    holds the most of them; failing that the first line that has more than one field.
    """
    start = len(codecs.BOM_UTF8) if data.startswith(codecs.BOM_UTF8) else 0
    wanted = demand.columns
    size = _SAMPLE
    while True:
        sample = _sample(data, start, size)
        lines, _ = physical_lines(sample)
        header = _header(lines, wanted, _candidates(demand))
        complete = header is not None and set(wanted) <= set(header.names)
        if complete or len(lines) >= _DEEPEST_HEADER or size >= min(len(data), _LARGEST_SAMPLE):
            break
        size *= _LARGER
    if header is None:
        return None
    names = header.names
    position = {name: names.index(name) for name in wanted if names.count(name) == 1}
    body = lines[header.last + 1 : header.last + 1 + _ROWS_FOR_MARK]
    offset = _at_line(data, start + len(sample[: _end_of_line(sample, header.last)].encode()))
    return Layout(
        delimiter=header.delimiter,
        header_line=header.last + 1,
        offset=offset,
        names=tuple(names),
        position=position,
        missing=tuple(name for name in wanted if name not in names),
        twice=tuple(name for name in wanted if names.count(name) > 1),
        marks=_marks(body, header.delimiter, position, demand),
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class _Header:
    last: int  # index of its last physical line
    delimiter: str
    names: list[str]


def _sample(data: bytes, start: int, size: int) -> str:
    """Return the first lines of a text, whole ones where the first line is not longer than the sample."""
    piece = data[start : start + size]
    if len(data) - start > size:
        end = max(piece.rfind(b"\n"), piece.rfind(b"\r", 0, -1))
        piece = piece[: end + 1] if end >= 0 else piece
    return piece.decode("utf-8", "replace")


def _end_of_line(sample: str, index: int) -> int:
    """Return the place at which the line after the one of this index begins."""
    end = next(islice(_LINE_END.finditer(sample), index, None), None)
    return len(sample) if end is None else end.end()


def _at_line(data: bytes, offset: int) -> int:
    """Return where the next line begins, for a header that is longer than any sample."""
    if data[offset - 1 : offset] in (b"\n", b"\r", b""):
        return offset
    ends = [end for end in (data.find(b"\n", offset), data.find(b"\r", offset)) if end >= 0]
    end = min(ends, default=len(data))
    return min(end + (2 if data[end : end + 2] == b"\r\n" else 1), len(data))


def _candidates(demand: Demand) -> tuple[str, ...]:
    given = demand.source.delimiter
    if given is None:
        return DELIMITERS
    return ("\t",) if given in ("tab", "\\t") else (given,)


def _header(lines: list[str], wanted: tuple[str, ...], candidates: tuple[str, ...]) -> _Header | None:
    best: list[_Header] = []
    best_score = 0
    for index, line in enumerate(lines[:_DEEPEST_HEADER]):
        if not any(name.partition(QUOTE)[0] in line for name in wanted):
            continue
        for delimiter in candidates:
            header = _header_at(lines, index, delimiter)
            score = len(set(wanted) & set(header.names))
            if score > best_score:
                best, best_score = [header], score
            elif score == best_score and score and best[0].last == header.last:
                best.append(header)
        if best_score == len(wanted):
            break
    if len(best) == 1:
        return best[0]
    if best:
        return max(best, key=lambda one: (_alike(lines, one), len(one.names)))
    return _header_without_names(lines, candidates)


def _header_at(lines: list[str], index: int, delimiter: str) -> _Header:
    text = lines[index]
    cells, quoting = split_cells(text, delimiter)
    last = index
    for following in range(index + 1, min(index + _MOST_HEADER_LINES, len(lines))):
        if quoting is not Quoting.OPEN:
            break
        text = f"{text}\n{lines[following]}"
        cells, quoting = split_cells(text, delimiter)
        last = following
    if quoting is not Quoting.FINE:
        cells, last = lines[index].split(delimiter), index
    return _Header(last=last, delimiter=delimiter, names=[cell.strip() for cell in cells])


def _header_without_names(lines: list[str], candidates: tuple[str, ...]) -> _Header | None:
    filled = [index for index, line in enumerate(lines) if line.strip()]
    if not filled:
        return None
    guesses = []
    for delimiter in candidates:
        for index in filled[:_COMPARED]:
            header = _header_at(lines, index, delimiter)
            if len(header.names) > 1:
                guesses.append(header)
                break
    if not guesses:
        return _header_at(lines, filled[0], candidates[0])
    return max(guesses, key=lambda one: (_alike(lines, one), len(one.names)))


def _alike(lines: list[str], header: _Header) -> int:
    """Count the lines below the header that have as many fields as it has."""
    below = lines[header.last + 1 : header.last + 1 + _COMPARED]
    return sum(len(split_cells(line, header.delimiter)[0]) == len(header.names) for line in below)


def _marks(body: list[str], delimiter: str, position: dict[str, int], demand: Demand) -> MarkEvidence:
    """Look at a few rows, and at more of them while they prove nothing."""
    found = MarkEvidence()
    places = [(position[one], scale_of(one, demand)) for one in demand.numbers if one in position]
    for lines in (body[:_FIRST_ROWS_FOR_MARK], body[_FIRST_ROWS_FOR_MARK:]):
        rows = [split_cells(line, delimiter)[0] for line in lines]
        for place, scale in places:
            found += evidence((row[place].strip() for row in rows if place < len(row)), scale)
        if found.dot or found.comma:
            break
    return found
