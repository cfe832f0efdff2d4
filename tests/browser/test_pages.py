"""Every page in a real browser, from the file system: quiet, self-contained, usable narrow and wide."""

from __future__ import annotations

from pathlib import Path
from urllib.parse import unquote

import pytest
from tests.browser.browser import Browser, Page
from tests.made_findings import all_findings, finding
from tests.site.made_site import HOSTILE, made_site

from holdsteady.monitor.finding import Finding

pytestmark = pytest.mark.browser

VISIBLE = "[...document.querySelectorAll('tr[data-row]')].filter((r) => r.offsetParent !== null).length"
AREAS = """[...document.querySelectorAll('tr.area')]
    .filter((r) => r.offsetParent !== null).map((r) => r.textContent.trim())"""
OVERFLOW = "document.documentElement.scrollWidth - document.documentElement.clientWidth"


def findings() -> tuple[Finding, ...]:
    long = finding(
        "long",
        title="Unbroken" * 30 + HOSTILE,
        area="Area" * 30,
        unit="unit" * 9,
        shift=2.0,
        state="signalling",
    )
    return (*all_findings(), long)


@pytest.fixture(scope="module")
def site(tmp_path_factory: pytest.TempPathFactory) -> Path:
    root = tmp_path_factory.mktemp("published")
    for name, content in made_site(findings()).items():
        path = root / name
        path.parent.mkdir(parents=True, exist_ok=True)
        path.write_bytes(content)
    return root


def html_files(site: Path) -> list[Path]:
    return sorted(site.rglob("*.html"))


def settle(page: Page) -> None:
    page.wait_for("[...document.querySelectorAll('figure.chart')].every((f) => f.dataset.state === 'live')")


def test_every_page_is_quiet_and_asks_for_nothing_outside(browser: Browser, site: Path) -> None:
    for path in html_files(site):
        page = browser.page()
        page.open(path)
        settle(page)
        assert (page.console, page.exceptions, page.failed) == ([], [], []), path
        outside = [r for r in page.requests if not unquote(r).startswith(site.as_uri())]
        assert outside == [], path
        assert page.evaluate("document.images.length") == 0
        page.close()


@pytest.mark.parametrize("width", [390, 768, 1440])
def test_no_page_scrolls_sideways(browser: Browser, site: Path, width: int) -> None:
    page = browser.page(width=width)
    for path in html_files(site):
        page.open(path)
        settle(page)
        assert page.evaluate(OVERFLOW) == 0, path
    page.close()


def test_the_list_is_filtered_by_text_area_and_state(page: Page, site: Path) -> None:
    page.open(site / "index.html")
    everything = len(findings())
    assert page.evaluate(VISIBLE) == everything
    page.evaluate("document.getElementById('find').focus()")
    page.call("Input.insertText", text="BORE press=2")
    page.wait_for(f"{VISIBLE} === 1")
    assert page.evaluate(AREAS) == ["Pressing"]
    assert page.evaluate("document.getElementById('shown').textContent") == f"1 of {everything}"
    page.open(site / "index.html", fragment="#state=steady")
    page.wait_for(f"{VISIBLE} === {sum(f.state == 'steady' for f in findings())}")
    page.open(site / "index.html", fragment="#area=Firing")
    page.wait_for(f"{VISIBLE} === 2")


def test_the_list_is_filtered_on_a_narrow_screen_too(browser: Browser, site: Path) -> None:
    page = browser.page(width=390)
    page.open(site / "index.html", fragment="#find=burst")
    page.wait_for(f"{VISIBLE} === 1")
    assert page.evaluate(AREAS) == ["Firing"]
    page.close()


