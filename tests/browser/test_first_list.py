"""The first page's list: filtered by text, area and state, walked by keyboard, kept in the address."""

from __future__ import annotations

import shutil
from pathlib import Path

import pytest
from tests.browser.browser import Page
from tests.browser.chart_page import POLICY

pytestmark = pytest.mark.browser

SCRIPT = Path(__file__).parents[2] / "site-templates" / "js" / "first.js"
ROWS = (
    ("bore-1", "bore diameter, press 1 gauge 4", "Pressing", "steady"),
    ("bore-2", "bore diameter, press 2 gauge 4", "Pressing", "signalling"),
    ("burst", "burst pressure", "Firing", "signalling"),
    ("peak", "kiln peak temperature", "Firing", "steady"),
    ("pinholes", "pinhole rejects, line 1", "Inspection & <more>", "answered"),
)
VISIBLE = "[...document.querySelectorAll('tr[data-row]')].filter((r) => !r.hidden).map((r) => r.id)"
HEADINGS = "[...document.querySelectorAll('tr.area')].filter((r) => !r.hidden).map((r) => r.dataset.area)"
SHOWN = "document.getElementById('shown').textContent"


@pytest.fixture
def path(tmp_path: Path) -> Path:
    shutil.copy(SCRIPT, tmp_path / "first.js")
    parts, last = [], ""
    for name, text, area, state in ROWS:
        escaped = area.replace("&", "&amp;").replace("<", "&lt;")
        if area != last:
            parts.append(f'<tr class="area" data-area="{escaped}"><th>{escaped}</th></tr>')
            last = area
        parts.append(
            f'<tr data-row id="{name}" data-text="{text}" data-area="{escaped}" data-state="{state}">'
            f'<td><a href="{name}.html">{name}</a></td></tr>'
        )
        (tmp_path / f"{name}.html").write_text(f"<!doctype html><meta charset=utf-8><title>{name}</title>")
    areas = "".join(f"<option>{a}</option>" for a in ("Pressing", "Firing", "Inspection &amp; &lt;more>"))
    states = "".join(f"<option>{s}</option>" for s in ("signalling", "answered", "steady"))
    page = tmp_path / "index.html"
    page.write_text(
        '<!doctype html><html lang="en"><meta charset="utf-8"><meta http-equiv="Content-Security-Policy" '
        f'content="{POLICY}"><title>list</title>'
        f'<input id="find" type="search"><select id="area"><option value="">all</option>{areas}</select>'
        f'<select id="state"><option value="">all</option>{states}</select><span id="shown"></span>'
        f'<table class="all"><tbody>{"".join(parts)}</tbody></table><script src="first.js"></script></html>',
        encoding="utf-8",
    )
    return page


def choose(page: Page, key: str, value: str) -> None:
    page.evaluate(
        f"(() => {{ const e = document.getElementById('{key}'); e.value = {value!r};"
        " e.dispatchEvent(new Event('input', { bubbles: true })); })()"
    )


def test_everything_is_shown_at_first(page: Page, path: Path) -> None:
    page.open(path)
    assert page.evaluate(VISIBLE) == [row[0] for row in ROWS]
    assert page.evaluate(SHOWN) == "all 5"
    assert page.console == page.exceptions == []


def test_text_area_and_state_narrow_together_and_empty_areas_go(page: Page, path: Path) -> None:
    page.open(path)
    choose(page, "find", "  Gauge  BORE ")
    assert page.evaluate(VISIBLE) == ["bore-1", "bore-2"]
    assert page.evaluate(HEADINGS) == ["Pressing"]
    choose(page, "state", "signalling")
    assert page.evaluate(VISIBLE) == ["bore-2"]
    assert page.evaluate(SHOWN) == "1 of 5"
    choose(page, "area", "Firing")
    assert page.evaluate(VISIBLE) == []
    assert page.evaluate(HEADINGS) == []
    assert page.evaluate(SHOWN) == "none of 5"
    choose(page, "find", "")
    assert page.evaluate(VISIBLE) == ["burst"]
    assert page.console == page.exceptions == []


def test_the_address_holds_it_and_brings_it_back(page: Page, path: Path) -> None:
    page.open(path)
    choose(page, "area", "Inspection & <more>")
    choose(page, "find", "line & 1")
    fragment = page.evaluate("location.hash")
    assert "area=" in fragment
    page.open(path, fragment="#area=Firing&state=steady&other=kept")
    assert page.evaluate(VISIBLE) == ["peak"]
    choose(page, "state", "")
    assert page.evaluate("location.hash") == "#area=Firing&other=kept"
    page.evaluate("location.hash = '#find=burst'")
    page.wait_for(f"({VISIBLE}).join() === 'burst'")
    assert page.evaluate("document.getElementById('area').value") == ""


def test_an_area_that_is_no_more_asks_for_nothing(page: Page, path: Path) -> None:
    page.open(path, fragment="#area=Gone")
    assert page.evaluate(SHOWN) == "all 5"


def test_the_keyboard_finds_walks_and_opens(page: Page, path: Path) -> None:
    page.open(path)
    page.press("/", text="/")
    assert page.evaluate("document.activeElement.id") == "find"
    assert page.evaluate("document.getElementById('find').value") == ""
    for letter in "burst jk":
        page.press(letter, text=letter)
    assert page.evaluate("document.getElementById('find').value") == "burst jk"
    page.press("Escape")
    assert page.evaluate(SHOWN) == "all 5"
    choose(page, "state", "steady")
    page.press("j", text="j")
    page.press("j", text="j")
    page.press("j", text="j")
    assert page.evaluate("document.activeElement.closest('tr').id") == "peak"
    page.press("k", text="k")
    assert page.evaluate("document.activeElement.closest('tr').id") == "bore-1"
    page.press("Enter", text="\r")
    page.browser.listen_until(
        lambda: any("bore-1.html" in address for address in page.requests), "the row's page"
    )
