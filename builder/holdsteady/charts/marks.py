"""The marks that chart kinds are composed of, as Vega-Lite layers on named data sets.

Nothing here holds data. Positions in pixels, colours and domains are parameters (`PARAMETERS`), which
the page sets to its own width, to the reader's colours and to the stretch of history being looked at.
"""

from __future__ import annotations

from typing import Any, Final, Literal

import altair as alt

Layer = alt.Chart | alt.LayerChart | alt.FacetChart

# The light palette of the pages' style sheet, for a chart that is taken into another document.
PALETTE: Final = {
    "paper": "#fcfbf8",
    "ink": "#1d2733",
    "soft": "#5a6572",
    "faint": "#69737d",
    "hair": "#dfdcd3",
    "band": "#efece3",
    "open": "#b0440a",
    "said": "#1f5f95",
    "data": "#33475b",
}
_COMMON: Final[dict[str, float]] = {"x_from": 0, "x_to": 1, "ticks": 6, "dot": 14, "plot_bottom": 440}
FONT: Final = 'system-ui, "Segoe UI", sans-serif'
_DATES: Final = {
    "year": "%Y",
    "quarter": "%b",
    "month": "%b",
    "week": "%-d %b",
    "date": "%-d %b",
    "day": "%-d %b",
    "hours": "%H:%M",
    "minutes": "%H:%M",
    "seconds": "%H:%M:%S",
    "milliseconds": "%H:%M:%S",
}


# Expressions on a row's `mark` and `tone`, evaluated in the page.
_SHAPE: Final = (
    "datum.mark == 'fault' ? 'M-1,-1L1,1M-1,1L1,-1' : "
    "datum.mark == 'beyond' || datum.mark == 'limit' ? datum.shape : 'circle'"
)
_SOLID: Final = "datum.mark == 'point' || datum.mark == 'beyond'"
_LINES: Final = "datum.mark == 'fault' || datum.mark == 'limit'"
_FILL: Final = f"{_SOLID} ? (datum.ring ? c_open : c_data) : {_LINES} ? null : c_paper"
_STROKE: Final = (
    f"{_SOLID} ? null : datum.ring ? c_open : "
    "datum.mark == 'open' || datum.mark == 'limit' ? c_data : c_faint"
)
_LINE_TONE: Final = "datum.tone == 'open' ? c_open : datum.tone == 'said' ? c_said : c_faint"
_TEXT_TONE: Final = (
    "datum.tone == 'open' ? c_open : datum.tone == 'said' ? c_said : datum.tone == 'ink' ? c_ink : c_soft"
)


def parameters(panels: tuple[str, ...]) -> list[alt.Parameter]:
    """Return every parameter of a chart with these panels, with values that make a picture on their own."""
    values: dict[str, Any] = {**{f"c_{name}": colour for name, colour in PALETTE.items()}, **_COMMON}
    for panel, (top, bottom) in zip(panels, ((60, 280), (330, 440)), strict=False):
        values |= {f"{panel}_top": top, f"{panel}_bottom": bottom, f"{panel}_low": 0, f"{panel}_high": 1}
    return [alt.param(name=name, value=value) for name, value in values.items()]


def expression(text: str) -> Any:
    """Wrap an expression that is evaluated in the page; inside a mark it may look at `datum`."""
    return alt.ExprRef(expr=text)


def along(*, timed: bool) -> alt.X:
    """Return the one horizontal axis: the plant's wall clock, or the points' order."""
    kind: Literal["utc", "linear"] = "utc" if timed else "linear"
    axis = alt.Axis(
        title=None,
        grid=False,
        domain=False,
        labelColor=expression("c_soft"),
        labelFontSize=12,
        labelFont=FONT,
        labelPadding=6,
        labelFlush=20,
        labelOverlap="greedy",
        labelSeparation=8,
        labelBound=True,
        tickColor=expression("c_hair"),
        tickSize=5,
        tickCount=expression("ticks"),
        zindex=0,
        aria=False,
        offset=0,
        format=_DATES if timed else "d",
        tickMinStep=alt.Undefined if timed else 1,
    )
    scale = alt.Scale(
        type=kind,
        domainMin=expression("x_from"),
        domainMax=expression("x_to"),
        nice=False,
        zero=False,
        padding=0,
    )
    return alt.X("x", type="temporal" if timed else "quantitative", scale=scale, axis=axis)


def _up(panel: str, field: str) -> alt.Y:
    scale = alt.Scale(
        domain=[expression(f"{panel}_low"), expression(f"{panel}_high")],
        nice=False,
        zero=False,
        range=[expression(f"{panel}_bottom"), expression(f"{panel}_top")],
    )
    return alt.Y(field, type="quantitative", scale=scale, axis=None)


def _on(data: str, name: str = "") -> alt.Chart:
    return alt.Chart(alt.NamedData(name=data), name=name or alt.Undefined)


