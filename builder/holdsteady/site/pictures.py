"""Pictures in the page itself, drawn by the builder: strips, and the charts before they come alive."""

from __future__ import annotations

from zoneinfo import ZoneInfo

import numpy as np
from markupsafe import Markup

from holdsteady.charts import static, strip
from holdsteady.charts.labels import Labels
from holdsteady.charts.picture import in_open_case
from holdsteady.monitor.finding import Case, Finding, Panel
from holdsteady.site.words import panel_named, statistic_said

_CROWDED = 150  # points, above which one of the last few is hard to see


def strip_picture(finding: Finding, case: Case | None, *, width: int, height: int) -> Markup:
    """Return the last points of the panel that a case is on, else of the first; nothing without points."""
    if not finding.panels:
        return Markup()
    panel = finding.panels[0] if case is None else panel_named(finding, case.panel)
    title = f"{finding.title}: last {min(len(panel.z), strip.POINTS)} points, {statistic_said(panel)}"
    part = in_open_case(finding, panel)
    # The charts escape every text they draw.
    return Markup(  # noqa: S704
        strip.strip(
            panel.z, part, limits=_newest_limits(finding, panel), title=title, width=width, height=height
        )
    )


def chart_picture(finding: Finding, zone: ZoneInfo, labels: Labels) -> Markup:
    """Return the chart that stands until the live one has replaced it, and on paper and without scripts."""
    return Markup(static.static_chart(finding, zone, labels))  # noqa: S704


def _newest_limits(finding: Finding, panel: Panel) -> tuple[float, float]:
    """Return the limits of the newest complete point in sigmas from its centre, NaN for none."""
    points = finding.points
    complete = np.flatnonzero(np.ones_like(panel.judged) if points is None else ~points.open)
    if not complete.size or not panel.sigma[complete[-1]] > 0:
        return float("nan"), float("nan")
    at = complete[-1]
    lower, upper = ((line[at] - panel.centre[at]) / panel.sigma[at] for line in (panel.lower, panel.upper))
    return float(lower), float(upper)


def first_shown(finding: Finding) -> str:
    """Return the part of a chart shown first: the last points, where a long history hides a case there."""
    if finding.points is None or len(finding.points.n) <= _CROWDED:
        return "all"
    recent = len(finding.points.n) - strip.POINTS
    starts = [case.first_index for case in finding.cases if case.state == "open"]
    return str(strip.POINTS) if starts and min(starts) >= recent else "all"
