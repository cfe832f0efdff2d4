"""Whether the last line of a file, having no end, is only half a line."""

from __future__ import annotations

import re
from collections.abc import Iterable

_NUMBER = re.compile(r"[+-]?[0-9]*(?:[.,]([0-9]*))?(?:[eE][+-]?[0-9]*)?")


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
