"""Small random projects: rounded data, so that ties happen and points lie on limits; logbooks, registers."""

from __future__ import annotations

import datetime as dt
import math
from dataclasses import dataclass, field, replace
from typing import Any

from hypothesis import strategies as st
from tests.made_readings import HOUR, START, adopted, context, entry, readings, settings
from tests.naive_way_factors import c4, d2

from holdsteady.intake.readings import Readings
from holdsteady.monitor.context import Context
from holdsteady.monitor.finding import Finding
from holdsteady.monitor.gather import up_to
from holdsteady.monitor.monitor import monitor
from holdsteady.project.settings import Characteristic

SUBGROUPED = ("mean-range", "mean-sd", "median-range")
COUNTED = ("p", "np", "c", "u")
CHARTS = ("individuals", *SUBGROUPED, *COUNTED)
RULES = (
    "outside-limits", "two-of-three", "four-of-five", "run-one-side",
    "trend", "alternating", "hugging", "avoiding-centre",
)  # fmt: skip
WESTERN_ELECTRIC: list[dict[str, Any]] = [
    {"rule": "outside-limits"}, {"rule": "two-of-three"}, {"rule": "four-of-five"},
    {"rule": "run-one-side", "points": 8},
]  # fmt: skip


@dataclass(frozen=True)
class Project:
    """Everything that goes into one characteristic, in a form that can be changed and made again."""

    given: dict[str, Any]
    values: list[list[float]]
    size: list[float] | None = None
    subgroup: list[str] | None = None
    time: list[int] | None = None
    logbook: list[dict[str, Any]] = field(default_factory=list)
    register: list[dict[str, Any]] = field(default_factory=list)
    as_of: int = 0
    watch_from: int | None = None
    zone: str = "UTC"

    @property
    def readings(self) -> Readings:
        how = {
            "size": self.size,
            "subgroup": self.subgroup,
            "time": self.time,
            "timed": self.time is not None,
        }
        return readings(self.values, **how)  # type: ignore[arg-type]

    @property
    def settings(self) -> Characteristic:
        return settings(**self.given)

    @property
    def context(self) -> Context:
        lines = [entry(**{**one, "line": number}) for number, one in enumerate(self.logbook, start=2)]
        register = [adopted(**{**one, "line": number}) for number, one in enumerate(self.register, start=2)]
        how = {"watch_from": self.watch_from, "attention": 48 * HOUR, "zone": self.zone}
        return context(self.as_of, logbook=lines, register=register, **how)  # type: ignore[arg-type]

    def find(self) -> Finding:
        return monitor(up_to(self.readings, self.as_of), self.settings, self.context)

    def moved(self, factor: float, shift: float) -> Project:
        """Return the project on another scale: each value times a factor (not 0), plus a shift."""
        given = dict(self.given)
        if "limits" in given:
            given["limits"] = [
                {**one, "centre": one["centre"] * factor + shift, "sigma": one["sigma"] * abs(factor)}
                for one in given["limits"]
            ]
        register = []
        for one in self.register:
            base = shift if one["panel"] == "location" else 0.0
            scale = factor if one["panel"] == "location" else abs(factor)
            register.append(
                {**one, "centre": one["centre"] * scale + base, "sigma": one["sigma"] * abs(factor)}
            )
        values = [[value * factor + shift for value in row] for row in self.values]
        return replace(self, given=given, register=register, values=values)

    def without(self, rows: set[int]) -> Project:
        """Return the project without some of its readings."""
        kept = [row for row in range(len(self.values)) if row not in rows]
        return replace(
            self,
            values=[self.values[row] for row in kept],
            size=None if self.size is None else [self.size[row] for row in kept],
            subgroup=None if self.subgroup is None else [self.subgroup[row] for row in kept],
            time=None if self.time is None else [self.time[row] for row in kept],
        )

    def cut(self, count: int) -> Project:
        """Return the project as it stood after its first `count` readings."""
        return self.without(set(range(count, len(self.values))))


