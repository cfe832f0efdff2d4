"""Cells to numbers, and which decimal mark a file uses.

A number is ASCII digits with an optional sign, exponent and the decimal mark; thousands marks only in
groups of three. Nothing else is one: no unit, no `inf`, no `NaN`, nothing beyond the range of a double.
"""

from __future__ import annotations

import re
from collections import Counter
from collections.abc import Iterable
from dataclasses import dataclass, fields
from enum import IntEnum
from typing import Literal

import numpy as np
import numpy.typing as npt
import pyarrow as pa
import pyarrow.compute as pc

from holdsteady.arrays import Floats
from holdsteady.intake.columns import flags, floats, strings

States = npt.NDArray[np.uint8]
Mark = Literal[".", ","]


class State(IntEnum):
    """What a cell is to the characteristic that asks for it."""

    NUMBER = 0
    EMPTY = 1
    NOT_A_NUMBER = 2
    CENSORED = 3
    IMPLAUSIBLE = 4
    NOT_WHOLE = 5
    NEGATIVE = 6
    SIZE_NOT_POSITIVE = 7
    ABOVE_SIZE = 8
    ABSENT = 9  # the file lacks the column


REASONS = {
    State.NOT_A_NUMBER: "not a number",
    State.CENSORED: "censored",
    State.IMPLAUSIBLE: "not plausible",
    State.NOT_WHOLE: "not a whole number",
    State.NEGATIVE: "a count below zero",
    State.SIZE_NOT_POSITIVE: "a size not above zero",
    State.ABOVE_SIZE: "a count above its size",
}

_GROUPERS = ("'", "’", " ", "\u00a0", "\u202f")
_EXPONENT = "(?:[eE][+-]?[0-9]+)?"


@dataclass(frozen=True, slots=True, kw_only=True)
class Numbers:
    """A column of numbers: values, (N,), NaN where `state`, (N,), is not `State.NUMBER`."""

    values: Floats
    state: States


def parse(cells: pa.StringArray, decimal: Mark, missing: tuple[str, ...]) -> Numbers:
    """Read text cells as numbers; cells equal to a code in `missing` are empty."""
    trimmed = pc.utf8_trim_whitespace(cells)
    state = np.full(len(cells), State.NOT_A_NUMBER, dtype=np.uint8)
    plain = pc.match_substring_regex(trimmed, f"^{_plain(decimal)}$")
    grouped = pc.match_substring_regex(trimmed, f"^{_grouped(decimal)}$")
    limit = f"^[<>≤≥]=?\\s*(?:{_plain(decimal)}|{_grouped(decimal)})$"
    state[flags(pc.match_substring_regex(trimmed, limit))] = State.CENSORED
    is_number = pc.or_(plain, grouped)
    values = _as_floats(pc.if_else(is_number, trimmed, None), decimal)
    state[flags(is_number) & np.isfinite(values)] = State.NUMBER
    state[flags(pc.equal(trimmed, ""))] = State.EMPTY
    if missing:
        state[flags(pc.is_in(trimmed, value_set=strings(missing)))] = State.EMPTY
    return emptied(Numbers(values=values, state=state), missing)


def emptied(numbers: Numbers, missing: tuple[str, ...]) -> Numbers:
    """Return the numbers with those that equal a missing code set to empty: -999.0 for "-999"."""
    found = numbers.state == State.NUMBER
    for code in missing:
        if _is_plain(code):
            found &= numbers.values != float(code)
    gone = (numbers.state == State.NUMBER) & ~found
    state = np.where(gone, np.uint8(State.EMPTY), numbers.state)
    values = np.where(state == State.NUMBER, numbers.values, np.nan)
    return Numbers(values=values, state=state)


def _is_plain(text: str) -> bool:
    try:
        return bool(np.isfinite(float(text)))
    except ValueError:
        return False


def _plain(decimal: Mark) -> str:
    mark = f"[{decimal}]"
    return f"[+-]?(?:[0-9]+{mark}?[0-9]*|{mark}[0-9]+){_EXPONENT}"