def plot(panel: str, *, timed: bool) -> Layer:
    """Return one panel: likely start, limit band, edges, centre line, connecting line, points.

    Data sets: `<panel>_starts` (x, x2) · `<panel>_bands` (x, lower, upper, band) · `<panel>_edges`
    (x, y, edge, dotted) · `<panel>_centres` (x, y, line) · `<panel>_points` (x, y, mark, ring, shape, piece).
    """
    x = along(timed=timed)
    starts = (
        _on(f"{panel}_starts")
        .mark_rect(
            aria=False,
            clip=True,
            color=expression("c_open"),
            opacity=0.1,
            y=expression(f"{panel}_top"),
            y2=expression(f"{panel}_bottom"),
        )
        .encode(x=x, x2="x2")
    )
    band = (
        _on(f"{panel}_bands")
        .mark_area(
            aria=False,
            clip=True,
            color=expression("c_band"),
            opacity=1,
            line=False,
        )
        .encode(x=x, y=_up(panel, "lower"), y2="upper", detail="band:N")
    )
    edges = _on(f"{panel}_edges").mark_line(aria=False, clip=True, strokeWidth=1, strokeCap="butt")
    solid = edges.transform_filter("!datum.dotted").properties(name=f"{panel}_edges")
    solid = solid.encode(x=x, y=_up(panel, "y"), detail="edge:N", color=alt.ColorValue(expression("c_hair")))
    dotted = (
        edges.transform_filter("datum.dotted")
        .properties(name=f"{panel}_dotted_edges")
        .encode(
            x=x,
            y=_up(panel, "y"),
            detail="edge:N",
            color=alt.ColorValue(expression("c_faint")),
            strokeDash=alt.value([1, 3]),
        )
    )
    centre = (
        _on(f"{panel}_centres")
        .mark_line(
            aria=False,
            clip=True,
            strokeWidth=1,
            color=expression("c_faint"),
        )
        .encode(x=x, y=_up(panel, "y"), detail="line:N")
    )
    return alt.layer(band, starts, solid, dotted, centre, *_drawn_points(panel, x))


def _drawn_points(panel: str, x: alt.X) -> tuple[alt.Chart, alt.Chart]:
    """Return the thin connecting line and the points, whose `mark` says by shape what each is."""
    line = (
        _on(f"{panel}_points")
        .transform_filter("datum.mark != 'fault' && datum.mark != 'beyond'")
        .mark_line(
            aria=False,
            clip=True,
            strokeWidth=0.8,
            opacity=0.55,
            color=expression("c_data"),
            strokeJoin="round",
        )
    )
    points = _on(f"{panel}_points", f"{panel}_points").mark_point(
        aria=False,
        filled=False,
        opacity=1,
        shape=expression(_SHAPE),
        size=expression(
            "datum.mark == 'point' ? dot : datum.mark == 'hollow' || datum.mark == 'fault' ? 28 : "
            "datum.mark == 'limit' ? 56 : 36"
        ),
        fill=expression(_FILL),
        stroke=expression(_STROKE),
        strokeWidth=expression("datum.mark == 'ring' || datum.mark == 'limit' ? 1.7 : 1.3"),
        strokeDash=expression("datum.mark == 'open' ? [1.5, 1.5] : []"),
    )
    y = _up(panel, "y")
    return line.encode(x=x, y=y, detail="piece:N"), points.encode(x=x, y=y)


def lanes(*, timed: bool) -> tuple[alt.Chart, ...]:
    """Return what lies above and below the plots, at heights the page has chosen for each.

    Data sets: `spans` (x, x2, y, tone, width, hook): eras, baselines, cases · `ticks` (x, y, tone):
    moments people wrote down · `reading` (x): the point being read.
    """
    x = along(timed=timed)
    tone = expression(_LINE_TONE)
    spans = (
        _on("spans", "spans")
        .mark_rule(
            aria=False,
            clip=True,
            y=expression("datum.y"),
            color=tone,
            strokeWidth=expression("datum.width"),
            strokeCap=expression("datum.width > 2 ? 'round' : 'butt'"),
        )
        .encode(x=x, x2="x2")
    )
    ticks = (
        _on("ticks", "ticks")
        .mark_rule(
            aria=False,
            clip=True,
            y=expression("datum.y - datum.tall / 2"),
            y2=expression("datum.y + datum.tall / 2"),
            color=tone,
            strokeWidth=expression("datum.width"),
        )
        .encode(x=x)
    )
    reading = (
        _on("reading", "reading")
        .mark_rule(
            aria=False,
            clip=True,
            y=expression("datum.top"),
            y2=expression("plot_bottom"),
            color=expression("c_faint"),
            strokeWidth=1,
        )
        .encode(x=x)
    )
    return reading, spans, ticks


def margins() -> tuple[alt.Chart, ...]:
    """Return words and brackets at places in pixels.

    Data sets: `words` (left, y, text, anchor, tone) · `brackets` (bracket, step, left, y), each a bent line.
    """
    words = (
        _on("words", "words")
        .mark_text(
            aria=False,
            x=expression("datum.left"),
            y=expression("datum.y"),
            text=expression("datum.text"),
            align=expression("datum.anchor"),
            baseline="middle",
            fontSize=12,
            font=FONT,
            color=expression(_TEXT_TONE),
        )
        .encode(opacity=alt.value(1))
    )
    brackets = (
        _on("brackets", "brackets")
        .mark_rule(
            aria=False,
            strokeWidth=1,
            strokeCap="square",
            color=expression("c_soft"),
        )
        .encode(
            x=alt.X("left:Q", scale=None, axis=None),
            x2="right",
            y=alt.Y("y:Q", scale=None, axis=None),
            y2="y2",
        )
    )
    return words, brackets
