"""One Vega-Lite specification per kind of chart, made with Altair on named data sets.

A kind says which panels it has; how marks look is in `marks`. Adding a kind is one line in `KINDS`,
or one function beside `shewhart` where it needs marks of its own.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from copy import deepcopy
from functools import cache
from typing import Any, Final

import altair as alt

from holdsteady.charts import marks

Build = Callable[[bool], Any]  # Altair gives no narrower type to layered charts with parameters
UNTIMED: Final = "/untimed"


@cache
def shewhart(*panels: str) -> Build:
    """Return the builder of a chart with these panels on one shared horizontal axis, lanes around them."""

    def build(timed: bool) -> Any:  # noqa: FBT001  the only thing that varies
        layers = (
            *(marks.plot(panel, timed=timed) for panel in panels),
            *marks.lanes(timed=timed),
            *marks.margins(),
        )
        chart = alt.layer(*layers).resolve_scale(x="shared", y="independent")
        return chart.add_params(*marks.parameters(panels)).properties(
            width=900,
            height=440,
            autosize=alt.AutoSizeParams(type="none"),
            padding={"left": 8, "top": 8, "right": 150, "bottom": 28},
            background=alt.ExprRef(expr="c_paper"),
        )

    return build


KINDS: Final[Mapping[str, Build]] = {
    "individuals": shewhart("location", "spread"),
    "mean-range": shewhart("location", "spread"),
    "mean-sd": shewhart("location", "spread"),
    "median-range": shewhart("location", "spread"),
    "p": shewhart("single"),
    "np": shewhart("single"),
    "c": shewhart("single"),
    "u": shewhart("single"),
}


def specification(kind: str, *, timed: bool) -> dict[str, Any]:
    """Return the Vega-Lite specification of a kind, validated by Altair against its schema.

    Raises
    ------
    KeyError
        If there is no such kind.
    """
    return deepcopy(_validated(KINDS[kind], timed))


@cache  # kinds that look alike share their builder, and validating takes a third of a second
def _validated(build: Build, timed: bool) -> dict[str, Any]:  # noqa: FBT001  as builders take it
    chart = build(timed).configure(view=alt.ViewConfig(stroke=None), aria=False)
    result: dict[str, Any] = chart.to_dict(validate=True)
    return result


def all_specifications() -> dict[str, dict[str, Any]]:
    """Return every kind's specification, `kind` with a time axis and `kind/untimed` without."""
    names = sorted(KINDS)
    timed = {name: specification(name, timed=True) for name in names}
    return timed | {name + UNTIMED: specification(name, timed=False) for name in names}
