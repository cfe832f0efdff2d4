"""Readings, settings and contexts made by hand, so that the monitor can be tested without files."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any
from zoneinfo import ZoneInfo

import numpy as np

from holdsteady.intake.readings import Readings
from holdsteady.monitor.context import Context
from holdsteady.monitor.finding import Finding
from holdsteady.monitor.monitor import monitor
from holdsteady.project.logbook import LogbookEntry
from holdsteady.project.register import RegisterLine
from holdsteady.project.settings import Characteristic
from holdsteady.times import DAY

HOUR = 3_600_000_000
START = 1_767_225_600_000_000  # 2026-01-01T00:00Z, a Thursday


def readings(
    values: Sequence[float] | Sequence[Sequence[float]],
    *,
    size: Sequence[float] | None = None,
    subgroup: Sequence[str] | None = None,
    time: Sequence[int] | None = None,
    timed: bool = True,
    name: str = "bore",
) -> Readings:
    """One reading an hour from 2026-01-01T01:00Z on, unless told otherwise."""
    table = np.asarray(values, dtype=np.float64)
    table = table.reshape(len(table), -1)
    hours = START + HOUR * np.arange(1, len(table) + 1)
    return Readings(
        family=name.split("[", maxsplit=1)[0],
        name=name,
        each={},
        time=(np.asarray(time, dtype=np.int64) if time is not None else hours) if timed else None,
        values=table,
        size=None if size is None else np.asarray(size, dtype=np.float64),
        subgroup=None if subgroup is None else tuple(subgroup),
        file=np.zeros(len(table), dtype=np.int64),
        files=("a.csv",),
        line=np.arange(2, len(table) + 2),
    )


def settings(**given: Any) -> Characteristic:
    """A characteristic on single values of column x, unless told otherwise."""
    shape = {} if {"value", "values", "count"} & set(given) else {"value": "x"}
    return Characteristic.model_validate({"id": "bore", "source": "gauge", **shape, **given})


def context(
    as_of: int = START + 1000 * DAY,
    *,
    logbook: Sequence[LogbookEntry] = (),
    register: Sequence[RegisterLine] = (),
    watch_from: int | None = None,
    attention: int = 14 * DAY,
    zone: str = "UTC",
) -> Context:
    """A build that speaks of a moment long after the readings, unless told otherwise."""
    return Context(
        as_of=as_of,
        zone=ZoneInfo(zone),
        watch_from=watch_from,
        attention=attention,
        logbook=tuple(logbook),
        register=tuple(register),
    )


def entry(when: int, **given: Any) -> LogbookEntry:
    """A logbook line about the bore, entered when it happened."""
    plain: dict[str, Any] = {
        "line": 2, "entered": when, "until": None, "characteristic": "bore", "case": "", "gauge": "",
        "kind": "cause", "text": "Worn insert", "action": "", "exclude": False, "by": "A. R.",
    }  # fmt: skip
    return LogbookEntry(when=when, **{**plain, **given})


def adopted(in_force_from: int, centre: float, sigma: float | None, **given: Any) -> RegisterLine:
    """A line of the register for the location panel of the bore's individuals chart."""
    plain: dict[str, Any] = {
        "line": 2, "characteristic": "bore", "chart": "individuals", "panel": "location", "era_from": None,
        "parameters": {}, "width": 3.0, "rules": "", "n": 1.0, "points": 25, "baseline_from": None,
        "baseline_to": None, "excluded": 0, "estimator": "mean-moving-range", "reason": "25 quiet points",
        "by": "A. R.", "adopted_at": in_force_from, "version": "0", "check": "",
    }  # fmt: skip
    return RegisterLine(in_force_from=in_force_from, centre=centre, sigma=sigma, **{**plain, **given})


def find(
    values: Any, *, made: Context | None = None, given: dict[str, Any] | None = None, **how: Any
) -> Finding:
    """Compute one characteristic from values, `given` settings and a `made` context."""
    return monitor(readings(values, **how), settings(**(given or {})), made or context())
