"""What reading many clean files costs against bare `pyarrow.csv` over the same files, in one run.

Both sides get the same column types, the same columns and the same number of threads over files. Each
runs in a process of its own, as a build does, so that neither finds memory that the one before has left;
what is imported, and what a first small read sets up, is not counted. The rounds are paired, one side
right after the other, and the median of the paired ratios counts, for three times: what the processor
computes, which other work on the machine changes least; that with what the system does for it, mostly
handing out memory; and the clock's. With `--warm` all rounds run in one process, which has its memory
already: where the system is slow to hand it out, that shows what the work itself takes.

Run it from the top of the checkout: `python -m tests.bench.bench_read [--files N] [--rows N] [--rounds N]
[--dialect comma] [--order shifts]`; all dialects and orders with `--help`.
"""

from __future__ import annotations

import argparse
import gc
import json
import os
import statistics
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass
from functools import partial
from pathlib import Path
from typing import Any
from zoneinfo import ZoneInfo

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc
import pyarrow.csv as pa_csv

from holdsteady.intake.read import READERS, read
from holdsteady.project.settings import Settings

MEASURED = tuple(f"m{number}" for number in range(1, 9))
KINDS = ("computing", "and system", "by the clock")
PRESSES, STATIONS = 20, 5
START = 1_735_689_600  # 2025-01-01T00:00Z
AS_OF = 2_000_000_000_000_000
SETTINGS = Settings.model_validate(
    {
        "source": ({"id": "s", "files": ("*.csv",), "time": "stamp"},),
        "characteristic": (
            *({"id": name, "source": "s", "value": name, "each": ("press",)} for name in MEASURED[:6]),
            {"id": "m7", "source": "s", "value": "m7", "where": {"station": "B2"}, "each": ("press",)},
            {"id": "m8", "source": "s", "value": "m8", "where": {"station": "B2"}, "each": ("press",)},
        ),
    }
)


@dataclass(frozen=True, slots=True, kw_only=True)
class Dialect:
    """How the files are written; `encoding` is that of one label that is not ASCII, if there is one."""

    delimiter: str = ","
    decimal: str = "."
    encoding: str | None = None
    compressed: bool = False


DIALECTS = {
    "comma": Dialect(),
    "semicolon": Dialect(delimiter=";", decimal=","),
    "utf-8": Dialect(encoding="utf-8"),
    "cp1252": Dialect(encoding="cp1252"),
    "utf-16": Dialect(encoding="utf-16"),
}


def make(folder: Path, files: int, rows: int, dialect: Dialect, order: str) -> int:
    """Write clean files: time, press, station, eight measured values; return their bytes.

    In the order `shifts` each file follows the one before; in `machines` all files cover the same time.
    """
    random = np.random.default_rng(7)
    base = random.normal(12.0, 0.5, (rows, len(MEASURED)))
    mark = "é" if dialect.encoding else "B"
    stations = [f"{mark if number == 4 else 'B'}{number}" for number in range(STATIONS)]
    labels = {
        "press": pa.array([str(row % PRESSES) for row in range(rows)]),
        "station": pa.array([stations[row % STATIONS] for row in range(rows)]),
    }
    total = 0
    for index in range(files):
        first = START + (index * rows * 3 if order == "shifts" else index % 3)
        columns: dict[str, Any] = {
            "stamp": pa.array(first + np.arange(rows) * 3).cast(pa.timestamp("s")),
            **labels,
        }
        for place, name in enumerate(MEASURED):
            values = pa.array(np.round(base[:, place] + index * 1e-4, 4))
            if dialect.decimal != ".":
                values = pc.replace_substring(values.cast(pa.string()), ".", dialect.decimal)
            columns[name] = values
        path = folder / f"{index:05d}.csv"
        pa_csv.write_csv(
            pa.table(columns), path, pa_csv.WriteOptions(delimiter=dialect.delimiter, quoting_style="none")
        )
        if dialect.encoding not in (None, "utf-8"):
            path.write_bytes(path.read_text("utf-8").encode(dialect.encoding or ""))
        total += path.stat().st_size
    return total


def bare(folder: Path, dialect: Dialect) -> int:
    """Parse every file with the column types given, and nothing more."""
    text = pa.dictionary(pa.int32(), pa.string())
    types = {"stamp": pa.timestamp("us"), "press": text, "station": text}
    types |= dict.fromkeys(MEASURED, pa.float64())
    convert = pa_csv.ConvertOptions(
        column_types=types, include_columns=list(types), decimal_point=dialect.decimal
    )
    parse = pa_csv.ParseOptions(delimiter=dialect.delimiter)
    options = pa_csv.ReadOptions(use_threads=False)

    def one(path: Path) -> pa.Table:
        return pa_csv.read_csv(path, read_options=options, parse_options=parse, convert_options=convert)

    with ThreadPoolExecutor(max_workers=READERS) as readers:
        return sum(table.num_rows for table in list(readers.map(one, sorted(folder.glob("*.csv")))))


