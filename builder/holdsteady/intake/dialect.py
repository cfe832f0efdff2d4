"""What a file's bytes say about how it is written: text or not, delimiter, header, decimal mark."""

from __future__ import annotations

import codecs
import re
from dataclasses import dataclass
from itertools import islice

from holdsteady.intake.demand import Demand
from holdsteady.intake.lines import QUOTE, Quoting, physical_lines, split_cells
from holdsteady.intake.numbers import MarkEvidence, evidence

DELIMITERS = (",", ";", "\t", "|")
_SAMPLE = 65_536
_DEEPEST_HEADER = 1_000
_MOST_HEADER_LINES = 5
_COMPARED = 50
_FIRST_ROWS_FOR_MARK = 20
_ROWS_FOR_MARK = 200
_SIGNATURES = (
    (b"PK\x03\x04", "a spreadsheet or archive; save the sheet as CSV"),
    (b"\xd0\xcf\x11\xe0", "a spreadsheet; save the sheet as CSV"),
    (b"\x89PNG", "a picture; take it out of `files`"),
    (b"\xff\xd8\xff", "a picture; take it out of `files`"),
    (b"GIF8", "a picture; take it out of `files`"),
    (b"%PDF", "a PDF; export the data as CSV"),
    (b"\x1f\x8b", "compressed, which is not supported yet; unpack it"),
    (b"\xff\xfe", "UTF-16 text, which is not supported yet; save it as UTF-8"),
    (b"\xfe\xff", "UTF-16 text, which is not supported yet; save it as UTF-8"),
)
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


def text_trouble(data: bytes) -> str:
    """Return why the bytes are not UTF-8 text, with what to do about it, or an empty text."""
    for signature, reason in _SIGNATURES:
        if data.startswith(signature):
            return reason
    head = data[:64]
    if head.count(0) * 4 >= max(len(head), 1):
        return "not text: NUL bytes; if it is UTF-16, save it as UTF-8"
    if data.isascii():
        return ""
    try:
        data.decode("utf-8")
    except UnicodeDecodeError as error:
        line = len(re.findall(rb"\r\n|\n|\r", data[: error.start])) + 1
        return f"not UTF-8 text (byte 0x{data[error.start]:02X} in line {line}); save it as UTF-8"
    return ""


def without_cut_character(data: bytes) -> bytes:
    """Return the bytes with a character that the end of the file cuts in two replaced by U+FFFD."""
    if data[-4:].isascii():
        return data
    decoder = codecs.getincrementaldecoder("utf-8")()
    try:
        decoder.decode(data[-4:].lstrip(bytes(range(0x80, 0xC0))))
    except UnicodeDecodeError:
        return data
    pending = decoder.getstate()[0]
    return data[: len(data) - len(pending)] + "\ufffd".encode() if pending else data


def detect(data: bytes, demand: Demand) -> Layout | None:
    """Find header, delimiter and decimal mark; None where there is no line with text.

    The header is the first line that holds all columns that are wanted; failing that the line that
    holds the most of them; failing that the first line that has more than one field.
    """
    start = len(codecs.BOM_UTF8) if data.startswith(codecs.BOM_UTF8) else 0
    sample = _sample(data, start)
    lines, _ = physical_lines(sample)
    candidates = _candidates(demand)
    header = _header(lines, demand.columns, candidates)
    if header is None:
        return None
    names = header.names
    wanted = demand.columns
    position = {name: names.index(name) for name in wanted if names.count(name) == 1}
    body = lines[header.last + 1 : header.last + 1 + _ROWS_FOR_MARK]
    offset = start + len(sample[: _end_of_line(sample, header.last)].encode())
    return Layout(
        delimiter=header.delimiter,
        header_line=header.last + 1,
        offset=offset,
        names=tuple(names),
        position=position,
        missing=tuple(name for name in wanted if name not in names),
        twice=tuple(name for name in wanted if names.count(name) > 1),
        marks=_marks(body, header.delimiter, [position[name] for name in demand.numbers if name in position]),
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class _Header:
    last: int  # index of its last physical line
    delimiter: str
    names: list[str]


def _sample(data: bytes, start: int) -> str:
    piece = data[start : start + _SAMPLE]
    if len(data) - start > _SAMPLE:
        end = piece.rfind(b"\n")
        piece = piece[: end + 1] if end >= 0 else data[start:]
    return piece.decode("utf-8", "replace")


def _end_of_line(sample: str, index: int) -> int:
    """Return the place at which the line after the one of this index begins."""
    end = next(islice(_LINE_END.finditer(sample), index, None), None)
    return len(sample) if end is None else end.end()


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


def _marks(body: list[str], delimiter: str, positions: list[int]) -> MarkEvidence:
    """Look at a few rows, and at more of them while they prove nothing."""
    found = MarkEvidence()
    for rows in (body[:_FIRST_ROWS_FOR_MARK], body[_FIRST_ROWS_FOR_MARK:]):
        cells = []
        for line in rows:
            row, _ = split_cells(line, delimiter)
            cells += [row[position] for position in positions if position < len(row)]
        found += evidence(cell.strip() for cell in cells)
        if found.dot or found.comma:
            break
    return found
