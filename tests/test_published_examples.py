"""Worked examples from books and handbooks, from CSV to published tables, in one build.

Sources, status and the reasons for every tolerance stand in `reference/examples/compute_expected.py`.
"""

from __future__ import annotations

import csv
import importlib.util
import json
import math
from dataclasses import dataclass
from pathlib import Path
from types import ModuleType
from typing import Any

import pytest
from scipy.special import gammaln
from scipy.stats import binom, poisson

from holdsteady.build import build

EXAMPLES_FOLDER = Path(__file__).parent / "reference" / "examples"
EXAMPLES: list[dict[str, Any]] = json.loads((EXAMPLES_FOLDER / "expected.json").read_text(encoding="utf-8"))
Table = list[dict[str, str]]

FIGURES = [(example, figure) for example in EXAMPLES for figure in example["published"]]
LINES = [
    (example, panel, line)
    for example in EXAMPLES
    for panel, lines in example["computed"].items()
    for line in lines
]
PANELS = [(example, panel) for example in EXAMPLES for panel in example["outside"]]


def read_table(path: Path) -> Table:
    with path.open(encoding="utf-8", newline="") as file:
        return list(csv.DictReader(file))


def toml(value: object) -> str:
    if isinstance(value, dict):
        return "{ " + ", ".join(f"{key} = {toml(item)}" for key, item in value.items()) + " }"
    return json.dumps(value)


def settings_of(identifier: str, settings: dict[str, Any]) -> str:
    """A source without a time column, and the characteristic read from it."""
    lines = [f"{key} = {toml(value)}" for key, value in settings.items()]
    return "\n".join(
        ["[[source]]", f'id = "{identifier}"', f'files = ["{identifier}.csv"]', "",
         "[[characteristic]]", f'id = "{identifier}"', f'source = "{identifier}"', *lines, "", ""]
    )  # fmt: skip


@dataclass(frozen=True, slots=True, kw_only=True)
class Tables:
    """The published tables of one build."""

    folder: Path

    def limits(self, characteristic: str, panel: str) -> dict[str, str]:
        """The one line of limits; a baseline of all rows leaves room for no other."""
        lines = read_table(self.folder / "limits.csv")
        (line,) = [x for x in lines if (x["characteristic"], x["panel"]) == (characteristic, panel)]
        return line

    def points(self, characteristic: str, panel: str) -> Table:
        rows = read_table(self.folder / "points" / f"{characteristic}.csv")
        return [row for row in rows if row["panel"] == panel]

    def signals(self, characteristic: str, panel: str) -> Table:
        rows = read_table(self.folder / "signals.csv")
        return [x for x in rows if (x["characteristic"], x["panel"]) == (characteristic, panel)]


@pytest.fixture(scope="module")
def tables(tmp_path_factory: pytest.TempPathFactory) -> Tables:
    """All worked examples in one project, built once."""
    folder = tmp_path_factory.mktemp("worked-examples")
    text = ""
    for example in EXAMPLES:
        data = (EXAMPLES_FOLDER / f"{example['data']}.csv").read_bytes()
        (folder / f"{example['id']}.csv").write_bytes(data)
        text += settings_of(example["id"], example["settings"] | {"baseline": {"points": example["rows"]}})
    (folder / "holdsteady.toml").write_text(text, encoding="utf-8")
    build(folder)
    return Tables(folder=folder / "site" / "tables")


def number(cell: str) -> float | None:
    return float(cell) if cell else None


def unbias(n: int) -> float:
    """c4, exactly."""
    return math.sqrt(2 / (n - 1)) * math.exp(gammaln(n / 2) - gammaln((n - 1) / 2))


def built(tables: Tables, example: dict[str, Any], panel: str, line: str) -> list[float | None]:
    """What the tables say of a line: one value, or one for each point."""
    limits = tables.limits(example["id"], panel)
    points = tables.points(example["id"], panel)
    if line == "sigma":
        return [number(limits["sigma"])]
    if line == "pooled s":
        degrees = sum(int(float(point["n"])) - 1 for point in points)
        return [float(limits["sigma"]) * unbias(degrees + 1)]
    return [number(point[line]) for point in points if point["value"]]


