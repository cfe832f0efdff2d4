"""Findings that try a chart: two eras, unequal n, one point, no limits, thousands of points, hostile text."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from tests.made_findings import AS_OF, HOUR, finding

from holdsteady.monitor.finding import Case, Era, Finding, Signal
from holdsteady.project.logbook import Kind, LogbookEntry

HOSTILE = "</script><img src=x onerror=alert(1)>\u2028\u2029'\"&amp;<b>"


def entry(line: int, hours_ago: int, text: str, *, kind: Kind = "note", hours: int = 0) -> LogbookEntry:
    when = AS_OF - hours_ago * HOUR
    return LogbookEntry(
        line=line,
        entered=when,
        when=when,
        until=when + hours * HOUR if hours else None,
        characteristic="bore",
        case="",
        gauge="",
        kind=kind,
        text=text,
        action="",
        exclude=False,
        by="A. R.",
    )


def two_eras(*, n: int = 140, chart: str = "mean-range") -> Finding:
    """A new die half-way, adopted limits before it and provisional ones since, three cases, four entries."""
    made = finding(
        "bore", title="Bore diameter, press 2", chart=chart, state="signalling", shift=-1.9, n=n, seed=11
    )
    half = n // 2
    assert made.points is not None
    panels, limits = [], []
    for panel, row in zip(made.panels, made.limits, strict=True):
        centre, lower, upper = panel.centre.copy(), panel.lower.copy(), panel.upper.copy()
        value = panel.value.copy()
        if panel.name == "location":
            for line in (centre, lower, upper, value):
                line[:half] += 0.012
        panels.append(
            replace(
                panel,
                value=value,
                centre=centre,
                lower=lower,
                upper=upper,
                in_baseline=(np.arange(n) % half) < 25,
            )
        )
        low = None if np.isnan(lower[0]) else float(lower[0])
        first = replace(
            row, start_index=0, stop_index=half, centre=float(centre[0]), lower=low, upper=float(upper[0])
        )
        limits += [
            first,
            replace(
                row, era=2, kind="provisional", start_index=half, stop_index=n, in_force_from=None, by=""
            ),
        ]
    die = entry(9, (n - half) * 2 - 1, "new die", kind="process-change")
    eras = (
        Era(number=1, start_index=0, stop_index=half, from_time=None, entry=None, action="learn"),
        Era(number=2, start_index=half, stop_index=n, from_time=die.when, entry=die, action="learn"),
    )
    older = replace(
        made.cases[0],
        id="c-old",
        state="answered",
        first_index=20,
        last_index=31,
        fired_index=28,
        direction="high",
        ongoing=False,
    )
    wide = Case(
        id="c-wide",
        aliases=(),
        state="open",
        direction="high",
        panel="spread",
        first_index=n - 9,
        fired_index=n - 9,
        last_index=n - 5,
        ongoing=False,
        signals=("s-wide",),
        answered_by=(),
        start_index=None,
        start_low_index=None,
        start_high_index=None,
        shift=None,
        shift_sigma=None,
        outside_specification=0,
        readings=25,
        good_way=False,
        gross=False,
    )
    past = replace(
        older, id="c-past", state="ended", first_index=half + 8, last_index=half + 8, fired_index=half + 8
    )
    signal = Signal(
        id="s-wide",
        case="c-wide",
        panel="spread",
        rule="outside-limits",
        direction="high",
        first_index=n - 9,
        fired_index=n - 9,
        last_index=n - 5,
        ongoing=False,
    )
    points = replace(
        made.points,
        era=np.where(np.arange(n) < half, 1, 2),
        segment=np.where(np.arange(n) < half, 0, 1),
        open=np.arange(n) == n - 1,
        side=np.zeros(n, dtype=np.int8),
    )
    log = (
        die,
        entry(3, n * 2 - 50, "gauge 4 recalibrated; two points left out"),
        entry(4, n - 10, "Binder lot 118 was too dry", hours=30),
        entry(
            5,
            n - 20,
            "setter changed the shift pattern and wrote a very long line, longer than any margin allows",
        ),
    )
    return replace(
        made,
        points=points,
        panels=tuple(panels),
        limits=tuple(limits),
        eras=eras,
        cases=(older, past, *made.cases, wide),
        signals=(*made.signals, signal),
        logbook=log,
    )


def unequal(chart: str) -> Finding:
    """Limits that differ from point to point."""
    made = finding(
        "pinholes",
        title="Pinhole rejects, line 1",
        chart=chart,
        shift=2.4,
        state="signalling",
        unit="mm" if chart == "mean-sd" else "",
        seed=12,
    )
    assert made.points is not None
    n = np.random.default_rng(5).choice([3.0, 4.0, 5.0, 8.0, 20.0], size=90)
    panels = []
    for panel in made.panels:
        wide = np.sqrt(5.0 / n)
        sigma = panel.sigma * wide
        lower = panel.centre - 3 * sigma
        lower[lower <= 0] = np.nan
        panels.append(replace(panel, lower=lower, upper=panel.centre + 3 * sigma, sigma=sigma))
    limits = tuple(
        replace(row, varies=True, centre=None, lower=None, upper=None, n=None) for row in made.limits
    )
    return replace(made, points=replace(made.points, n=n), panels=tuple(panels), limits=limits, common_n=None)


def without_limits(made: Finding) -> Finding:
    """The same, gathering: no limit anywhere, the centre alone."""
    panels = tuple(
        replace(p, lower=p.lower * np.nan, upper=p.upper * np.nan, sigma=p.sigma * np.nan, z=p.z * np.nan)
        for p in made.panels
    )
    limits = tuple(
        replace(row, lower=None, upper=None, sigma=None, kind="provisional", in_force_from=None)
        for row in made.limits
    )
    return replace(made, panels=panels, limits=limits, cases=(), signals=(), state="gathering")


def one_point() -> Finding:
    """A single point, and no moving range."""
    made = without_limits(
        finding("peak", title="Kiln peak temperature", chart="individuals", n=60, unit="°C")
    )
    assert made.points is not None
    names = ("time", "label", "n", "file", "line", "era", "segment", "excluded", "faulty", "open", "side")
    cut = {name: getattr(made.points, name)[:1] for name in names}
    columns = ("value", "centre", "lower", "upper", "sigma", "z", "in_baseline", "judged")
    panels = [replace(p, **{c: getattr(p, c)[:1] for c in columns}) for p in made.panels]
    panels[1] = replace(panels[1], value=np.array([np.nan]), centre=np.array([np.nan]))
    limits = tuple(
        replace(row, stop_index=1, centre=None if row.panel == "spread" else row.centre)
        for row in made.limits
    )
    return replace(
        made,
        points=replace(made.points, **cut),
        panels=tuple(panels),
        limits=limits,
        eras=(replace(made.eras[0], stop_index=1),),
    )


def long(n: int = 5_000) -> Finding:
    """Thousands of points with a flagged one here and there."""
    return finding("flow", title="Flow at 1 bar", n=n, shift=2.2, state="signalling", seed=13)


def hostile() -> Finding:
    """Text that tries to break out, wherever text may stand."""
    made = two_eras()
    settings = made.settings.model_copy(update={"unit": HOSTILE, "title": HOSTILE})
    log = tuple(replace(line, text=HOSTILE) for line in made.logbook)
    eras = (made.eras[0], replace(made.eras[1], entry=log[0]))
    assert made.points is not None
    points = replace(made.points, label=tuple(HOSTILE for _ in made.points.label))
    return replace(made, title=HOSTILE, settings=settings, logbook=log, eras=eras, points=points)


def crowded() -> Finding:
    """More cases and entries than lanes have room for, one case as long as the history, five eras."""
    made = two_eras(n=150)
    first = made.cases[0]
    whole = replace(first, id="c-whole", state="open", first_index=0, last_index=149)
    short = tuple(
        replace(first, id=f"c-{i}", state="ended", first_index=i * 12, last_index=i * 12 + i)
        for i in range(12)
    )
    log = tuple(entry(20 + i, 290 - i * 22, f"Setter on shift {i} changed the feed shoe") for i in range(13))
    eras = tuple(
        Era(
            number=i + 1,
            start_index=i * 30,
            stop_index=i * 30 + 30,
            from_time=None,
            entry=entry(90 + i, 1, f"die number {i} taken into use", kind="process-change"),
            action="learn",
        )
        for i in range(5)
    )
    return replace(made, cases=(*made.cases, whole, *short), logbook=log, eras=eras)


def wild() -> Finding:
    """A value far beyond every scale, which must not flatten the rest, and missing points."""
    made = finding("burst", title="Burst pressure", chart="individuals", unit="bar", seed=14)
    value = made.panels[0].value.copy()
    value[60], value[70:73] = 4_000.0, np.nan
    return replace(made, panels=(replace(made.panels[0], value=value), made.panels[1]))


def dated() -> Finding:
    """Dates without a clock: a dozen points and more share each, with a logbook line between two of them."""
    made = two_eras()
    assert made.points is not None
    dates = AS_OF - (139 - np.arange(140, dtype=np.int64)) // 14 * 24 * HOUR
    return replace(made, slug="dated", points=replace(made.points, time=dates))


def varied() -> dict[str, Finding]:
    """Every one of them, by name."""
    return {
        "two-eras": two_eras(),
        "unequal-sd": unequal("mean-sd"),
        "unequal-p": unequal("p"),
        "gathering": without_limits(
            finding("glaze", chart="u", title="Glaze specks", unit="", n=20, timed=False, state="gathering")
        ),
        "gathering-two": without_limits(finding("g2", title="Green density", n=26)),
        "one-point": one_point(),
        "long": long(),
        "hostile": hostile(),
        "wild": wild(),
        "crowded": crowded(),
        "dated": dated(),
    }
