"""What the cells of each column are: numbers, times, a few words; measured on the rows that were read."""

from __future__ import annotations

import re
from collections.abc import Iterable
from dataclasses import dataclass
from typing import Any

import numpy as np

from holdsteady.arrays import Bools, Floats, Ints, frozen
from holdsteady.intake.columns import encoded, joined_codes, strings
from holdsteady.intake.numbers import (
    Mark,
    MarkEvidence,
    State,
    States,
    choose_mark,
    evidence,
    is_censored,
    parse,
)
from holdsteady.intake.times_text import Family, Stamps
from holdsteady.intake.times_text import parse as parse_times
from holdsteady.start import words
from holdsteady.start.header import is_data
from holdsteady.start.rows import Rows

_MOST_OF = 0.9
_NO_VALUE = words.set_of(
    "n/a na #n/a n.a. nan null none nil - -- --- . ? missing no_data nodata k.a. n.d. nd fehlt"
) | {"no data", "not measured"}
_TROUBLE = words.set_of("err error fault overflow ovf inf -inf #value! #div/0! #ref! #num! fehler") | {
    "out of range"
}
_CODE = re.compile(r"-9{2,}(?:[.,][09]+)?|9{3,}(?:[.,][09]+)?|9{2,}[.,]9+")
_CLOCK = re.compile(r"[0-9]{1,2}:[0-9]{2}(?::[0-9]{2}(?:[.,][0-9]+)?)?")
_FILLED_FOR_CODES = 8
_TELLING = 2_000  # cells of a column of a file that tell its decimal mark


@dataclass(frozen=True, slots=True, kw_only=True)
class Facts:
    """One column of R rows.

    Attributes
    ----------
    filled: how many cells hold something, units and missing codes left out.
    values: (R,) the numbers, NaN where there is none; missing codes are none.
    numeric: whether (nearly) all filled cells are numbers.
    whole: whether all numbers are whole. decimals: with how many decimals they are written.
    missing: text of each missing code or marker -> how often it stands there.
    censored: how many cells are limits, as in <0.05.
    with_text: a cell that holds more than a number though most are numbers; empty where there is none.
    unit: what the row of units below the header says.
    code: (R,) place of each cell in `texts`, the distinct texts; "" is one of them.
    stamps: the cells as moments, where they are; `family` their format. clock: times of day alone.
    """

    name: str
    filled: int
    values: Floats
    numeric: bool
    whole: bool
    decimals: int
    missing: dict[str, int]
    censored: int
    with_text: str
    unit: str
    code: Ints
    texts: tuple[str, ...]
    stamps: Stamps | None
    family: Family
    clock: bool

    @property
    def numbers(self) -> Floats:
        """The numbers alone."""
        return self.values[np.isfinite(self.values)]

    @property
    def kinds(self) -> tuple[str, ...]:
        """The distinct texts that are filled."""
        return tuple(text for text in self.texts if text)


@dataclass(frozen=True, slots=True, kw_only=True)
class Table:
    """All columns of the rows of one source, the row of units taken out.

    `decimal` is the decimal mark of each file; `is_open` says that the cells of some could mean either.
    """

    rows: Rows
    facts: dict[str, Facts]
    units: Bools
    decimal: tuple[Mark, ...]
    is_open: bool


def measure(rows: Rows, delimiter: str) -> Table:
    """Find out what the columns of a source hold."""
    own = [MarkEvidence() for _ in rows.files]
    columns = {name: rows.cells[name].to_pylist() for name in rows.cells}
    edges = np.searchsorted(rows.file, np.arange(len(rows.files) + 1))
    for cells in columns.values():
        for index in range(len(rows.files)):
            own[index] += evidence(cells[edges[index] : min(edges[index + 1], edges[index] + _TELLING)])
    marks = sum(own, MarkEvidence())
    chosen = [choose_mark(one, marks, delimiter) for one in own]
    usual: Mark = "," if delimiter == ";" else "."
    decimal = tuple(mark or usual for mark in chosen)
    units = _unit_rows(rows, columns)
    facts = {name: _facts(name, rows, columns[name], decimal, units) for name in rows.cells}
    return Table(rows=rows, facts=facts, units=units, decimal=decimal, is_open=None in chosen)


def _unit_rows(rows: Rows, columns: dict[str, list[str]]) -> Bools:
    """Return which rows, first in their file, name units: words where others have numbers, and no data."""
    found = np.zeros(rows.count, dtype=np.bool_)
    measured = [name for name, cells in columns.items() if _mostly_data(cells)]
    no_unit = _NO_VALUE | _TROUBLE | {""}
    for row in np.flatnonzero(np.diff(rows.file, prepend=-1)).tolist():
        said = any(columns[name][row].lower() not in no_unit for name in measured)
        found[row] = said and not any(is_data(cells[row]) for cells in columns.values())
    return found


