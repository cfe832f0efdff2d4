"""All findings to a whole site in memory: every path below its folder, and the bytes that belong there."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import cache as remembered
from pathlib import Path

from jinja2 import Environment, FileSystemLoader, StrictUndefined

from holdsteady.charts.data import page_data
from holdsteady.intake.readings import Intake
from holdsteady.monitor.finding import Finding
from holdsteady.monitor.monitor import not_computed
from holdsteady.places import templates
from holdsteady.site.assets import Assets, content_named, shared_assets
from holdsteady.site.characteristic_page import Chart
from holdsteady.site.labels import SiteLabels
from holdsteady.site.pictures import chart_picture, first_shown
from holdsteady.site.plan import PlannedPage, clock_of, plan
from holdsteady.site.view import SiteView


@dataclass(frozen=True, slots=True, kw_only=True)
class Drawn:
    """A site without its `tables/`, and the findings as it shows them."""

    files: dict[str, bytes]  # relative path with "/" to content
    findings: tuple[Finding, ...]


def render(
    findings: Sequence[Finding],
    intake: Intake,
    project_view: SiteView,
    *,
    cache: Path | None,
    keep: bool = True,
) -> dict[str, bytes]:
    """Return the files of `draw`."""
    return draw(findings, intake, project_view, cache=cache, keep=keep).files


def draw(
    findings: Sequence[Finding],
    intake: Intake,
    project_view: SiteView,
    *,
    cache: Path | None,
    keep: bool = True,
) -> Drawn:
    """Return the site, its `tables/` apart; the same input gives the same bytes.

    A characteristic whose pages cannot be drawn does not take the others down: it is shown as `not-computed`,
    with what went wrong as its reason. The findings come back as they are shown, so that tables agree.

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
    keep : bool
        Whether what had to be made may be kept there.
    """
    assets = shared_assets(cache, keep=keep)
    shown = tuple(findings)
    try:
        return Drawn(files=_site(shown, intake, project_view, assets), findings=shown)
    except Exception:
        # Only now is each drawn alone, to find whose fault it is.
        sound = tuple(_sound(finding, project_view, assets) for finding in shown)
        if all(one is other for one, other in zip(sound, shown, strict=True)):
            raise
        return Drawn(files=_site(sound, intake, project_view, assets), findings=sound)


def _sound(finding: Finding, project_view: SiteView, assets: Assets) -> Finding:
    """Return the finding if a site of it alone can be drawn, else one that is not computed in its place."""
    nothing = Intake(readings={}, files=(), set_aside=(), problems=(), censored={})
    try:
        _site((finding,), nothing, project_view, assets)
    except Exception as error:
        instead = not_computed(
            finding.settings,
            f"its page could not be drawn: {str(error) or type(error).__name__}",
            "Check its settings against its data; if both are right, report this text.",
            censored=finding.censored,
        )
        return replace(
            instead, name=finding.name, slug=finding.slug, title=finding.title, chart=finding.chart,
            readings=finding.readings, implausible=finding.implausible,
        )  # fmt: skip
    return finding


def _site(
    findings: Sequence[Finding], intake: Intake, project_view: SiteView, assets: Assets
) -> dict[str, bytes]:
    """Return every page and what it draws on."""
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
