"""Findings made by hand, so that pages and charts can be tested without any statistics."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np

from holdsteady.arrays import Bools, Floats, Ints
from holdsteady.monitor.finding import (
    Calculation,
    Case,
    Direction,
    Era,
    Finding,
    LevelSummary,
    LimitsInForce,
    Panel,
    Points,
    Signal,
    State,
)
from holdsteady.project.logbook import LogbookEntry
from holdsteady.project.settings import Characteristic, Specification
from holdsteady.spc.rules import Rule

HOUR = 3_600_000_000
AS_OF = 1_773_756_600_000_000  # 2026-03-17T14:10Z

OUTSIDE = Rule(name="outside-limits", points=1, of=1)
RUN = Rule(name="run-one-side", points=9, of=9)
# chart -> statistic of its single panel, centre, sigma, whether its values are whole
ATTRIBUTES = {
    "p": ("fraction", 0.022, 0.004, False),
    "np": ("count", 4.4, 2.1, True),
    "c": ("count", 4.0, 2.0, True),
    "u": ("rate", 0.31, 0.05, False),
}
LOCATIONS = {"individuals": "value", "mean-range": "mean", "mean-sd": "mean", "median-range": "median"}
SPREADS = {"individuals": "moving-range", "mean-range": "range", "mean-sd": "s", "median-range": "range"}
ENTRY = LogbookEntry(
    line=4,
    entered=AS_OF - 400 * HOUR,
    when=AS_OF - 420 * HOUR,
    until=AS_OF - 400 * HOUR,
    characteristic="bore",
    case="",
    gauge="",
    kind="cause",
    text="Binder lot 118 was too dry",
    action="Lot returned",
    exclude=False,
    by="A. R.",
)


def panel(
    name: str,
    statistic: str,
    value: Floats,
    lines: tuple[float, float, float, float],
    met: dict[str, Ints],
    judged: Bools,
) -> Panel:
    """A panel on constant limits: (centre, lower, upper, sigma), NaN for none."""
    n = len(value)
    centre, lower, upper, sigma = (np.full(n, line) for line in lines)
    return Panel(
        name=name,
        statistic=statistic,
        value=value,
        centre=centre,
        lower=lower,
        upper=upper,
        sigma=sigma,
        z=(value - centre) / sigma,
        in_baseline=np.arange(n) < 25,
        judged=judged,
        rules=(OUTSIDE, RUN) if name == "location" else (OUTSIDE,),
        met=met,
        refused_rules={},
    )


def finding(
    identifier: str,
    *,
    chart: str = "mean-range",
    state: State = "steady",
    area: str = "Pressing",
    title: str = "",
    unit: str = "mm",
    n: int = 90,
    shift: float = 0.0,
    answered: bool = False,
    timed: bool = True,
    seed: int = 0,
    **extra: Any,
) -> Finding:
    """One finding with its last 18 points shifted by `shift` sigma; a shift makes one case."""
    rng = np.random.default_rng(seed)
    two = chart in ("individuals", "mean-range", "mean-sd", "median-range")
    z = rng.normal(size=n).clip(-2.4, 2.4)
    first = n - 18
    if shift:
        z[first:] += shift
    run = np.zeros(n, dtype=np.int64)
    cases: tuple[Case, ...] = ()
    signals: tuple[Signal, ...] = ()
    direction: Direction = "high" if shift > 0 else "low"
    if shift:
        run[first + 8 :] = 1 if shift > 0 else -1
        signals = (
            Signal(
                id=f"s-{identifier}1",
                case=f"c-{identifier}1",
                panel="location" if two else "single",
                rule="run-one-side",
                direction=direction,
                first_index=first,
                fired_index=first + 8,
                last_index=n - 1,
                ongoing=True,
            ),
        )
        cases = (
            Case(
                id=f"c-{identifier}1",
                aliases=(f"c-{identifier}1",),
                state="answered" if answered else "open",
                direction=direction,
                panel=signals[0].panel,
                first_index=first,
                fired_index=first + 8,
                last_index=n - 1,
                ongoing=True,
                signals=(signals[0].id,),
                answered_by=(ENTRY,) if answered else (),
                start_index=first,
                start_low_index=first - 2,
                start_high_index=first + 1,
                shift=shift * ATTRIBUTES.get(chart, ("", 0, 0.0036, False))[2],
                shift_sigma=shift,
                outside_specification=0 if two else None,
                readings=90,
                good_way=False,
                gross=False,
            ),
        )
    settings = Characteristic(
        id=identifier.partition("[")[0],
        title=title or identifier,
        area=area,
        source="press",
        value="bore_mm",
        unit=unit,
        decimals=3 if two else None,
        specification=(Specification(lower=11.95, target=12.0, upper=12.05),) if two else (),
        gauge="CMM-2",
        reaction="Stop the press, quarantine the last box, call the setter.",
        owner="Pressing cell",
        **extra,
    )
    judged = np.ones(n, dtype=np.bool_)
    none = {"outside-limits": np.zeros(n, dtype=np.int64)}
    statistic, centre, sigma, whole = ATTRIBUTES.get(
        chart, (LOCATIONS.get(chart, "mean"), 12.0, 0.0036, False)
    )
    plotted = centre + sigma * z if not whole else np.maximum(np.round(centre + sigma * z), 0)
    lower = centre - 3 * sigma
    location = panel(
        "location" if two else "single",
        statistic,
        plotted,
        (centre, lower if lower > 0 else np.nan, centre + 3 * sigma, sigma),
        none | {"run-one-side": run},
        judged,
    )
    panels: tuple[Panel, ...] = (location,)
    if two:
        spread = np.abs(rng.normal(0.0187, 0.005, size=n))
        panels = (
            location,
            panel("spread", SPREADS[chart], spread, (0.0187, np.nan, 0.0395, 0.0069), none, judged),
        )
    index = np.arange(n, dtype=np.int64)
    time = AS_OF - (n - 1 - index) * 2 * HOUR if timed else None
    points = Points(
        time=time,
        label=tuple(f"S{i}" for i in range(n)),
        n=np.full(n, 5.0),
        file=index * 0,
        files=("press/p2.csv",),
        line=index + 2,
        era=index * 0 + 1,
        segment=index * 0,
        excluded=index == 30,
        faulty=index == 31,
        open=index < 0,
        side=np.zeros(n, dtype=np.int8),
    )
    empty = state in ("not-computed",)
    rows = tuple(
        LimitsInForce(
            era=1,
            panel=p.name,
            kind="adopted",
            at_index=n - 1,
            limited=True,
            start_index=0,
            stop_index=n,
            in_force_from=AS_OF - 100 * HOUR,
            centre=float(p.centre[0]),
            sigma=0.00804 if two else None,
            lower=None if np.isnan(p.lower[0]) else float(p.lower[0]),
            upper=float(p.upper[0]),
            varies=False,
            n=5.0,
            points=25,
            baseline_from=int(time[0]) if time is not None else None,
            baseline_to=int(time[24]) if time is not None else None,
            excluded=1,
            estimator="mean-range",
            note="",
            reason="25 quiet samples",
            by="A. R.",
            adopted_at=AS_OF - 100 * HOUR,
        )
        for p in panels
    )
    if state == "gathering":
        few: dict[str, Any] = {"kind": "provisional", "limited": False, "estimator": "median"}
        few |= dict.fromkeys(("lower", "upper", "sigma", "adopted_at", "in_force_from"))
        rows = (
            replace(rows[0], points=min(n, 7), excluded=0, note="too few points", reason="", by="", **few),
        )
    return Finding(
        name=identifier,
        slug=identifier.replace("[", "-").replace("=", "-").replace("]", ""),
        title=title or identifier,
        settings=settings,
        chart=chart,
        state=state,
        flags=("provisional-limits",) if state == "gathering" else (),
        reason="no file matches press/*.csv" if empty else "",
        remedy="Check `files` of source press." if empty else "",
        readings=0 if empty else n * 5,
        censored=0,
        points=None if empty else points,
        panels=() if empty else panels,
        eras=()
        if empty
        else (Era(number=1, start_index=0, stop_index=n, from_time=None, entry=None, action="learn"),),
        limits=() if empty else rows,
        signals=signals,
        cases=cases,
        logbook=(ENTRY,) if answered else (),
        specification=settings.specification,
        calculation=(
            Calculation(
                method="sigma = mean range / d2",
                in_force=False,
                points=25,
                figures=(
                    ("mean range", 0.0187, True),
                    ("d2 for n = 5", 2.326, False),
                    ("sigma", 0.00804, True),
                ),
                source="ISO 7870-2:2013",
            ),
        ),
        summaries=(LevelSummary(era=1, n=450, mean=12.0, sigma_total=0.008, outside_observed=0),),
        overdispersion=1.1 if chart in ("p", "u") else None,
        sigma_ratio=None,
        resolution=0.001,
        silent_since=int(time[-1]) if time is not None and state == "silent" else None,
        common_n=None if chart in ("individuals", "p", "u") else 5.0,
        doubts=(),
    )


def all_findings() -> tuple[Finding, ...]:
    """A small plant: every state once, both kinds of page, text that tries to break out."""
    return (
        finding("bore[press=1]", title="Bore diameter, press 1", seed=1),
        finding("bore[press=2]", title="Bore diameter, press 2", state="signalling", shift=-1.9, seed=2),
        finding(
            "stops",
            chart="c",
            title="Press stops",
            unit="",
            state="answered",
            shift=1.8,
            answered=True,
            seed=3,
        ),
        finding(
            "burst",
            title="Burst pressure",
            area="Firing",
            unit="bar",
            state="signalling",
            shift=2.2,
            seed=4,
            class_="safety",
        ),
        finding("peak", chart="individuals", title="Kiln peak temperature", area="Firing", unit="°C", seed=5),
        finding("pinholes", chart="p", title="Pinhole rejects, line 1", area="Inspection", unit="", seed=6),
        finding("flow", title="Flow at 1 bar", area="Inspection", unit="l/min", state="silent", seed=7),
        finding(
            "glaze",
            chart="u",
            title="Glaze specks",
            area="Inspection",
            unit="",
            state="gathering",
            n=5,
            timed=False,
            seed=8,
        ),
        finding(
            "none",
            title="</script><img src=x onerror=alert(1)>\"'",
            area="Inspection & <b>more</b>",
            state="not-computed",
            seed=9,
        ),
    )
