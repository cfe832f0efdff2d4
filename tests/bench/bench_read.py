"""How long reading many clean files takes against bare `pyarrow.csv` over the same files, in one run.

Run it from the top of the checkout: `python -m tests.bench.bench_read [files] [rows a file]`.
"""

from __future__ import annotations

import datetime as dt
import sys
import tempfile
import time
from collections.abc import Callable
from pathlib import Path
from zoneinfo import ZoneInfo

import numpy as np
import pyarrow as pa
import pyarrow.csv as pa_csv

from holdsteady.intake.read import read
from holdsteady.project.settings import Settings

ROUNDS = 5
SETTINGS = Settings.model_validate(
    {
        "source": ({"id": "s", "files": ("*.csv",), "time": "stamp"},),
        "characteristic": (
            {"id": "bore", "source": "s", "value": "bore", "where": {"station": "B2"}, "each": ("press",)},
            {"id": "mass", "source": "s", "value": "mass", "each": ("press", "station")},
        ),
    }
)


def make(folder: Path, files: int, rows: int) -> None:
    """Write clean files: time, press, station, lot, two measured values."""
    random = np.random.default_rng(7)
    start = dt.datetime(2025, 1, 1, tzinfo=dt.UTC)
    for index in range(files):
        first = start + dt.timedelta(hours=index)
        values = random.normal(12.0, 0.01, (rows, 2))
        lines = ["stamp,press,station,lot,bore,mass"]
        for row in range(rows):
            stamp = (first + dt.timedelta(seconds=row * 3)).strftime("%Y-%m-%d %H:%M:%S")
            bore, mass = values[row]
            lines.append(f"{stamp},{row % 20},B{row % 5},{index:05d},{bore:.4f},{mass:.3f}")
        (folder / f"{index:05d}.csv").write_text("\n".join(lines) + "\n")


def bare(folder: Path) -> None:
    """Parse every file with the column types given, and nothing more."""
    text = pa.dictionary(pa.int32(), pa.string())
    types = {
        "stamp": pa.timestamp("us"),
        "press": text,
        "station": text,
        "bore": pa.float64(),
        "mass": pa.float64(),
    }
    options = pa_csv.ConvertOptions(column_types=types, include_columns=list(types))
    for path in sorted(folder.glob("*.csv")):
        pa_csv.read_csv(path, convert_options=options, read_options=pa_csv.ReadOptions(use_threads=False))


def seconds(work: Callable[[], object]) -> float:
    """Time one call."""
    begin = time.perf_counter()
    work()
    return time.perf_counter() - begin


def main() -> None:
    """Print the times and the median of paired ratios."""
    files, rows = (int(one) for one in (sys.argv[1:] + ["300", "3000"][len(sys.argv) - 1 :])[:2])
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        make(folder, files, rows)
        as_of = 2_000_000_000_000_000
        zone = ZoneInfo("Europe/Lisbon")
        pairs = [
            (seconds(lambda: bare(folder)), seconds(lambda: read(folder, SETTINGS, as_of=as_of, zone=zone)))
            for _ in range(ROUNDS)
        ]
        size = sum(path.stat().st_size for path in folder.iterdir()) / 1e6
    ratios = sorted(ours / theirs for theirs, ours in pairs)
    out = sys.stdout.write
    out(f"{files} files, {files * rows:,} rows, {size:.0f} MB\n")
    out(f"bare pyarrow {min(p[0] for p in pairs):.2f} s, reading {min(p[1] for p in pairs):.2f} s\n")
    out(f"ratio {ratios[len(ratios) // 2]:.2f} (median of {ROUNDS}; {ratios[0]:.2f} to {ratios[-1]:.2f})\n")


if __name__ == "__main__":
    main()