def _grouped(decimal: Mark) -> str:
    marks = (*_GROUPERS, "," if decimal == "." else ".")
    groups = "|".join(f"(?:[{mark}][0-9]{{3}})+" for mark in marks)
    return f"[+-]?[1-9][0-9]{{0,2}}(?:{groups})(?:[{decimal}][0-9]*)?"


def _as_floats(cells: pa.StringArray, decimal: Mark) -> Floats:
    other = "," if decimal == "." else "."
    bare = pc.replace_substring_regex(cells, f"[{''.join(_GROUPERS)}{other}]|^[+]", "")
    if decimal == ",":
        bare = pc.replace_substring(bare, ",", ".")
    return floats(bare.cast(pa.float64()))


@dataclass(frozen=True, slots=True, kw_only=True)
class MarkEvidence:
    """How many cells speak for which decimal mark.

    `dot` and `comma` prove it (`1.5`, `0,123`, `1.234,5`); `lone_dot` and `lone_comma` could also be
    thousands (`1.234`); `grouping_dot` and `grouping_comma` prove that the mark groups thousands.
    """

    dot: int = 0
    comma: int = 0
    lone_dot: int = 0
    lone_comma: int = 0
    grouping_dot: int = 0
    grouping_comma: int = 0

    def __add__(self, other: MarkEvidence) -> MarkEvidence:
        return MarkEvidence(
            **{one.name: getattr(self, one.name) + getattr(other, one.name) for one in fields(self)}
        )


_THREES = "[1-9][0-9]{0,2}"
_SPEAKS = re.compile(
    "[<>≤≥]?=?\\s*[+-]?(?:"
    rf"(?P<grouping_comma>{_THREES}(?:(?:,[0-9]{{3}})+\.[0-9]*|(?:,[0-9]{{3}}){{2,}}))"
    rf"|(?P<grouping_dot>{_THREES}(?:(?:\.[0-9]{{3}})+,[0-9]*|(?:\.[0-9]{{3}}){{2,}}))"
    rf"|(?P<lone_dot>{_THREES}\.[0-9]{{3}}{_EXPONENT})"
    rf"|(?P<lone_comma>{_THREES},[0-9]{{3}}{_EXPONENT})"
    rf"|(?P<dot>(?:[0-9]*|{_THREES}(?:[{''.join(_GROUPERS)}][0-9]{{3}})+)\.[0-9]*{_EXPONENT})"
    rf"|(?P<comma>(?:[0-9]*|{_THREES}(?:[{''.join(_GROUPERS)}][0-9]{{3}})+),[0-9]*{_EXPONENT})"
    ")"
)


def evidence(cells: Iterable[str]) -> MarkEvidence:
    """Count what trimmed cells say about the decimal mark."""
    said = Counter(match.lastgroup for match in map(_SPEAKS.fullmatch, cells) if match is not None)
    return MarkEvidence(
        dot=said["dot"] + said["grouping_comma"],
        comma=said["comma"] + said["grouping_dot"],
        lone_dot=said["lone_dot"],
        lone_comma=said["lone_comma"],
        grouping_dot=said["grouping_dot"],
        grouping_comma=said["grouping_comma"],
    )


def choose_mark(own: MarkEvidence, source: MarkEvidence, delimiter: str) -> Mark:
    """Decide a file's decimal mark from its own cells, else from all files of its source.

    A mark that stands alone before three digits is the decimal mark, unless the source proves that it
    groups thousands: measured values carry three decimals far more often than thousands marks.
    """
    if own.dot or own.comma:
        return "." if own.dot >= own.comma else ","
    if own.lone_comma and not own.lone_dot:
        thousands = source.grouping_comma or delimiter == ","
        return "." if thousands and not source.comma else ","
    if own.lone_dot and not own.lone_comma:
        return "," if source.grouping_dot and not source.dot else "."
    return "," if source.comma > source.dot else "."


def is_unproven(own: MarkEvidence, source: MarkEvidence) -> bool:
    """Whether a mark could be read either way and the rest of the source does not settle it."""
    if own.dot or own.comma:
        return False
    if own.lone_comma:
        return not (source.comma or (source.grouping_comma and source.dot))
    return bool(own.lone_dot and source.comma and not (source.dot or source.grouping_dot))
