"""A project of a few lines, for tests of whole builds."""

from __future__ import annotations

import datetime as dt
from pathlib import Path

import numpy as np

CACHE = Path(__file__).resolve().parent.parent / ".holdsteady"  # of all projects that tests make
START = dt.datetime(2026, 3, 2, 6)  # noqa: DTZ001  as a gauge writes it, without a zone

SETTINGS = """\
[site]
title = "Osmire Filterworks"
timezone = "UTC"
as_of = 2026-03-10T12:00:00Z

[[source]]
id = "press"
files = ["press/*.csv"]
time = "stamp"

[[characteristic]]
id = "bore"
title = "Bore diameter"
area = "Pressing"
source = "press"
value = "bore_mm"
unit = "mm"
each = ["press"]
baseline = { points = 25 }
"""


def small_project(folder: Path, *, settings: str = SETTINGS, shift: float = 0.0, rows: int = 60) -> Path:
    """Write a project with two presses; the last ten readings of press 2 are shifted by so many sigma."""
    rng = np.random.default_rng(1)
    (folder / "press").mkdir(parents=True)
    (folder / "holdsteady.toml").write_text(settings, encoding="utf-8")
    CACHE.mkdir(exist_ok=True)
    (folder / ".holdsteady").symlink_to(CACHE)
    lines = ["stamp,press,bore_mm"]
    for i in range(rows):
        for press in (1, 2):
            value = 12.0 + 0.01 * float(rng.normal())
            if press == 2 and i >= rows - 10:
                value += 0.01 * shift
            lines.append(f"{START + dt.timedelta(hours=3 * i):%Y-%m-%d %H:%M:%S},{press},{value:.4f}")
    (folder / "press" / "march.csv").write_text("\n".join(lines) + "\n", encoding="utf-8")
    return folder


def files_of(folder: Path) -> dict[str, bytes]:
    """Return every file below a folder."""
    return {
        path.relative_to(folder).as_posix(): path.read_bytes()
        for path in sorted(folder.rglob("*"))
        if path.is_file()
    }
