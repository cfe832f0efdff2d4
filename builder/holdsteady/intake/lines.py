"""Physical lines and the cells in them, as CSV quotes them."""

from __future__ import annotations

from enum import Enum

QUOTE = '"'


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
    while True:
        end = line.find(QUOTE, start)
        if end < 0 or not line.startswith(QUOTE, end + 1):
            return end
        start = end + 2
