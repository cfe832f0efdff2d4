"""Cells to numbers, and which decimal mark a file uses.

A number is ASCII digits with an optional sign, exponent and the decimal mark; thousands marks only in
groups of three. Nothing else is one: no unit, no `inf`, no `NaN`, nothing beyond the range of a double.
"""

from __future__ import annotations

import itertools
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

from holdsteady.arrays import Bools, Floats
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
    CENSORED_ABOVE = 10  # `>100`; `CENSORED` is `<0.05`
    WITH_UNIT = 11
    UNCLEAR_MARK = 12


REASONS = {
    State.NOT_A_NUMBER: "not a number",
    State.CENSORED: "censored",
    State.CENSORED_ABOVE: "censored",
    State.WITH_UNIT: "not a number: text stands behind it; let the export write the number alone",
    State.IMPLAUSIBLE: "not plausible",
    State.NOT_WHOLE: "not a whole number",
    State.NEGATIVE: "a count below zero",
    State.SIZE_NOT_POSITIVE: "a size not above zero",
    State.ABOVE_SIZE: "a count above its size",
    State.UNCLEAR_MARK: "decimal and thousands mark cannot be told apart; set `decimal` of its source",
}

_HOLD_A_VALUE = (State.NUMBER, State.CENSORED, State.CENSORED_ABOVE)
_GROUPERS = ("'", "’", " ", "\u00a0", "\u202f")
_UNIT = r"(?:\s+[%‰°\p{L}].*|[%‰°\p{L}][^0-9]*)"
_EXPONENT = "(?:[eE][+-]?[0-9]+)?"


@dataclass(frozen=True, slots=True, kw_only=True)
class Numbers:
    """A column of numbers: values, (N,), and what each is, `state`, (N,).

    NaN but for `State.NUMBER` and for censored cells, whose value is the limit they name.
    """

    values: Floats
    state: States


def parse(cells: pa.StringArray, decimal: Mark, missing: tuple[str, ...]) -> Numbers:
    """Read text cells as numbers; cells equal to a code in `missing` are empty."""
    trimmed = pc.utf8_trim_whitespace(cells)
    plain = flags(pc.match_substring_regex(trimmed, f"^{_plain(decimal)}$"))
    state = np.full(len(cells), State.NUMBER, dtype=np.uint8)
    if plain.all():
        values = _as_floats(trimmed, decimal)
    else:  # the others are few, and what they may be is costly to find out
        values = np.full(len(cells), np.nan)
        values[plain] = _as_floats(trimmed.filter(pa.array(plain)), decimal)
        others = trimmed.filter(pa.array(~plain))
        values[~plain], state[~plain] = _others(others, decimal)
    state[np.isin(state, _HOLD_A_VALUE) & ~np.isfinite(values)] = State.NOT_A_NUMBER  # `1e400`
    if missing:
        state[flags(pc.is_in(trimmed, value_set=strings(missing)))] = State.EMPTY
    return emptied(Numbers(values=values, state=state), missing)


def _others(cells: pa.StringArray, decimal: Mark) -> tuple[Floats, States]:
    """Return what trimmed cells are that are no plain numbers, and the values of those that hold one."""
    number = f"(?:{_plain(decimal)}|{_grouped(decimal)})"
    state = np.full(len(cells), State.NOT_A_NUMBER, dtype=np.uint8)
    for pattern, meaning in (
        (f"^{number}{_UNIT}$", State.WITH_UNIT),
        (f"^{_grouped(decimal)}$", State.NUMBER),
        (f"^[<≤]=?\\s*{number}$", State.CENSORED),
        (f"^[>≥]=?\\s*{number}$", State.CENSORED_ABOVE),
        ("^$", State.EMPTY),
    ):
        state[flags(pc.match_substring_regex(cells, pattern))] = meaning
    held = pa.array(np.isin(state, _HOLD_A_VALUE))
    bare = pc.replace_substring_regex(cells, f"^[<>≤≥]=?\\s*|[{''.join(_GROUPERS)}{_other(decimal)}]", "")
    return _as_floats(pc.if_else(held, bare, None), decimal), state


