"""Columns of text, and the CSV made of them: no quotes where none are needed, LF, no loop over rows."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from typing import Any
from zoneinfo import ZoneInfo

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc

from holdsteady.arrays import Bools, Floats, Ints
from holdsteady.times import iso_parts

_NEEDS_QUOTES = '[",\r\n]'
# A program that opens the table must not take a cell for a formula.
_FORMULA = "^[=+@\t\r-]"
_NUMBER = r"^[+-]?([0-9]+\.?[0-9]*|\.[0-9]+)([eE][+-]?[0-9]+)?$"


def floats(values: Floats | Sequence[float | None]) -> pa.Array:
    """Return numbers in the shortest form that reads back as the same double; empty where not finite."""
    array = np.array([np.nan if v is None else v for v in values]) if isinstance(values, list) else values
    # Adding zero turns -0.0 into 0.0.
    array = np.asarray(array, dtype=np.float64) + 0.0
    # Limits stand still for long, and writing a number costs more than copying its text.
    steps = np.flatnonzero(array[1:].view(np.int64) != array[:-1].view(np.int64)) + 1
    if len(steps) * 2 >= len(array):
        return _written(array)
    starts = np.concatenate(([0], steps))
    lengths = np.diff(np.append(starts, len(array)))
    return _written(array[starts]).take(pa.array(np.repeat(np.arange(len(starts)), lengths)))


def _written(array: Floats) -> pa.Array:
    return pa.array(array, mask=~np.isfinite(array)).cast(pa.string())


def integers(values: Ints | Sequence[int | None]) -> pa.Array:
    """Return whole numbers; empty for None."""
    return pa.array(values, pa.int64()).cast(pa.string())


def flags(values: Bools | Sequence[bool]) -> pa.Array:
    """Return 1 for yes, 0 for no."""
    return pa.array(np.asarray(values, dtype=np.int8)).cast(pa.string())


def text(values: Iterable[str]) -> pa.Array:
    """Return cells as text that neither breaks a row nor becomes a formula where the table is opened."""
    array = pa.array([_storable(value) for value in values], pa.string())
    risky = pc.and_(
        pc.match_substring_regex(array, _FORMULA), pc.invert(pc.match_substring_regex(array, _NUMBER))
    )
    array = pc.if_else(risky, pc.binary_join_element_wise("'", array, ""), array)
    quoted = pc.binary_join_element_wise('"', pc.replace_substring(array, '"', '""'), '"', "")
    return pc.if_else(pc.match_substring_regex(array, _NEEDS_QUOTES), quoted, array)


def coded(codes: Ints, words: Sequence[str]) -> pa.Array:
    """Return `words[code]` for each code, (N,); the words are ours and need no care."""
    return pa.array(words, pa.string()).take(pa.array(codes))


def constant(word: str, rows: int) -> pa.Array:
    """Return the same text in every row."""
    return coded(np.zeros(rows, dtype=np.int64), [word])


def empty(rows: int) -> pa.Array:
    """Return nothing in every row."""
    return pa.nulls(rows, pa.string())


def moments(microseconds: Ints, zone: ZoneInfo) -> pa.Array:
    """Return ISO 8601 texts with offset, the same as `times.iso` gives."""
    local, suffixes, suffix_of = iso_parts(microseconds, zone)
    written = pc.replace_substring(pa.array(local).cast(pa.string()), " ", "T")
    return pc.binary_join_element_wise(written, coded(suffix_of, suffixes), "")


def optional_moments(microseconds: Sequence[int | None], zone: ZoneInfo) -> pa.Array:
    """Return ISO 8601 texts with offset; empty for None."""
    known = np.array([m for m in microseconds if m is not None], dtype=np.int64)
    place = np.cumsum([m is not None for m in microseconds]) - 1
    index = pa.array(
        [int(p) if m is not None else None for p, m in zip(place, microseconds, strict=True)], pa.int64()
    )
    return moments(known, zone).take(index)


def csv(header: str, columns: Sequence[pa.Array] = ()) -> bytes:
    """Return a header and the rows of `columns`; the header alone without any."""
    names = header.split(",")
    if not columns or len(columns[0]) == 0:
        return f"{header}\n".encode()
    if len(columns) != len(names):
        raise ValueError(f"{len(columns)} columns for {len(names)} names: {header}")
    options: dict[str, Any] = {"null_handling": "replace", "null_replacement": ""}
    rows = pc.binary_join_element_wise(*columns, ",", **options)
    whole = pc.binary_join(pa.ListArray.from_arrays(pa.array([0, len(rows)], pa.int32()), rows), "\n")
    return b"\n".join((header.encode(), whole[0].as_buffer(), b""))


def _storable(value: str) -> str:
    # File names that are no UTF-8 come as lone surrogates; NUL would end the text in other programs.
    return value.encode("utf-8", "backslashreplace").decode("utf-8").replace("\0", "\\x00")
