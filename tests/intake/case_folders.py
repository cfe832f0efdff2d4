"""The case folders of tests/cases: a project, files made when a case is set up, and what is expected.

`expected.json` holds

- `about`: the trait, in a sentence;
- `make`: files made when the case is set up, see `make`;
- `files`: for each file its account, and what was detected where that matters; every file is named;
- `set_aside`: file, line, column and a part of the reason of every line that is listed, in order;
- `readings`: for each characteristic and member its times (ISO 8601, null without) and values, in order;
- or `twin`: the case whose readings come out, without `lost` rows (counted from 0 in the twin's order of
  time) and `lost_cells` of a characteristic; `renamed` are members that have another name here;
- `problems`: a part of the remedy of each problem; `censored`: how many cells by characteristic.
"""

from __future__ import annotations

import gzip
import json
import os
import random
import shutil
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any
from zoneinfo import ZoneInfo

from holdsteady.intake.read import read
from holdsteady.intake.readings import Intake
from holdsteady.project.load import load_project

CASES = Path(__file__).resolve().parents[1] / "cases"
AS_OF = 1_767_225_600_000_000  # 2026-01-01T00:00Z


@dataclass(frozen=True, slots=True)
class Case:
    """A case folder and what is expected of it."""

    name: str
    expected: Mapping[str, Any]

    def set_up(self, folder: Path) -> Path:
        """Write the project into an empty folder and return where it is."""
        project = folder / "project"
        shutil.copytree(CASES / self.name, project, ignore=shutil.ignore_patterns("expected.json"))
        for recipe in self.expected.get("make", ()):
            make(project, recipe)
        return project


def case(name: str) -> Case:
    return Case(name, json.loads((CASES / name / "expected.json").read_text(encoding="utf-8")))


def all_cases() -> list[Case]:
    return [case(folder.name) for folder in sorted(CASES.iterdir()) if folder.is_dir()]


def take_in(project: Path) -> Intake:
    loaded = load_project(project)
    assert not loaded.problems
    zone = ZoneInfo(loaded.settings.site.timezone)
    return read(project, loaded.settings, as_of=AS_OF, zone=zone)


def make(project: Path, recipe: Mapping[str, Any]) -> None:
    """Make one file.

    `text` in `encoding`, or `hex`, or `noise` (so many random bytes), or `columns` (a text with so many
    columns more); `repeat` before and `then_repeat` and `then` behind it; `replace` and `append` change
    bytes; `gzip` packs, `also` adds another made piece, `keep` cuts short, `flip` turns one byte around.
    `link` is where a link leads, `pipe` makes a pipe.
    """
    path = project / recipe["file"]
    path.parent.mkdir(parents=True, exist_ok=True)
    if "link" in recipe:
        path.symlink_to(recipe["link"])
    elif recipe.get("pipe"):
        os.mkfifo(path)
    else:
        path.write_bytes(made(recipe))


def made(recipe: Mapping[str, Any]) -> bytes:
    encoding = recipe.get("encoding", "utf-8")
    repeated = [
        "" if part is None else part["text"] * part["times"]
        for part in (recipe.get("repeat"), recipe.get("then_repeat"))
    ]
    text = repeated[0] + _text(recipe) + repeated[1] + recipe.get("then", "")
    data = text.encode(encoding) + bytes.fromhex(recipe.get("hex", ""))
    data += random.Random(7).randbytes(recipe.get("noise", 0))
    for old, new in recipe.get("replace", {}).items():
        assert bytes.fromhex(old) in data
        data = data.replace(bytes.fromhex(old), bytes.fromhex(new))
    data += bytes.fromhex(recipe.get("append", ""))
    data = gzip.compress(data, mtime=0) if recipe.get("gzip") else data
    data += made(recipe["also"]) if "also" in recipe else b""
    data = data[: recipe.get("keep", len(data))]
    if "flip" in recipe:
        at = recipe["flip"]
        data = data[:at] + bytes([data[at] ^ 0xFF]) + data[at + 1 :]
    return data


def _text(recipe: Mapping[str, Any]) -> str:
    wide = recipe.get("columns")
    if wide is None:
        return str(recipe.get("text", ""))
    header, *rows = wide["text"].splitlines()
    names = ",".join(f"channel {number}" for number in range(wide["times"]))
    filling = ",".join("0.5" for _ in range(wide["times"]))
    return "\n".join([f"{names},{header}", *(f"{filling},{row}" for row in rows), ""])
