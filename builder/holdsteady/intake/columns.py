"""Arrow columns as numpy arrays, without the detour over pandas that `to_numpy` takes."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np
import numpy.typing as npt
import pyarrow as pa
import pyarrow.compute as pc

from holdsteady.arrays import Bools, Floats, Ints

Codes = npt.NDArray[np.signedinteger[Any]]


def whole(column: pa.Array | pa.ChunkedArray) -> pa.Array:
    """Return the column as one array; a chunked one is joined, dictionaries unified."""
    if not isinstance(column, pa.ChunkedArray):
        return column
    if pa.types.is_dictionary(column.type):
        column = column.unify_dictionaries()
    return column.combine_chunks() if column.num_chunks != 1 else column.chunk(0)


def integers(column: pa.Array) -> Ints:
    """Return a column of moments or whole numbers without nulls as it is held, (N,)."""
    return np.asarray(np.from_dlpack(column.view(pa.int64())), dtype=np.int64)


def strings(cells: Sequence[str]) -> pa.StringArray:
    """Return cells as an Arrow array of text."""
    return pa.array(cells, type=pa.string())


def floats(column: pa.Array) -> Floats:
    """Return a float64 column, (N,), NaN for null."""
    filled = pc.fill_null(column, float("nan")) if column.null_count else column
    return np.asarray(np.from_dlpack(filled), dtype=np.float64)


def flags(column: pa.Array) -> Bools:
    """Return a boolean column, (N,), False for null."""
    filled = pc.fill_null(column, False)  # noqa: FBT003  the value to fill with
    return np.from_dlpack(filled.cast(pa.uint8())).astype(np.bool_)


def joined_codes(columns: Sequence[pa.DictionaryArray | int]) -> tuple[Codes, list[str]]:
    """Return dictionary columns, one after the other, as codes, (N,), into their trimmed categories.

    Each category stands once. A count stands for as many rows without the column: their code is -1.
    The codes are of the smallest type that holds them, because sorting by two bytes is a matter of two
    passes.
    """
    place: dict[str, int] = {}
    tables = []
    for column in columns:
        texts = () if isinstance(column, int) else column.dictionary.to_pylist()
        tables.append([place.setdefault(text.strip(), len(place)) for text in texts])
    kind: type[np.signedinteger[Any]] = np.int16 if len(place) < 2**15 else np.int32
    sizes = [column if isinstance(column, int) else len(column) for column in columns]
    result = np.full(sum(sizes), -1, dtype=kind)
    start = 0
    for column, table, size in zip(columns, tables, sizes, strict=True):
        if size and not isinstance(column, int):
            places = np.array(table, dtype=kind)
            codes: npt.NDArray[np.int32] = np.asarray(np.from_dlpack(column.indices), dtype=np.int32)
            np.take(places, codes, out=result[start : start + size], mode="clip")
        start += size
    return result, list(place)


def encoded(cells: pa.StringArray) -> pa.DictionaryArray:
    """Return text cells as a dictionary column."""
    return cells.dictionary_encode()


def bytes_of(column: pa.StringArray) -> tuple[npt.NDArray[np.int64], npt.NDArray[np.uint8]]:
    """Return where each text begins, (N + 1,), in the UTF-8 bytes of all; the column has no nulls."""
    _, offsets, data = column.buffers()
    starts = np.frombuffer(offsets, dtype=np.int32)[column.offset : column.offset + len(column) + 1]
    raw = np.frombuffer(data, dtype=np.uint8) if data is not None else np.zeros(0, dtype=np.uint8)
    return starts.astype(np.int64), raw