def unclear(cells: pa.StringArray, missing: tuple[str, ...]) -> Numbers:
    """Return the cells of a file whose decimal mark nobody can tell: not one of its numbers is read."""
    numbers = parse(cells, ".", missing)
    told = numbers.state == State.EMPTY
    state = np.where(told, numbers.state, np.uint8(State.UNCLEAR_MARK))
    return Numbers(values=np.full(state.size, np.nan), state=state)


def emptied(numbers: Numbers, missing: tuple[str, ...]) -> Numbers:
    """Return the numbers with those that equal a missing code set to empty: -999.0 for "-999"."""
    found = numbers.state == State.NUMBER
    for code in missing:
        if _is_plain(code):
            found &= numbers.values != float(code)
    gone = (numbers.state == State.NUMBER) & ~found
    state = np.where(gone, np.uint8(State.EMPTY), numbers.state)
    values = np.where((state == State.NUMBER) | is_censored(state), numbers.values, np.nan)
    return Numbers(values=values, state=state)


def is_censored(state: States) -> Bools:
    """Return which cells name a limit that the value lies beyond."""
    return np.asarray((state == State.CENSORED) | (state == State.CENSORED_ABOVE))


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


def _other(decimal: Mark) -> Mark:
    return "," if decimal == "." else "."


def _as_floats(cells: pa.StringArray, decimal: Mark) -> Floats:
    """Return the values of numbers without thousands marks, NaN for null."""
    bare = pc.utf8_ltrim(cells, characters="+")
    if decimal == ",":
        bare = pc.replace_substring(bare, ",", ".")
    return floats(bare.cast(pa.float64()))


@dataclass(frozen=True, slots=True, kw_only=True)
class MarkEvidence:
    """How many cells speak for which decimal mark.

    `dot` and `comma` prove it (`1.5`, `0,123`, `1.234,5`); `lone_dot` and `lone_comma` could also be
    thousands (`1.234`); `grouping_dot` and `grouping_comma` prove that the mark groups thousands; `bare`
    has four digits or more and no mark at all, where thousands would be grouped if any were.
    """

    dot: int = 0
    comma: int = 0
    lone_dot: int = 0
    lone_comma: int = 0
    grouping_dot: int = 0
    grouping_comma: int = 0
    bare: int = 0

    def __add__(self, other: MarkEvidence) -> MarkEvidence:
        return MarkEvidence(
            **{one.name: getattr(self, one.name) + getattr(other, one.name) for one in fields(self)}
        )


_THREES = "[1-9][0-9]{0,2}"
_SPEAKS = re.compile(
    "[<>≤≥]?=?\\s*[+-]?(?:"
    rf"(?P<grouping_comma>{_THREES}(?:(?:,[0-9]{{3}})+\.[0-9]*|(?:,[0-9]{{3}}){{2,}}))"
    rf"|(?P<grouping_dot>{_THREES}(?:(?:\.[0-9]{{3}})+,[0-9]*|(?:\.[0-9]{{3}}){{2,}}))"
    rf"|(?P<lone_dot>{_THREES}\.[0-9]{{3}})"
    rf"|(?P<lone_comma>{_THREES},[0-9]{{3}})"
    rf"|(?P<dot>(?:[0-9]*|{_THREES}(?:[{''.join(_GROUPERS)}][0-9]{{3}})+)\.[0-9]*{_EXPONENT})"
    rf"|(?P<comma>(?:[0-9]*|{_THREES}(?:[{''.join(_GROUPERS)}][0-9]{{3}})+),[0-9]*{_EXPONENT})"
    r"|(?P<bare>[1-9][0-9]{3,})"
    ")"
)
_USUAL_MARK: dict[str, Mark] = {",": ".", ";": ",", "\t": ".", "|": "."}
_LONE = {"lone_dot": ".", "lone_comma": ","}


