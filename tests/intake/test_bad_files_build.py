"""Bad files of every kind beside good ones: the site is built, and says of each what became of it."""

from __future__ import annotations

import csv
import io
from pathlib import Path

from tests.intake.case_folders import case, make
from tests.small_project import files_of, small_project

from holdsteady import report
from holdsteady.build import build

BAD = (
    "damage-empty", "damage-several", "damage-xls", "damage-noise", "damage-nul-tail", "damage-gzip-cut",
    "damage-web-page", "encoding-utf-32", "links-loop", "special-file",
)  # fmt: skip
GLOB = 'files = ["press/*.csv"]'


def test_bad_files_change_no_point(tmp_path: Path) -> None:
    clean = small_project(tmp_path / "clean")
    project = small_project(tmp_path / "damaged")
    settings = project / "holdsteady.toml"
    text = settings.read_text(encoding="utf-8")
    assert GLOB in text
    settings.write_text(text.replace(GLOB, 'files = ["press/**"]'), encoding="utf-8")
    for name in BAD:
        for recipe in case(name).expected.get("make", ()):
            make(project / "press" / name, recipe)
    (project / "press" / "empty.csv").write_bytes(b"")
    (project / "press" / "header.csv").write_bytes(b"stamp,press,bore_mm\n")
    build(clean)
    assert build(project).exit_code() == report.DONE
    whole, damaged = files_of(clean / "site"), files_of(project / "site")
    points = {name for name in whole if name.startswith("tables/points/")}
    assert len(points) == 2
    for name in (*points, "tables/cases.csv", "tables/signals.csv", "tables/limits.csv"):
        assert damaged[name] == whole[name], name
    accounts = list(csv.DictReader(io.StringIO(damaged["tables/files.csv"].decode())))
    assert len(accounts) > len(BAD)
    for one in accounts:
        parts = [int(one[key]) for key in ("used", "filtered", "repeated", "corrected", "set_aside")]
        assert int(one["rows"]) == sum(parts)
        assert (sum(parts) == parts[-1]) == (one["file"] != "press/march.csv"), one
    assert b"press/damage-xls/b.csv" in damaged["data.html"]