def test_without_scripts_a_page_still_has_its_picture_and_its_words(browser: Browser, site: Path) -> None:
    page = browser.page()
    page.call("Emulation.setScriptExecutionDisabled", value=True)
    page.open(site / "characteristic" / "bore-press-2.html")
    # The protocol's own evaluation still runs.
    assert page.evaluate("document.querySelectorAll('figure.chart > svg').length") == 1
    assert page.evaluate("document.querySelector('figure.chart > svg').getBoundingClientRect().height") > 200
    page.open(site / "index.html")
    assert page.evaluate(VISIBLE) == len(findings())
    assert page.evaluate("getComputedStyle(document.querySelector('.tools')).display") == "none"
    page.close()


def test_the_state_is_told_by_word_and_shape_and_not_by_colour_alone(page: Page, site: Path) -> None:
    page.open(site / "index.html")
    marks = page.evaluate(
        """Object.fromEntries([...document.querySelectorAll('.state')].map((e) => {
            const s = getComputedStyle(e, '::before');
            const shape = ['width', 'height', 'borderRadius', 'borderTopWidth', 'borderLeftWidth',
                'borderTopStyle'];
            return [e.classList[1], shape.map((k) => s[k]).join(' ')];
        }))"""
    )
    assert len(marks) == 6
    assert len(set(marks.values())) == 6
    assert page.evaluate("[...document.querySelectorAll('.state')].every((e) => e.textContent.trim())")


def test_dark_is_dark_and_focus_is_seen(browser: Browser, site: Path) -> None:
    page = browser.page(scheme="dark")
    page.open(site / "index.html")
    assert page.evaluate("getComputedStyle(document.documentElement).backgroundColor") == "rgb(20, 24, 29)"
    page.press("Tab")
    assert page.evaluate("document.activeElement.className") == "skip"
    assert page.evaluate("document.activeElement.getBoundingClientRect().top") >= 0
    page.press("Tab")
    assert page.evaluate("getComputedStyle(document.activeElement).outlineStyle") == "solid"
    page.close()


def test_the_meetings_sheet_fits_on_one_page(browser: Browser, site: Path, tmp_path: Path) -> None:
    page = browser.page()
    page.open(site / "signals.html")
    page.pdf(tmp_path / "signals.pdf")
    assert (tmp_path / "signals.pdf").read_bytes().count(
        b"/Type /Page\n"
    ) <= 2  # the agenda, and what is over
    page.close()


def test_a_live_chart_is_named_by_its_page_and_described_by_its_caption(page: Page, site: Path) -> None:
    page.open(site / "characteristic" / "bore-press-2.html")
    settle(page)
    names = page.evaluate(
        """['labelledby', 'describedby'].map((kind) => {
            const box = document.querySelector('.chart-live');
            return document.getElementById(box.getAttribute('aria-' + kind)).tagName;
        })"""
    )
    assert names == ["H1", "FIGCAPTION"]


def test_a_narrow_table_still_has_its_columns_and_rows_for_those_who_hear_it(
    browser: Browser, site: Path
) -> None:
    page = browser.page(width=390)
    page.open(site / "characteristic" / "bore-press-2.html")
    settle(page)
    nodes = page.call("Accessibility.getFullAXTree")["nodes"]
    roles = [node["role"]["value"] for node in nodes if not node.get("ignored")]
    tables = page.evaluate("document.querySelectorAll('table').length")
    assert roles.count("table") == tables > 1
    assert roles.count("columnheader") == page.evaluate("document.querySelectorAll('th[scope=col]').length")
    assert roles.count("rowheader") == page.evaluate("document.querySelectorAll('th[scope=row]').length")
    page.close()


def test_what_paper_alone_says_stands_on_paper_alone(page: Page, site: Path) -> None:
    shown = "[...document.querySelectorAll('.paper')].map((e) => getComputedStyle(e).display)"
    page.open(site / "data.html")
    assert set(page.evaluate(shown)) == {"none"}
    page.prefer("light", medium="print")
    assert "none" not in page.evaluate(shown)
    page.evaluate("document.querySelectorAll('details').forEach((fold) => { fold.open = true; })")
    assert page.evaluate(f"{shown}.filter((display) => display !== 'none').length") == 1  # the page's name
