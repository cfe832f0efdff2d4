"""Arrow columns as numpy arrays, without the detour over pandas that `to_numpy` takes."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
import numpy.typing as npt
import pyarrow as pa
import pyarrow.compute as pc

from holdsteady.arrays import Bools, Floats, Ints


def whole(column: pa.Array | pa.ChunkedArray) -> pa.Array:
    """Return the column as one array; a chunked one is joined, dictionaries unified."""
    if not isinstance(column, pa.ChunkedArray):
        return column
    if pa.types.is_dictionary(column.type):
        column = column.unify_dictionaries()
    return column.combine_chunks() if column.num_chunks != 1 else column.chunk(0)


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


def codes(column: pa.DictionaryArray) -> tuple[Ints, list[str]]:
    """Return a dictionary column as codes, (N,), into its trimmed categories, each of which stands once."""
    raw = np.from_dlpack(column.indices).astype(np.int64)
    texts = [text.strip() for text in column.dictionary.to_pylist()]
    if len(texts) == 0:
        return raw, []
    distinct = list(dict.fromkeys(texts))
    place = {text: index for index, text in enumerate(distinct)}
    return np.array([place[text] for text in texts], dtype=np.int64)[raw], distinct


def encoded(cells: pa.StringArray) -> pa.DictionaryArray:
    """Return text cells as a dictionary column."""
    return cells.dictionary_encode()


def bytes_of(column: pa.StringArray) -> tuple[npt.NDArray[np.int64], npt.NDArray[np.uint8]]:
    """Return where each text begins, (N + 1,), in the UTF-8 bytes of all; the column has no nulls."""
    _, offsets, data = column.buffers()
    starts = np.frombuffer(offsets, dtype=np.int32)[column.offset : column.offset + len(column) + 1]
    raw = np.frombuffer(data, dtype=np.uint8) if data is not None else np.zeros(0, dtype=np.uint8)
    return starts.astype(np.int64), raw