def test_the_expected_figures_are_what_their_script_writes() -> None:
    spec = importlib.util.spec_from_file_location("compute_expected", EXAMPLES_FOLDER / "compute_expected.py")
    assert spec is not None
    assert spec.loader is not None
    module: ModuleType = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    written = json.loads(json.dumps(module.expected()))
    assert numbers(written) == pytest.approx(numbers(EXAMPLES), rel=1e-10, abs=1e-15)
    assert without_numbers(written) == without_numbers(EXAMPLES)


def numbers(value: object) -> list[float]:
    """Every number in a JSON value, in order."""
    if isinstance(value, dict):
        return [x for item in value.values() for x in numbers(item)]
    if isinstance(value, list):
        return [x for item in value for x in numbers(item)]
    return [float(value)] if isinstance(value, int | float) else []


def without_numbers(value: object) -> object:
    """A JSON value with every number blotted out."""
    if isinstance(value, dict):
        return {key: without_numbers(item) for key, item in value.items()}
    if isinstance(value, list):
        return [without_numbers(item) for item in value]
    return "number" if isinstance(value, int | float) else value


@pytest.mark.parametrize(
    ("example", "figure"),
    FIGURES,
    ids=[f"{e['id']}-{f['panel']}-{f['line'].replace(' ', '-')}" for e, f in FIGURES],
)
def test_published_figures(tables: Tables, example: dict[str, Any], figure: dict[str, Any]) -> None:
    decimals = len(figure["printed"].partition(".")[2])
    tolerance = figure.get("tolerance", 0.5 * 10**-decimals)
    values = built(tables, example, figure["panel"], figure["line"])
    assert values
    for value in values:
        assert value == pytest.approx(float(figure["printed"]), abs=tolerance * (1 + 1e-9), rel=0)


@pytest.mark.parametrize(
    ("example", "panel", "line"), LINES, ids=[f"{e['id']}-{p}-{n.replace(' ', '-')}" for e, p, n in LINES]
)
def test_exact_figures(tables: Tables, example: dict[str, Any], panel: str, line: str) -> None:
    expected = example["computed"][panel][line]
    values = built(tables, example, panel, line)
    wanted = expected if isinstance(expected, list) else [expected] * len(values)
    assert values
    assert len(values) == len(wanted)
    for value, want in zip(values, wanted, strict=True):
        assert value is None if want is None else value == pytest.approx(want, rel=1e-8)
    if line in {"centre", "lower", "upper"} and not isinstance(expected, list):
        in_force = number(tables.limits(example["id"], panel)[line])
        assert in_force is None if expected is None else in_force == pytest.approx(expected, rel=1e-8)


@pytest.mark.parametrize(("example", "panel"), PANELS, ids=[f"{e['id']}-{p}" for e, p in PANELS])
def test_points_outside_the_limits(tables: Tables, example: dict[str, Any], panel: str) -> None:
    expected = example["outside"][panel]
    points = tables.points(example["id"], panel)
    beyond = [
        int(point["order"])
        for point in points
        if point["value"]
        and ((point["upper"] and float(point["value"]) > float(point["upper"]) * (1 + 1e-12))
             or (point["lower"] and float(point["value"]) < float(point["lower"]) * (1 - 1e-12)))
    ]  # fmt: skip
    assert beyond == expected
    if (example["settings"]["chart"], panel) == ("individuals", "spread"):
        return  # moving ranges signal only when asked to
    assert [int(point["order"]) for point in points if "outside-limits" in point["rules"].split()] == expected
    signals = [s for s in tables.signals(example["id"], panel) if s["rule"] == "outside-limits"]
    covered = {k for s in signals for k in range(int(s["first_order"]), int(s["last_order"]) + 1)}
    assert sorted(covered) == expected


