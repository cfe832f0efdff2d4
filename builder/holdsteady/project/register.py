"""The limits register: every set of limits ever adopted, each line chained to the one before."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from holdsteady.problems import Problem

COLUMNS = (
    "characteristic", "chart", "panel", "era_from", "in_force_from", "centre", "sigma", "parameters",
    "width", "rules", "n", "points", "baseline_from", "baseline_to", "excluded", "estimator",
    "reason", "by", "adopted_at", "version", "check",
)  # fmt: skip


@dataclass(frozen=True, slots=True, kw_only=True)
class RegisterLine:
    """One adopted set of limits of one panel. Times are microseconds UTC; `sigma` is that of a single reading.

    `era_from` is the time at which the era begins, None for the first era.
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
