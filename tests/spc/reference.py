"""Reads the check values under reference/spc."""

from __future__ import annotations

import csv
import json
from pathlib import Path
from typing import Any

FOLDER = Path(__file__).parents[1] / "reference" / "spc"


def rows(name: str) -> list[dict[str, str]]:
    with (FOLDER / f"{name}.csv").open(newline="") as file:
        return list(csv.DictReader(file))


def example(name: str) -> tuple[list[dict[str, str]], dict[str, Any]]:
    """Raw data and results of a worked example."""
    results: dict[str, Any] = json.loads((FOLDER / f"{name}.json").read_text())
    return rows(name), results
