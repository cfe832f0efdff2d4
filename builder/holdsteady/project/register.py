"""The limits register: every set of limits ever adopted, each line chained to the one before."""

from __future__ import annotations

import hashlib
import json
import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from zoneinfo import ZoneInfo

from holdsteady.problems import Problem, Severity
from holdsteady.project.csv_rows import CellError, Row, line_problem, read_moment, read_rows
from holdsteady.times import to_datetime

COLUMNS = (
    "characteristic", "chart", "panel", "era_from", "in_force_from", "centre", "sigma", "parameters",
    "width", "rules", "n", "points", "baseline_from", "baseline_to", "excluded", "estimator",
    "reason", "by", "adopted_at", "version", "check",
)  # fmt: skip
_RESTORE = "Put the line back as it was; limits change by adopting new ones."


@dataclass(frozen=True, slots=True, kw_only=True)
class RegisterLine:
    """One adopted set of limits of one panel. Times are microseconds UTC.

    `sigma` is that of a single reading, None for attribute charts. `era_from` is when the
    era begins, None for the first.
    """

    line: int
    characteristic: str  # a member's name, as in `bore[press=2]`
    chart: str
    panel: str
    era_from: int | None
    in_force_from: int
    centre: float
    sigma: float | None
    parameters: Mapping[str, object]
    width: float
    rules: str
    n: float | None
    points: int | None
    baseline_from: int | None
    baseline_to: int | None
    excluded: int | None
    estimator: str
    reason: str
    by: str
    adopted_at: int
    version: str
    check: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Register:
    """The whole register; `broken_at` is the first line whose check does not follow, or None."""

    lines: tuple[RegisterLine, ...] = ()
    last_check: str = ""
    broken_at: int | None = None
    problems: tuple[Problem, ...] = ()


def next_check(previous: str, cells: Sequence[str]) -> str:
    """Return the check of a line: SHA-256, in hex, of the check before it and its cells.

    `cells` are all columns but `check`, as parsed; `previous` is "" for the first line. The parts are
    joined by U+001F, which no spreadsheet writes, so that quoting and delimiters do not matter.
    """
    return hashlib.sha256("\x1f".join((previous, *cells)).encode("utf-8", "surrogateescape")).hexdigest()


def to_cells(line: RegisterLine, zone: ZoneInfo) -> tuple[str, ...]:
    """Return the cells of a line, all columns but `check`: floats at full precision, times with offset."""
    cells = {
        "characteristic": line.characteristic,
        "chart": line.chart,
        "panel": line.panel,
        "era_from": _moment_text(line.era_from, zone),
        "in_force_from": _moment_text(line.in_force_from, zone),
        "centre": _number_text(line.centre),
        "sigma": _number_text(line.sigma),
        "parameters": json.dumps(line.parameters, sort_keys=True) if line.parameters else "",
        "width": _number_text(line.width),
        "rules": line.rules,
        "n": _number_text(line.n),
        "points": _number_text(line.points),
        "baseline_from": _moment_text(line.baseline_from, zone),
        "baseline_to": _moment_text(line.baseline_to, zone),
        "excluded": _number_text(line.excluded),
        "estimator": line.estimator,
        "reason": line.reason,
        "by": line.by,
        "adopted_at": _moment_text(line.adopted_at, zone),
        "version": line.version,
    }
    return tuple(cells[column] for column in COLUMNS[:-1])


def read_register(path: Path, zone: ZoneInfo) -> Register:
    """Read `limits.csv` and verify its chain; one that is not there is empty.

    A line whose check does not follow from the line before is named, and used nevertheless. A line that
    cannot be read is named and left out. Times without an offset are local to `zone`.
    """
    table = read_rows(path, COLUMNS, COLUMNS)
    problems = list(table.problems)
    lines: list[RegisterLine] = []
    broken: list[int] = []
    check = ""
    for row in table.rows:
        *cells, stated = row.cells
        if stated != next_check(check, cells):
            broken.append(row.line)
            problems.append(_broken(path.name, row.line))
        check = stated
        try:
            lines.append(_line(row, zone))
        except CellError as error:
            what, remedy = error.args
            problems.append(line_problem(path.name, row.line, what, remedy))
    return Register(
        lines=tuple(lines),
        last_check=check,
        broken_at=min([*broken, *table.lost], default=None),
        problems=tuple(sorted(problems, key=lambda p: p.line or 0)),
    )


def _broken(file: str, line: int) -> Problem:
    return Problem(
        severity=Severity.WARNING,
        where=file,
        what="the check of this line does not follow: it, or a line before it, was edited, moved or removed",
        remedy="Put the file back as it was, from a copy; limits change by adopting new ones.",
        line=line,
    )


def _line(row: Row, zone: ZoneInfo) -> RegisterLine:
    cell = dict(zip(COLUMNS, row.cells, strict=True))
    for column in ("characteristic", "chart", "panel", "in_force_from", "centre", "width", "adopted_at"):
        if not cell[column].strip():
            raise CellError(f"`{column}` is empty", _RESTORE)
    return RegisterLine(
        line=row.line,
        characteristic=cell["characteristic"],
        chart=cell["chart"],
        panel=cell["panel"],
        era_from=_moment(cell, "era_from", zone),
        in_force_from=read_moment("in_force_from", cell["in_force_from"], zone),
        centre=_float(cell, "centre"),
        sigma=_float(cell, "sigma") if cell["sigma"] else None,
        parameters=_parameters(cell["parameters"]),
        width=_float(cell, "width"),
        rules=cell["rules"],
        n=_float(cell, "n") if cell["n"] else None,
        points=_whole(cell, "points"),
        baseline_from=_moment(cell, "baseline_from", zone),
        baseline_to=_moment(cell, "baseline_to", zone),
        excluded=_whole(cell, "excluded"),
        estimator=cell["estimator"],
        reason=cell["reason"],
        by=cell["by"],
        adopted_at=read_moment("adopted_at", cell["adopted_at"], zone),
        version=cell["version"],
        check=cell["check"],
    )


def _moment(cell: Mapping[str, str], column: str, zone: ZoneInfo) -> int | None:
    return read_moment(column, cell[column], zone) if cell[column] else None


def _float(cell: Mapping[str, str], column: str) -> float:
    try:
        number = float(cell[column])
    except ValueError:
        number = math.nan
    if not math.isfinite(number):
        raise CellError(f"`{column}` is no number: '{cell[column]}'", _RESTORE)
    return number


def _whole(cell: Mapping[str, str], column: str) -> int | None:
    if not cell[column]:
        return None
    if not (cell[column].isascii() and cell[column].isdigit()):
        raise CellError(f"`{column}` is no whole number: '{cell[column]}'", _RESTORE)
    return int(cell[column])


def _parameters(text: str) -> Mapping[str, object]:
    try:
        parameters = json.loads(text) if text else {}
    except ValueError:
        parameters = None
    if not isinstance(parameters, dict):
        raise CellError(f"`parameters` is no JSON object: '{text}'", _RESTORE)
    return parameters


def _moment_text(moment: int | None, zone: ZoneInfo) -> str:
    return "" if moment is None else to_datetime(moment, zone).isoformat()


def _number_text(number: float | None) -> str:
    """Write a number so that it reads back the same; whole ones plain, as spreadsheets save them."""
    if number is None:
        return ""
    return str(int(number)) if number == int(number) and abs(number) < 1e15 else repr(float(number))
