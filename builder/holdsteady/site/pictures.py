"""Pictures in the page itself, drawn by the builder: strips, and the charts before they come alive."""

from __future__ import annotations

from zoneinfo import ZoneInfo

from markupsafe import Markup

from holdsteady.charts import static, strip
from holdsteady.charts.labels import Labels
from holdsteady.charts.picture import in_open_case
from holdsteady.monitor.finding import Case, Finding
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
    return Markup(strip.strip(panel.z, part, title=title, width=width, height=height))  # noqa: S704


def chart_picture(finding: Finding, zone: ZoneInfo, labels: Labels) -> Markup:
    """Return the chart that stands until the live one has replaced it, and on paper and without scripts."""
    return Markup(static.static_chart(finding, zone, labels))  # noqa: S704


def first_shown(finding: Finding) -> str:
    """Return the part of a chart shown first: the last points, where a long history hides a case there."""
    if finding.points is None or len(finding.points.n) <= _CROWDED:
        return "all"
    recent = len(finding.points.n) - strip.POINTS
    starts = [case.first_index for case in finding.cases if case.state == "open"]
    return str(strip.POINTS) if starts and min(starts) >= recent else "all"