@st.composite
def projects(  # noqa: C901
    draw: st.DrawFn,
    charts: tuple[str, ...] = CHARTS,
    *,
    least: int = 1,
    given_limits: bool | None = None,
    written: bool = True,
) -> Project:
    """Draw a project; `given_limits` insists unless None; not `written`: logbook and register are empty."""
    chart = draw(st.sampled_from(charts))
    count = draw(st.integers(least, 120))
    given: dict[str, Any] = {"chart": chart, "gauge": draw(st.sampled_from(["", "G1"]))}
    timed = draw(st.integers(0, 9)) > 0
    time = draw(times(count)) if timed else None
    if timed and draw(st.booleans()):
        given["gap"] = "5h"
    size = subgroup = None
    if chart in COUNTED:
        given["count"] = "x"
        values, size = draw(counts(chart, count))
        if size is not None:
            given["size"] = "n"
        if chart in ("p", "u") and draw(st.integers(0, 3)) == 0:
            given["subgroup"] = {"size": 2}
    else:
        wide = 1
        if chart != "individuals":
            how = draw(
                st.sampled_from(["column", "size", "every", "wide"] if timed else ["column", "size", "wide"])
            )
            if how == "wide":
                wide = draw(st.sampled_from([2, 3, 4, 8]))
                count = min(count, 240 // wide)
                time = None if time is None else time[:count]
                given["values"] = [f"x{number}" for number in range(wide)]
            elif how == "column":
                given["subgroup"] = {"column": "s"}
                subgroup = draw(labels(count))
            elif how == "size":
                given["subgroup"] = {"size": draw(st.integers(2, 4))}
            else:
                given["subgroup"] = {"every": draw(st.sampled_from(["2h", "4h", "90m"]))}
        values = draw(measured(count, wide))
    given.update(draw(choices(chart, timed=timed, given_limits=given_limits)))
    as_of = START + draw(st.sampled_from([240, 1000])) * HOUR
    project = Project(given=given, values=values, size=size, subgroup=subgroup, time=time, as_of=as_of)
    if timed:
        project = replace(
            project,
            zone=draw(st.sampled_from(["UTC", "Europe/Lisbon", "Asia/Kolkata"])),
            watch_from=draw(st.sampled_from([None, START + 40 * HOUR])),
        )
    if timed and written:
        logbook = draw(st.lists(logbook_lines(), max_size=4))
        logbook = [
            *logbook,
            *[
                process_change(h, a)
                for h, a in draw(
                    st.dictionaries(
                        st.integers(-1, 130),
                        st.sampled_from(["", "learn", "keep-sigma", "keep-limits"]),
                        max_size=2,
                    )
                ).items()
            ],
        ]
        project = replace(project, logbook=sorted(logbook, key=lambda one: one["when"]))
        project = replace(project, register=draw(register_lines(project)))
    return project


@st.composite
def times(draw: st.DrawFn, count: int) -> list[int]:
    steps = draw(st.lists(st.sampled_from([1, 1, 1, 1, 1, 1, 2, 0, 5, 10]), min_size=count, max_size=count))
    if draw(st.booleans()):
        steps = [1] * count
    time, hour = [], 0
    for step in steps:
        hour += step
        time.append(START + hour * HOUR)
    return time


def labels(count: int) -> st.SearchStrategy[list[str]]:
    def spell(runs: list[int]) -> list[str]:
        text = [f"lot {number}" for number, run in enumerate(runs) for _ in range(run)]
        return (text + [f"rest {i // 3}" for i in range(count)])[:count]

    return st.lists(st.integers(1, 4), max_size=count).map(spell)


@st.composite
def measured(draw: st.DrawFn, count: int, wide: int) -> list[list[float]]:
    """Quarters or tenths around 10, with a stretch that lies elsewhere; some empty cells in wide rows."""
    step = draw(st.sampled_from([4, 10]))
    reach = draw(st.sampled_from([1, 4, 12]))
    cells = draw(st.lists(st.integers(-reach, reach), min_size=count * wide, max_size=count * wide))
    shift, start, length = draw(st.integers(-16, 16)), draw(st.integers(0, 120)), draw(st.integers(0, 30))
    slope = draw(st.sampled_from([0, 0, 2, -2]))
    empty = draw(st.sets(st.integers(0, max(0, count * wide - 1)), max_size=6)) if wide > 1 else set()
    table = []
    for row in range(count):
        moved = shift + slope * (row - start) if start <= row < start + length else 0
        line = [10 + (cells[row * wide + k] + moved) / step for k in range(wide)]
        line[1:] = [math.nan if row * wide + k in empty else line[k] for k in range(1, wide)]
        table.append(line)
    return table


@st.composite
def counts(draw: st.DrawFn, chart: str, count: int) -> tuple[list[list[float]], list[float] | None]:
    most = draw(st.sampled_from([3, 12, 30]))
    found = draw(st.lists(st.integers(0, most), min_size=count, max_size=count))
    shift, start, length = draw(st.integers(0, 20)), draw(st.integers(0, 120)), draw(st.integers(0, 30))
    slope = draw(st.sampled_from([0, 0, 2, -2]))
    moved = [shift + slope * (i - start) if start <= i < start + length else 0 for i in range(count)]
    found = [min(50, max(0, x + more)) for x, more in zip(found, moved, strict=True)]
    values = [[float(x)] for x in found]
    if chart == "c":
        return values, None
    pool = {"p": [50.0, 60.0, 80.0, 200.0], "np": [60.0], "u": [1.0, 1.5, 2.0, 4.0]}[chart]
    pool = pool[: draw(st.integers(1, 4))]
    return values, draw(st.lists(st.sampled_from(pool), min_size=count, max_size=count))


@st.composite
def choices(draw: st.DrawFn, chart: str, *, timed: bool, given_limits: bool | None) -> dict[str, Any]:
    """Draw what a characteristic may say of its chart, whatever its data."""
    made: dict[str, Any] = {"width": draw(st.sampled_from([3.0, 3.0, 2.0, 3.5]))}
    rules = draw(
        st.one_of(
            st.none(), st.just(WESTERN_ELECTRIC), st.just([{"rule": name} for name in RULES]), own_rules()
        )
    )
    if rules is not None:
        made["rules"] = rules
    if draw(st.integers(0, 4)) == 0 and timed:
        begin = draw(st.integers(0, 40))
        made["baseline"] = {"from": moment(begin), "to": moment(begin + draw(st.integers(10, 80)))}
    else:
        made["baseline"] = {"points": draw(st.integers(8, 30))}
    if chart == "individuals":
        made["chart_options"] = {
            "moving_range_limit": draw(st.sampled_from(["probability", "three-sigma"])),
            "moving_range_signals": draw(st.booleans()),
        }
        made["estimator"] = draw(st.sampled_from([None, "mean-moving-range", "median-moving-range"]))
    elif chart in SUBGROUPED:
        made["estimator"] = draw(st.sampled_from([None, None, "mean-range", "mean-s", "pooled", "weighted"]))
    wanted = draw(st.integers(0, 3)) == 0 if given_limits is None else given_limits
    if wanted:
        made["limits"] = [draw(given_line(chart))]
        if timed and given_limits is None and draw(st.booleans()):
            made["limits"] = [
                {**made["limits"][0], **({"from": moment(15)} if draw(st.booleans()) else {})},
                {**draw(given_line(chart)), "from": moment(draw(st.integers(20, 90)))},
            ]
    return made


def moment(hour: int) -> dt.datetime:
    return dt.datetime(2026, 1, 1, tzinfo=dt.UTC) + dt.timedelta(hours=hour)


def own_rules() -> st.SearchStrategy[list[dict[str, Any]]]:
    rules: list[dict[str, Any]] = [
        {"rule": "outside-limits"},
        {"rule": "two-of-three", "points": 2, "of": 4},
        {"rule": "four-of-five", "points": 3},
        {"rule": "run-one-side"},
        {"rule": "run-one-side", "points": 5},
        {"rule": "trend", "points": 4},
        {"rule": "alternating", "points": 5},
        {"rule": "hugging", "points": 4},
        {"rule": "avoiding-centre", "points": 4},
    ]
    one = st.sampled_from(rules)
    return st.lists(one, min_size=1, max_size=6, unique_by=lambda rule: rule["rule"])


@st.composite
def given_line(draw: st.DrawFn, chart: str) -> dict[str, Any]:
    if chart == "p":
        return {"centre": draw(st.sampled_from([0.02, 0.1, 0.16, 0.3]))}
    if chart in ("np", "c"):
        return {"centre": draw(st.sampled_from([1.5, 4.0, 6.0, 9.0, 15.5]))}
    if chart == "u":
        return {"centre": draw(st.sampled_from([1.5, 4.0, 9.0]))}
    return {
        "centre": draw(st.sampled_from([9.7, 9.75, 10.0, 10.1])),
        "sigma": draw(st.sampled_from([0.1, 0.25, 0.3, 1.0])),
    }


@st.composite
def logbook_lines(draw: st.DrawFn) -> dict[str, Any]:
    hour, length = draw(st.integers(-2, 60)), draw(st.sampled_from([None, None, 0, 1, 3, 20]))
    named = draw(st.sampled_from([("bore", ""), ("bore", ""), ("", "G1"), ("*", ""), ("other", "")]))
    return {
        "when": START + hour * HOUR,
        "until": None if length is None else START + (hour + length) * HOUR,
        "characteristic": named[0],
        "gauge": named[1],
        "kind": draw(st.sampled_from(["cause", "measurement-fault", "note"])),
        "exclude": draw(st.booleans()),
    }


def process_change(hour: int, action: str) -> dict[str, Any]:
    return {"when": START + hour * HOUR, "kind": "process-change", "action": action}


@st.composite
def register_lines(draw: st.DrawFn, project: Project) -> list[dict[str, Any]]:
    """Draw adopted sets, each for all panels; the spread's centre follows from sigma."""
    chart = project.given["chart"]
    eras = [None, *[one["when"] for one in project.logbook if one["kind"] == "process-change"]]
    lines: list[dict[str, Any]] = []
    for hour in sorted(draw(st.sets(st.integers(0, 130), max_size=2))):
        basis = draw(given_line(chart))
        line = {
            "chart": chart,
            "in_force_from": START + hour * HOUR,
            "era_from": draw(st.sampled_from(eras)),
            "width": draw(st.sampled_from([3.0, 2.5])),
            "baseline_from": START + draw(st.integers(0, 40)) * HOUR,
            "baseline_to": START + draw(st.integers(10, 90)) * HOUR,
        }
        if chart in COUNTED:
            lines.append({**line, "panel": "single", "centre": basis["centre"], "sigma": None})
            continue
        n = common_n(project)
        factor = c4(n) if chart == "mean-sd" else d2(n)
        lines.append({**line, "panel": "location", **basis, "n": n})
        lines.append(
            {**line, "panel": "spread", "centre": factor * basis["sigma"], "sigma": basis["sigma"], "n": n}
        )
    return lines


def common_n(project: Project) -> int:
    how = project.given.get("subgroup", {})
    return how.get("size") or max(2, len(project.given.get("values", ())))
