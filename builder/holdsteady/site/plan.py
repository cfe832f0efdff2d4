"""The page plan: every page of the site as a path, a template and what it shows."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from holdsteady.intake.readings import Intake
from holdsteady.monitor.finding import Finding
from holdsteady.site.assets import Assets
from holdsteady.site.characteristic_page import (
    CharacteristicPage,
    Chart,
    Neighbour,
    characteristic_page,
)  # fmt: skip
from holdsteady.site.data_page import DataPage, data_page
from holdsteady.site.first_page import FirstPage, first_page
from holdsteady.site.methods_page import MethodsPage, methods_page
from holdsteady.site.moments import Clock
from holdsteady.site.signals_page import SignalsPage, signals_page
from holdsteady.site.view import SiteView
from holdsteady.site.words import CAUTION
from holdsteady.site.worklist import by_attention

NAVIGATION = (
    ("Overview", "index.html"),
    ("Signals", "signals.html"),
    ("Data", "data.html"),
    ("Methods", "methods.html"),
)
Context = FirstPage | SignalsPage | CharacteristicPage | DataPage | MethodsPage


@dataclass(frozen=True, slots=True, kw_only=True)
class Frame:
    """What surrounds every page."""

    title: str
    site_title: str
    language: str
    root: str  # from the page to the site's folder: "" or "../"
    current: str
    navigation: tuple[tuple[str, str], ...]
    style: str
    scripts: tuple[str, ...]
    reach: str
    reach_machine: str
    footer: str
    caution: str


@dataclass(frozen=True, slots=True, kw_only=True)
class PlannedPage:
    """One page to render."""

    path: str
    template: str
    frame: Frame
    page: Context


def clock_of(view: SiteView) -> Clock:
    """Return the clock that writes moments: near is near the newest reading, not the build."""
    return Clock(zone=view.zone, now=view.as_of if view.data_until is None else view.data_until)


def plan(
    findings: Sequence[Finding], intake: Intake, view: SiteView, assets: Assets, charts: Mapping[str, Chart]
) -> tuple[PlannedPage, ...]:
    """Plan every page; `charts` maps slugs to the charts of those characteristics that have one."""
    clock = clock_of(view)
    pages = [
        _planned(
            "index.html",
            "first.html",
            "Overview",
            first_page(findings, clock),
            view,
            assets.first_scripts,
            assets,
        ),
        _planned("signals.html", "signals.html", "Signals", signals_page(findings, clock), view, (), assets),
        _planned(
            "data.html", "data.html", "Data", data_page(findings, intake, view, clock), view, (), assets
        ),
        _planned(
            "methods.html",
            "methods.html",
            "Methods",
            methods_page(assets.chart_sources, assets.licence),
            view,
            (),
            assets,
        ),
    ]
    ordered = [finding for _, members in by_attention(findings) for finding in members]
    for position, finding in enumerate(ordered):
        chart = charts.get(finding.slug)
        around = (_neighbour(ordered, position - 1), _neighbour(ordered, position + 1))
        pages.append(
            _planned(
                f"characteristic/{finding.slug}.html", "characteristic.html", finding.title,
                characteristic_page(finding, chart, around, clock), view,
                assets.chart_scripts if chart else (), assets,
            )
        )  # fmt: skip
    return tuple(pages)


def _planned(
    path: str,
    template: str,
    title: str,
    page: Context,
    view: SiteView,
    scripts: tuple[str, ...],
    assets: Assets,
) -> PlannedPage:
    clock = clock_of(view)
    root = "../" * path.count("/")
    reach = "no times in the data" if view.data_until is None else f"data up to {clock.full(view.data_until)}"
    frame = Frame(
        title=title, site_title=view.settings.title, language=view.settings.language, root=root, current=path,
        navigation=NAVIGATION, style=root + assets.style, scripts=tuple(root + s for s in scripts),
        reach=reach,
        reach_machine="" if view.data_until is None else clock.machine(view.data_until),
        footer=view.settings.footer or "", caution=CAUTION,
    )  # fmt: skip
    return PlannedPage(path=path, template=template, frame=frame, page=page)


def _neighbour(ordered: Sequence[Finding], position: int) -> Neighbour | None:
    if not 0 <= position < len(ordered):
        return None
    return Neighbour(title=ordered[position].title, href=f"{ordered[position].slug}.html")