def evidence_of(cells: pa.StringArray, scale: float | None = None) -> MarkEvidence:
    """Count what the trimmed cells of a column say about the decimal mark, as `evidence` does."""
    counted = pc.value_counts(cells)
    times = np.from_dlpack(counted.field("counts")).tolist()
    return evidence(counted.field("values").to_pylist(), scale, times)


def evidence(
    cells: Iterable[str], scale: float | None = None, times: Iterable[int] | None = None
) -> MarkEvidence:
    """Count what trimmed cells say about the decimal mark; `times` is how often each of them stands.

    `scale` is the size that the column's values are known to have: `1.234` is 1234 where that is near
    to a thousand, and proves the mark as `1.5` does.
    """
    said: Counter[str] = Counter()
    for match, often in zip(map(_SPEAKS.fullmatch, cells), times or itertools.repeat(1), strict=False):
        if match is None or match.lastgroup is None:
            continue
        kind = match.lastgroup
        if scale is not None and kind in _LONE:
            kind = _by_scale(kind, match[kind], scale)
        said[kind] += often
    return MarkEvidence(
        dot=said["dot"] + said["grouping_comma"],
        comma=said["comma"] + said["grouping_dot"],
        lone_dot=said["lone_dot"],
        lone_comma=said["lone_comma"],
        grouping_dot=said["grouping_dot"],
        grouping_comma=said["grouping_comma"],
        bare=said["bare"],
    )


def _by_scale(kind: str, text: str, scale: float) -> str:
    """Return what a mark before three digits is, where only one reading comes near the scale."""
    mark = _LONE[kind]
    value = float(text.replace(mark, "."))
    as_decimal, as_thousands = (scale / 10 <= one <= scale * 10 for one in (value, value * 1_000))
    if as_decimal and not as_thousands:
        return "dot" if mark == "." else "comma"
    if as_thousands and not as_decimal:
        return "grouping_dot" if mark == "." else "grouping_comma"
    return kind


def choose_mark(own: MarkEvidence, source: MarkEvidence, delimiter: str) -> Mark | None:
    """Decide a file's decimal mark from its own cells, else from all files of its source.

    A mark that stands alone before three digits is what the source proves it to be. Where nothing does,
    the delimiter decides: the comma separates fields where the dot is the decimal mark, the semicolon
    where the comma is, and beside tabs and bars a dot is decimal. None where it could still be either.
    """
    if own.dot or own.comma:
        return "." if own.dot >= own.comma else ","
    if own.lone_dot and own.lone_comma:
        return _proven(source)
    if own.lone_comma:
        return _mark_of_lone(own, source, ",", delimiter)
    if own.lone_dot:
        return _mark_of_lone(own, source, ".", delimiter)
    return "," if source.comma > source.dot else "."


def _proven(source: MarkEvidence) -> Mark | None:
    if bool(source.dot) == bool(source.comma):
        return None
    return "." if source.dot else ","


def _mark_of_lone(own: MarkEvidence, source: MarkEvidence, lone: Mark, delimiter: str) -> Mark | None:
    other: Mark = "," if lone == "." else "."
    groups, decimal = (
        (source.grouping_dot, source.dot) if lone == "." else (source.grouping_comma, source.comma)
    )
    if bool(decimal) != bool(groups):
        return lone if decimal else other
    if own.bare and not groups:
        return lone
    usual = _USUAL_MARK.get(delimiter)
    return lone if usual == lone else (other if usual == _proven(source) else None)


def is_unproven(own: MarkEvidence, source: MarkEvidence, delimiter: str = "") -> bool:
    """Whether a mark before three digits was taken for the decimal mark for its delimiter's sake alone.

    A dot beside commas is not worth a word.
    """
    if own.dot or own.comma or own.bare or not (own.lone_dot or own.lone_comma):
        return False
    lone_dot = bool(own.lone_dot)
    settled = (source.dot or source.grouping_dot) if lone_dot else (source.comma or source.grouping_comma)
    return not settled and not (lone_dot and delimiter == ",")
