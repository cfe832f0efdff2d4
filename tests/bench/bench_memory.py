"""How much memory reading one large file takes, as a multiple of its size on the disk.

Each dialect is written to a temporary folder and read in a process of its own; what the process held
before it began to read is subtracted from its peak. `bad row` has one row that is at fault, so that the
whole file is read with care.

Run it from the top of the checkout: `python -m tests.bench.bench_memory [--megabytes 200] [dialect …]`.
"""

from __future__ import annotations

import argparse
import gzip
import resource
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable
from pathlib import Path
from zoneinfo import ZoneInfo

import numpy as np

from holdsteady.intake.read import read
from holdsteady.project.settings import Settings

ROWS_MADE = 20_000
START = np.datetime64("2025-01-01T00:00:00")
AS_OF = 2_000_000_000_000_000
SETTINGS = Settings.model_validate(
    {
        "source": ({"id": "s", "files": ("*.*",), "time": "stamp"},),
        "characteristic": (
            {"id": "bore", "source": "s", "value": "bore", "each": ("press",)},
            {"id": "mass", "source": "s", "value": "mass", "where": {"station": "B2"}},
        ),
    }
)
HEADER = ["stamp", "press", "station", "lot", "bore", "mass"]


def rows(first: int) -> list[list[str]]:
    """Return rows whose times go on from those before."""
    random = np.random.default_rng(first)
    stamps = np.datetime_as_string(START + np.arange(first, first + ROWS_MADE).astype("timedelta64[s]"))
    values = random.normal(12.0, 0.01, (ROWS_MADE, 2))
    return [
        [str(stamp), str(index % 20), f"B{index % 5}", "Größe A", f"{bore:.4f}", f"{mass:.3f}"]
        for index, (stamp, (bore, mass)) in enumerate(zip(stamps, values, strict=True))
    ]


def semicolon(cells: list[str]) -> str:
    return ";".join(cells).replace(".", ",")


DIALECTS: dict[str, tuple[Callable[[list[str]], str], str, str]] = {
    "clean": (",".join, "utf-8", ""),
    "semicolon": (semicolon, "utf-8", ""),
    "cp1252": (",".join, "cp1252", ""),
    "utf-16": (",".join, "utf-16-le", ""),
    "quoted": (lambda cells: ",".join(f'"{cell}"' for cell in cells), "utf-8", ""),
    "gzip": (",".join, "utf-8", ""),
    "bad row": (",".join, "utf-8", "one field\n"),
    "bad row, quoted": (lambda cells: ",".join(f'"{cell}"' for cell in cells), "utf-8", "one field\n"),
    "bad row, utf-16": (",".join, "utf-16-le", "one field\n"),
}


def write(folder: Path, dialect: str, megabytes: int) -> Path:
    """Write a file of about that size; a packed one unpacks to it."""
    shape, encoding, last = DIALECTS[dialect]
    packed = dialect == "gzip"
    path = folder / ("a.csv.gz" if packed else "a.csv")
    written, first = 0, 0
    with gzip.open(path, "wb", compresslevel=1) if packed else path.open("wb") as sheet:
        sheet.write((shape(HEADER) + "\n").encode(encoding))
        while written < megabytes * 1_000_000:
            piece = "".join(shape(row) + "\n" for row in rows(first)).encode(encoding)
            sheet.write(piece)
            written, first = written + len(piece), first + ROWS_MADE
        sheet.write(last.encode(encoding))
    return path


def peak() -> int:
    """Return the most memory that this process has held, in bytes."""
    return resource.getrusage(resource.RUSAGE_SELF).ru_maxrss * 1024


def measure(folder: Path) -> None:
    """Read, and print what it took."""
    zone = ZoneInfo("Europe/Lisbon")
    small = folder / "small"
    small.mkdir()
    (small / "a.csv").write_text(
        ",".join(HEADER) + "\n2025-01-01T00:00:00,1,B2,x,1.5,1.5\nx\n", encoding="utf-8"
    )
    read(small, SETTINGS, as_of=AS_OF, zone=zone)  # loads what is loaded late
    before, begin = peak(), time.perf_counter()
    intake = read(folder, SETTINGS, as_of=AS_OF, zone=zone)
    used = sum(one.used for one in intake.files)
    sys.stdout.write(f"{peak() - before} {time.perf_counter() - begin:.1f} {used}\n")


def main() -> None:
    """Print the multiple for each dialect."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("dialects", nargs="*")
    parser.add_argument("--megabytes", type=int, default=200)
    parser.add_argument("--folder", type=Path, help=argparse.SUPPRESS)
    given = parser.parse_args()
    if given.folder is not None:
        measure(given.folder)
        return
    for dialect in given.dialects or DIALECTS:
        with tempfile.TemporaryDirectory() as folder:
            size = write(Path(folder), dialect, given.megabytes).stat().st_size
            command = [sys.executable, "-m", "tests.bench.bench_memory", "--folder", folder]
            result = subprocess.run(command, check=True, capture_output=True, text=True)
            took, seconds, used = result.stdout.split()
            unpacked = given.megabytes * 1_000_000 if dialect == "gzip" else size
            sys.stdout.write(
                f"{dialect:16} {size / 1e6:5.0f} MB on disk, {int(used):,} rows: "
                f"peak {int(took) / 1e6:6.0f} MB, {int(took) / unpacked:.1f} times the text, {seconds} s\n"
            )


if __name__ == "__main__":
    main()