def whole(folder: Path) -> int:
    """Read the same files as a build does, down to the readings of each characteristic."""
    intake = read(folder, SETTINGS, as_of=AS_OF, zone=ZoneInfo("Europe/Lisbon"))
    return sum(one.used for one in intake.files)


def cost(work: Callable[[], int], rows: int) -> list[float]:
    """Return the seconds, of each kind, that one call takes, having checked the rows it saw."""
    gc.collect()
    before, clock = os.times(), time.perf_counter()
    seen = work()
    after, clock = os.times(), time.perf_counter() - clock
    if seen != rows:
        raise RuntimeError(f"{seen} rows instead of {rows}")
    user, system = after.user - before.user, after.system - before.system
    return [user, user + system, clock]


def within(side: str, folder: Path, dialect: str, rows: int) -> list[float]:
    """Measure one side in this process."""
    work = partial(bare, dialect=DIALECTS[dialect]) if side == "bare" else whole
    return cost(partial(work, folder), rows)


def one_side(side: str, folder: Path, dialect: str, rows: int) -> None:
    """Measure one side in this process after a first small read, and print the times."""
    with tempfile.TemporaryDirectory() as small:
        make(Path(small), 5, 50, DIALECTS["comma"], "shifts")
        within(side, Path(small), "comma", 250)
    json.dump(within(side, folder, dialect, rows), sys.stdout)


def apart(side: str, folder: Path, dialect: str, rows: int) -> list[float]:
    """Measure one side in a process of its own."""
    command = [sys.executable, "-m", "tests.bench.bench_read", "--side", side, "--folder", str(folder)]
    command += ["--dialect", dialect, "--rows", str(rows)]
    done = subprocess.run(command, check=True, capture_output=True, text=True)
    times: list[float] = json.loads(done.stdout)
    return times


def main() -> None:
    """Print the times and the medians of paired ratios."""
    parser = argparse.ArgumentParser(description=(__doc__ or "").split("\n", maxsplit=1)[0])
    parser.add_argument("--files", type=int, default=200)
    parser.add_argument("--rows", type=int, default=10_000, help="in each file")
    parser.add_argument("--rounds", type=int, default=5)
    parser.add_argument("--dialect", choices=DIALECTS, default="comma")
    parser.add_argument("--order", choices=("shifts", "machines"), default="shifts")
    parser.add_argument("--warm", action="store_true", help="all rounds in one process")
    parser.add_argument("--side", choices=("bare", "whole"), help=argparse.SUPPRESS)
    parser.add_argument("--folder", type=Path, help=argparse.SUPPRESS)
    asked = parser.parse_args()
    if asked.side:
        one_side(asked.side, asked.folder, asked.dialect, asked.rows)
        return
    dialect = DIALECTS[asked.dialect]
    reference = asked.dialect if dialect.encoding in (None, "utf-8") else "utf-8"
    with tempfile.TemporaryDirectory() as name, tempfile.TemporaryDirectory() as plain:
        size = make(Path(name), asked.files, asked.rows, dialect, asked.order)
        folder = Path(name)
        if reference != asked.dialect:  # the same rows in UTF-8, which is all that the bare parser reads
            folder = Path(plain)
            make(folder, asked.files, asked.rows, DIALECTS[reference], asked.order)
        rows = asked.files * asked.rows
        measure = within if asked.warm else apart
        pairs = [
            (measure("bare", folder, reference, rows), measure("whole", Path(name), asked.dialect, rows))
            for _ in range(asked.rounds + asked.warm)
        ][int(asked.warm) :]  # the first round finds no memory yet
    out = sys.stdout.write
    load = os.getloadavg()[0] if hasattr(os, "getloadavg") else float("nan")
    out(f"{asked.files} files, {rows:,} rows, {size / 1e6:.0f} MB, {asked.dialect}, {asked.order}, ")
    out(f"{READERS} threads, {asked.rounds} rounds{', warm' if asked.warm else ''}, load {load:.1f}\n")
    for place, kind in enumerate(KINDS):
        theirs, ours = ([pair[side][place] for pair in pairs] for side in (0, 1))
        ratios = sorted(mine / other for other, mine in zip(theirs, ours, strict=True))
        out(
            f"{kind:12}  bare {statistics.median(theirs):.2f} s, reading {statistics.median(ours):.2f} s, "
            f"ratio {statistics.median(ratios):.2f} ({ratios[0]:.2f} to {ratios[-1]:.2f})\n"
        )


if __name__ == "__main__":
    main()
