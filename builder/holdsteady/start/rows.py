"""Rows of files that no settings describe yet, split the way a build will split them."""

from __future__ import annotations

import gzip
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np

from holdsteady.arrays import Ints, frozen
from holdsteady.intake import careful
from holdsteady.intake.columns import strings
from holdsteady.intake.demand import Demand, demand_of
from holdsteady.intake.dialect import detect
from holdsteady.intake.encoding import Decoded, decode
from holdsteady.intake.scan import Found
from holdsteady.project.settings import Characteristic, Settings, Source
from holdsteady.start.header import Header

_SHOWN = 110  # characters of a row
_NOT_COUNTED = -1  # the line of a row behind a part that was not read


@dataclass(frozen=True, slots=True, kw_only=True)
class Rows:
    """R rows of the files of a source, as text.

    Attributes
    ----------
    files: the files that rows were taken from, in the order of their paths.
    file: (R,) index into `files`. line: (R,) physical line, from 1; -1 where it was not counted.
    block: (R,) number of the unbroken stretch a row belongs to: rows were left out between stretches.
    text: each row as it is written.
    cells: column -> (R,) trimmed cells, an Arrow array of text; "" where a file lacks the column.
    left_out: whether some rows of the source were not looked at.
    """

    files: tuple[str, ...]
    file: Ints
    line: Ints
    block: Ints
    text: tuple[str, ...]
    cells: dict[str, Any]
    left_out: bool

    @property
    def count(self) -> int:
        """The number of rows."""
        return len(self.text)

    def shown(self, row: int) -> str:
        """Return a row with its place, `press/march.csv:2: 2026-03-02 06:00,1,12.004`."""
        text = self.text[row]
        text = text if len(text) <= _SHOWN else text[:_SHOWN] + "…"
        line = f":{self.line[row]}" if self.line[row] != _NOT_COUNTED else ""
        return f"{self.files[self.file[row]]}{line}: {text}"


@dataclass(frozen=True, slots=True, kw_only=True)
class _Part:
    file: str
    line: Ints
    block: Ints
    text: list[str]
    cells: dict[str, list[str]]


def read_rows(
    files: Sequence[tuple[Found, Header]], names: Sequence[str], *, most_bytes: int, breaks: Sequence[bool]
) -> Rows:
    """Read files that have the same columns.

    Parameters
    ----------
    names: all columns to be read.
    most_bytes: of a longer file only the beginning and the end are read.
    breaks: for each file, whether files were left out between it and the one before.
    """
    parts: list[_Part] = []
    block = 0
    for (one, header), after_break in zip(files, breaks, strict=True):
        block += int(after_break)
        part = _read(one, header, names, most_bytes, block)
        if part is not None:
            parts.append(part)
            block = int(part.block[-1])
    return Rows(
        files=tuple(part.file for part in parts),
        file=frozen(np.repeat(np.arange(len(parts)), [len(part.text) for part in parts])),
        line=frozen(np.concatenate([np.zeros(0, dtype=np.int64), *(part.line for part in parts)])),
        block=frozen(np.concatenate([np.zeros(0, dtype=np.int64), *(part.block for part in parts)])),
        text=tuple(text for part in parts for text in part.text),
        cells={
            name: strings([cell for p in parts for cell in p.cells.get(name) or [""] * len(p.text)])
            for name in names
        },
        left_out=block > 0,
    )


def head_of(path: Path, most_bytes: int) -> tuple[Decoded, bool]:
    """Return the first whole lines of a file as UTF-8, and whether that is all of it."""
    if path.suffix.lower() == ".gz":
        with gzip.open(path) as packed:
            data = packed.read(most_bytes + 1)
    else:
        with path.open("rb") as stream:
            data = stream.read(most_bytes + 1)
    if len(data) <= most_bytes:
        return decode(data), True
    wide = b"\0" in data[:64]
    cut = len(data) // 2 * 2 if wide else data.rfind(b"\n") + 1 or len(data)
    decoded = decode(data[:cut])
    end = decoded.text.rfind(b"\n") + 1 or len(decoded.text)
    return Decoded(text=decoded.text[:end], encoding=decoded.encoding, trouble=decoded.trouble), False


def _tail_of(path: Path, most_bytes: int, encoding: str) -> bytes:
    """Return the last whole lines of a file as UTF-8; nothing of a packed one."""
    if path.suffix.lower() == ".gz":
        return b""
    with path.open("rb") as stream:
        size = stream.seek(0, 2)
        stream.seek(max(0, size - most_bytes) // 2 * 2)
        text = decode(stream.read(), encoding).text
    return text[text.find(b"\n") + 1 :]


def _read(found: Found, header: Header, names: Sequence[str], most_bytes: int, block: int) -> _Part | None:
    here = [name for name in names if name in header.usable]
    demand = _everything(header, here)
    try:
        head, complete = head_of(found.path, most_bytes * 3 // 4)
        tail = b"" if complete or head.trouble else _tail_of(found.path, most_bytes // 4, head.encoding)
    except (OSError, EOFError):
        return None
    layout = None if head.trouble else detect(head.text, demand)
    if layout is None:
        return None
    line: list[int] = []
    blocks: list[int] = []
    texts: list[str] = []
    cells: dict[str, list[str]] = {name: [] for name in here}
    for order, part in enumerate((head.text, head.text[: layout.offset] + tail if tail else b"")):
        if not part:
            continue
        records = careful.read(part, found.name, layout, demand)
        count = int(records.line.size)
        line += records.line.tolist() if order == 0 else [_NOT_COUNTED] * count
        blocks += [block + order] * count
        texts += records.text.to_pylist()
        for name in here:
            cells[name] += records.columns[name].to_pylist() if name in records.columns else [""] * count
    if not texts:
        return None
    filled = np.array(line, dtype=np.int64)
    return _Part(
        file=found.name, line=filled, block=np.array(blocks, dtype=np.int64), text=texts, cells=cells
    )


def _everything(header: Header, names: Sequence[str]) -> Demand:
    """Return the demand that takes every column as text."""
    source = Source(id="s", files=("*",), delimiter=header.delimiter)
    whole = Characteristic(id="c", source="s", value=names[0], each=tuple(names))
    return demand_of(source, Settings(source=(source,), characteristic=(whole,)))
