"""All findings to a whole site in memory: every path below its folder, and the bytes that belong there."""

from __future__ import annotations

from collections.abc import Sequence
from functools import cache as remembered
from pathlib import Path

from jinja2 import Environment, FileSystemLoader, StrictUndefined

from holdsteady.charts.data import page_data
from holdsteady.intake.readings import Intake
from holdsteady.monitor.finding import Finding
from holdsteady.places import templates
from holdsteady.site.assets import content_named, shared_assets
from holdsteady.site.characteristic_page import Chart
from holdsteady.site.labels import SiteLabels
from holdsteady.site.pictures import chart_picture, first_shown
from holdsteady.site.plan import PlannedPage, clock_of, plan
from holdsteady.site.view import SiteView


def render(
    findings: Sequence[Finding], intake: Intake, project_view: SiteView, *, cache: Path | None
) -> dict[str, bytes]:
    """Return the site, its `tables/` apart.

    Parameters
    ----------
    findings : sequence of Finding
        Every characteristic of the project, in any order.
    intake : Intake
        The account of every file.
    project_view : SiteView
        What the pages say of the project as a whole.
    cache : Path or None
        The project's own folder for what need not be made twice.

    Returns
    -------
    dict of str to bytes
        Relative path with "/" to content; the same input gives the same bytes.
    """
    assets = shared_assets(cache)
    site = dict(assets.files)
    labels = SiteLabels(clock=clock_of(project_view))
    charts: dict[str, Chart] = {}
    for finding in findings:
        if finding.panels:
            content = page_data(finding, project_view.zone, labels)
            path = content_named("assets/data", finding.slug, ".js", content)
            site[path] = content
            charts[finding.slug] = Chart(
                kind=finding.chart,
                id=finding.slug,
                src=f"../{path}",
                show=first_shown(finding),
                picture=chart_picture(finding, project_view.zone, labels),
            )
    for page in plan(findings, intake, project_view, assets, charts):
        site[page.path] = page_bytes(page)
    return site


def page_bytes(page: PlannedPage) -> bytes:
    """Return one page as HTML in UTF-8."""
    text = _environment().get_template(page.template).render(page=page.page, frame=page.frame)
    # A lone surrogate, as a damaged file name may hold, has no UTF-8; a question mark has.
    return text.encode("utf-8", errors="replace")


@remembered
def _environment() -> Environment:
    return Environment(
        loader=FileSystemLoader(templates()), autoescape=True, undefined=StrictUndefined, trim_blocks=True,
        lstrip_blocks=True, keep_trailing_newline=True, auto_reload=False,
    )  # fmt: skip
