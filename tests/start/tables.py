"""Small tables and folders for tests of guesses."""

from __future__ import annotations

import datetime as dt
from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import Any
from zoneinfo import ZoneInfo

import numpy as np

from holdsteady.intake.columns import strings
from holdsteady.start.draft import CharacteristicDraft, Draft, Guess, SourceDraft
from holdsteady.start.facts import Table, measure
from holdsteady.start.rows import Rows
from holdsteady.start.start import Started, start

NOW = dt.datetime(2026, 3, 17, 14, 10, tzinfo=dt.UTC)
NOW_MICROSECONDS = 1_773_756_600_000_000
UTC = ZoneInfo("UTC")
MONDAY = dt.datetime(2026, 1, 5, 6)  # noqa: DTZ001  as a gauge writes it


def table_of(
    columns: Mapping[str, Any], *, files: Sequence[int] | None = None, delimiter: str = ","
) -> Table:
    """Return the table of columns of cells; `files` numbers the file of each row."""
    cells = {name: [str(cell) for cell in column] for name, column in columns.items()}
    count = len(next(iter(cells.values())))
    file = np.array(files or [0] * count)
    line = np.concatenate([np.arange((file == one).sum()) + 2 for one in np.unique(file)])
    rows = Rows(
        files=tuple(f"f{one}.csv" for one in np.unique(file)),
        file=file,
        line=line,
        block=np.zeros(count, dtype=np.int64),
        text=tuple(delimiter.join(row) for row in zip(*cells.values(), strict=True)),
        cells={name: strings(column) for name, column in cells.items()},
        left_out=False,
    )
    return measure(rows, delimiter)


def stamps(count: int, *, hours: float = 8, form: str = "%Y-%m-%d %H:%M:%S") -> list[str]:
    return [(MONDAY + dt.timedelta(hours=hours * index)).strftime(form) for index in range(count)]


def noise(
    count: int, *, mean: float = 12.0, sigma: float = 0.01, decimals: int = 3, seed: int = 1
) -> list[str]:
    values = np.random.default_rng(seed).normal(mean, sigma, count)
    return [f"{value:.{decimals}f}" for value in values]


def csv(columns: Mapping[str, Any], delimiter: str = ",") -> str:
    lines = [
        delimiter.join(columns),
        *(delimiter.join(map(str, row)) for row in zip(*columns.values(), strict=True)),
    ]
    return "\n".join(lines) + "\n"


def started(folder: Path, files: Mapping[str, str | bytes]) -> Started:
    """Write files and look through them."""
    for name, content in files.items():
        path = folder / name
        path.parent.mkdir(parents=True, exist_ok=True)
        path.write_bytes(content.encode() if isinstance(content, str) else content)
    return start(folder, now=NOW, zone="UTC")


def drafted(folder: Path, files: Mapping[str, str | bytes]) -> Draft:
    return started(folder, files).draft


def only_source(draft: Draft) -> SourceDraft:
    (source,) = draft.sources
    return source


def only(draft: Draft) -> CharacteristicDraft:
    (one,) = only_source(draft).characteristics
    return one


def guess_of(of: SourceDraft | CharacteristicDraft, key: str) -> Guess | None:
    return next((guess for guess in of.guesses if guess.key == key), None)
