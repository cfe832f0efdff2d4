"""Physical lines and the cells in them, as CSV quotes them."""

from __future__ import annotations

import re
from collections.abc import Iterator, Sequence
from enum import Enum

import numpy as np

QUOTE = '"'
_TO_CLOSING_QUOTE = re.compile(r'(?:[^"]++|"")*+"')


class Quoting(Enum):
    """What is wrong with the quotes of a line."""

    FINE = ""
    OPEN = "a quote is opened and not closed"
    STRAY = "text follows a closing quote"


def physical_lines(text: str) -> tuple[list[str], bool]:
    """Split at LF, CR LF and lone CR, also inside quotes.

    Returns the lines without their ends, and whether the last line has an end.
    """
    lines = text.replace("\r\n", "\n").replace("\r", "\n").split("\n")
    if lines[-1] == "":
        return lines[:-1], True
    return lines, False


def split_cells(line: str, delimiter: str) -> tuple[list[str], Quoting]:
    """Split one record into its cells, untrimmed.

    A quote counts where it opens a cell (blanks may stand before it) and is doubled inside; elsewhere
    it is a character like any other.
    """
    if QUOTE not in line:
        return line.split(delimiter), Quoting.FINE
    found: list[str] = []
    at = 0
    while True:
        opening = at
        while line.startswith(" ", opening):
            opening += 1
        if line.startswith(QUOTE, opening):
            end = _closing(line, opening + 1)
            if end < 0:
                return found, Quoting.OPEN
            found.append(line[opening + 1 : end].replace(QUOTE * 2, QUOTE))
            at = end + 1
            while line.startswith(" ", at):
                at += 1
            if at < len(line) and not line.startswith(delimiter, at):
                return found, Quoting.STRAY
        else:
            end = line.find(delimiter, at)
            end = len(line) if end < 0 else end
            found.append(line[at:end])
            at = end
        if at >= len(line):
            return found, Quoting.FINE
        at += 1


def _closing(line: str, start: int) -> int:
    closed = _TO_CLOSING_QUOTE.match(line, start)
    return -1 if closed is None else closed.end() - 1


def line_pieces(data: bytes, size: int) -> Iterator[tuple[bytes, bool]]:
    """Yield UTF-8 text in pieces of whole lines, about `size` bytes each, and whether it is the last one.

    The ends of lines are all turned into LF.
    """
    start = 0
    while start < len(data):
        stop = _after_line(data, start + size)
        piece = data[start:stop]
        start = stop
        if b"\r" in piece:
            piece = piece.replace(b"\r\n", b"\n").replace(b"\r", b"\n")
        yield piece, start >= len(data)


def _after_line(data: bytes, start: int) -> int:
    """Return where the line that holds this byte ends, its end included."""
    start = max(start - 1, 0)  # the piece may end just here
    newline, stop = data.find(b"\n", start), len(data)
    stop = stop if newline < 0 else newline + 1
    alone = data.find(b"\r", start, stop)
    if alone < 0 or alone + 2 == stop == newline + 1:
        return stop
    return alone + 1


def texts_of_lines(data: bytes, wanted: Sequence[int]) -> list[str]:
    """Return the texts of some lines, counted from 1, of UTF-8 text whose lines end in LF or CR LF."""
    ends = np.flatnonzero(np.frombuffer(data, dtype=np.uint8) == ord("\n"))
    starts = np.concatenate(([0], ends + 1))
    stops = np.concatenate((ends, [len(data)]))
    places = [line - 1 for line in wanted]
    return [
        data[starts[place] : stops[place]].removesuffix(b"\r").decode("utf-8", "replace")
        if place < starts.size
        else ""
        for place in places
    ]
