"""What the end of a file shows: a line that is only half a line, or totals."""

from __future__ import annotations

import re
from collections.abc import Iterable, Sequence

_NUMBER = re.compile(r"[+-]?[0-9]*(?:[.,]([0-9]*))?(?:[eE][+-]?[0-9]*)?")

_TOTALS = frozenset(
    (
        *("total", "totals", "sum", "mean", "average", "avg", "min", "minimum", "max", "maximum", "median"),
        *("std", "stdev", "summe", "gesamt", "mittelwert", "somme", "moyenne", "suma", "soma", "média"),
    )
)


def is_total(cells: Sequence[str]) -> bool:
    """Whether a row's first filled cell is a word for totals: `Total`, `Mean:`."""
    first = next((cell.strip() for cell in cells if cell.strip()), "")
    return first.rstrip(":").rstrip().casefold() in _TOTALS


def is_cut(last: str, others: Iterable[str], *, timed: bool) -> bool:
    """Whether a last line's last cell is shorter than that of every other row.

    Numbers are compared by their decimals, an empty cell being shorter than any; times by their length.
    A file of one row shows nothing.
    """
    measure = len if timed else decimals
    own = measure(last.strip())
    if own is None:
        return False
    compared = False
    for other in others:
        theirs = measure(other.strip())
        if theirs is None:
            continue
        if theirs <= own:
            return False
        compared = True
    return compared


def decimals(text: str) -> int | None:
    """Return how many decimals a number is written with, -1 for an empty cell, None for other text."""
    if not text:
        return -1
    match = _NUMBER.fullmatch(text)
    return None if match is None else len(match[1] or "")