@pytest.mark.parametrize("example", EXAMPLES, ids=[e["id"] for e in EXAMPLES])
def test_every_row_sets_the_limits(tables: Tables, example: dict[str, Any]) -> None:
    panel = next(iter(example["outside"]))
    points = tables.points(example["id"], panel)
    assert len(points) == example["rows"]
    assert all(point["in_baseline"] == "1" for point in points)
    assert int(tables.limits(example["id"], panel)["points"]) == example["rows"]


# ------------------------------------------------- three-sigma limits of counts about a given centre


def attribute_rows() -> Table:
    """True tail probabilities of three-sigma limits, computed by exact binomial and Poisson sums."""
    return read_table(EXAMPLES_FOLDER / "three_sigma_attributes.csv")


ATTRIBUTES = [
    (k, row, chart)
    for k, row in enumerate(attribute_rows())
    for chart in (("np", "p") if row["n"] else ("c", "u"))
]
UNITS = 10  # opportunities at each point of the u charts


@pytest.fixture(scope="module")
def attribute_tables(tmp_path_factory: pytest.TempPathFactory) -> Tables:
    """Every possible count in turn, about a given centre."""
    folder = tmp_path_factory.mktemp("given-centres")
    text = ""
    for k, row, chart in ATTRIBUTES:
        n, centre = int(row["n"] or 0), float(row["centre"])
        divisor = {"np": 1, "p": n, "c": 1, "u": UNITS}[chart]
        size = {"np": str(n), "p": '"size"', "u": '"size"', "c": ""}[chart]
        top = n if n else math.ceil(float(row["ucl3"])) + 5
        column = n if n else UNITS
        counts = "".join(f"{x},{column}\n" for x in range(top + 1))
        (folder / f"{chart}-{k}.csv").write_text("x,size\n" + counts, encoding="utf-8")
        text += f'[[source]]\nid = "{chart}-{k}"\nfiles = ["{chart}-{k}.csv"]\n\n'
        text += f'[[characteristic]]\nid = "{chart}-{k}"\nsource = "{chart}-{k}"\n'
        text += f'chart = "{chart}"\ncount = "x"\n'
        text += f"size = {size}\n" if size else ""
        text += f"limits = {{ centre = {centre / divisor!r} }}\n\n"
    (folder / "holdsteady.toml").write_text(text, encoding="utf-8")
    build(folder)
    return Tables(folder=folder / "site" / "tables")


@pytest.mark.parametrize(
    ("k", "row", "chart"),
    ATTRIBUTES,
    ids=[f"{c}-{r['n'] or 'any'}-{r['p0_or_c0']}" for _, r, c in ATTRIBUTES],
)
def test_three_sigma_limits_of_counts(
    attribute_tables: Tables, k: int, row: dict[str, str], chart: str
) -> None:
    divisor = {"np": 1, "p": int(row["n"] or 0), "c": 1, "u": UNITS}[chart]
    points = attribute_tables.points(f"{chart}-{k}", "single")
    lower, upper = float(row["lcl3"]) / divisor, float(row["ucl3"]) / divisor
    for point in points:
        assert float(point["upper"]) == pytest.approx(upper, abs=1e-8)
        if lower <= 0:
            assert point["lower"] == ""
        else:
            assert float(point["lower"]) == pytest.approx(lower, abs=1e-8)
    law = binom(int(row["n"]), float(row["p0_or_c0"])) if row["n"] else poisson(float(row["p0_or_c0"]))
    inside = [x for x, point in enumerate(points) if "outside-limits" not in point["rules"].split()]
    below = float(law.cdf(inside[0] - 1))
    above = float(law.sf(inside[-1]))
    assert inside == list(range(inside[0], inside[-1] + 1))
    assert below == pytest.approx(float(row["p_below_strict"]), rel=1e-8, abs=1e-15)
    assert above == pytest.approx(float(row["p_above_strict"]), rel=1e-8)