def _mostly_data(cells: list[str]) -> bool:
    filled = [cell for cell in cells[:400] if cell]
    return sum(map(is_data, filled)) * 2 > len(filled)


def _facts(name: str, rows: Rows, cells: list[str], decimal: tuple[Mark, ...], units: Bools) -> Facts:
    arrow = rows.cells[name]
    code, texts = joined_codes([encoded(arrow)])
    values, state = _numbers(cells, rows, decimal)
    state[units] = State.EMPTY
    values[units] = np.nan
    counts = np.bincount(code[~units], minlength=len(texts)) if len(texts) else np.zeros(0, dtype=np.int64)
    missing = {
        text: int(count)
        for text, count in zip(texts, counts.tolist(), strict=True)
        if count and text.lower() in _NO_VALUE
    }
    usual = values[np.isfinite(values)]
    missing |= _codes(texts, counts, decimal[0] if decimal else ".", usual)
    gone = np.isin(code, [place for place, text in enumerate(texts) if text in missing])
    trouble = np.isin(code, [place for place, text in enumerate(texts) if text.lower() in _TROUBLE])
    values[gone] = np.nan
    filled = (state != State.EMPTY) & ~gone
    is_number = np.isfinite(values)
    censored = int(np.count_nonzero(filled & is_censored(state)))
    telling = int((filled & ~trouble).sum()) - censored
    numeric = int(is_number.sum()) >= max(1.0, _MOST_OF * telling)
    odd = np.flatnonzero(filled & ~is_number & ~is_censored(state))
    stamps, family = (None, Family.NONE) if int(filled.sum()) == 0 else _moments(arrow, filled)
    clock_like = [cell for cell, kept in zip(cells, filled.tolist(), strict=True) if kept][:500]
    return Facts(
        name=name,
        filled=int(filled.sum()),
        values=frozen(values),
        numeric=numeric,
        whole=bool(numeric and np.all(values[is_number] == np.round(values[is_number]))),
        decimals=_decimals(cells, is_number, rows, decimal) if numeric else 0,
        missing=missing,
        censored=censored,
        with_text=cells[int(odd[0])] if numeric and odd.size else "",
        unit=next((cells[row] for row in np.flatnonzero(units).tolist() if cells[row]), ""),
        code=frozen(code.astype(np.int64)),
        texts=tuple(texts),
        stamps=stamps,
        family=family,
        clock=bool(clock_like) and all(_CLOCK.fullmatch(cell) for cell in clock_like),
    )


def _numbers(cells: list[str], rows: Rows, decimal: tuple[Mark, ...]) -> tuple[Floats, States]:
    values = np.full(rows.count, np.nan)
    state = np.full(rows.count, int(State.EMPTY), dtype=np.uint8)
    mark_of_row = np.array([mark == "," for mark in decimal], dtype=np.bool_)[rows.file]
    marks: tuple[tuple[Mark, Bools], ...] = ((".", ~mark_of_row), (",", mark_of_row))
    for mark, which in marks:
        if which.any():
            at = np.flatnonzero(which).tolist()
            numbers = parse(strings([cells[row] for row in at]), mark, ())
            values[which] = np.where(numbers.state == State.NUMBER, numbers.values, np.nan)
            state[which] = numbers.state
    return values, state


def _codes(texts: Iterable[str], counts: Ints, mark: Mark, usual: Floats) -> dict[str, int]:
    """Find numbers made of nines that lie far outside everything else that was measured."""
    found: dict[str, int] = {}
    for text, count in zip(texts, counts.tolist(), strict=True):
        if not count or _CODE.fullmatch(text) is None:
            continue
        number = float(text.replace(",", ".")) if mark == "," else float(text.replace(",", ""))
        rest = usual[usual != number]
        if rest.size < _FILLED_FOR_CODES or count > rest.size:
            continue
        low, high = np.percentile(rest, [1, 99])
        room = max(float(high - low), abs(float(np.median(rest))) * 0.1)
        if number < low - room or number > high + 3 * room:
            found[text] = count
    return found


def _decimals(cells: list[str], is_number: Bools, rows: Rows, decimal: tuple[Mark, ...]) -> int:
    """Return the decimals that nearly all numbers keep to."""
    places = []
    for row in np.flatnonzero(is_number)[:20_000].tolist():
        _, mark, after = cells[row].lower().partition("e")[0].partition(decimal[rows.file[row]])
        places.append(len(after) if mark else 0)
    return int(np.ceil(np.percentile(places, 98, method="inverted_cdf"))) if places else 0


def _moments(arrow: Any, filled: Bools) -> tuple[Stamps | None, Family]:
    stamps = parse_times(arrow)
    family = stamps.main_family()
    if family is Family.NONE:
        return None, family
    share = np.count_nonzero(stamps.family == family) / max(int(filled.sum()), 1)
    return (stamps, family) if share >= _MOST_OF else (None, Family.NONE)
