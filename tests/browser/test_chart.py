"""Charts in a real browser, from `file://`: drawn whole, silent, readable, and inert to what people wrote."""

from __future__ import annotations

import json
import re
from pathlib import Path

import numpy as np
import pytest
from tests.browser.browser import Page
from tests.browser.chart_page import write
from tests.charts.varied_findings import dated, hostile, long, two_eras, unequal, varied
from tests.made_findings import finding

from holdsteady.charts import picture
from holdsteady.charts.kinds import KindsScript, kinds_script
from holdsteady.monitor.finding import Finding

pytestmark = pytest.mark.browser

KINDS = ("individuals", "mean-range", "mean-sd", "median-range", "p", "np", "c", "u")
STATE = "document.querySelector('figure').dataset.state"
SETTLED = "new Promise((r) => requestAnimationFrame(() => requestAnimationFrame(() => r(true))))"
MARKS = """Object.fromEntries([...document.querySelectorAll('g.mark-symbol[class*=_points]')].map((g) =>
  [g.getAttribute('class').match(/(\\w+?)_points/)[1], g.querySelectorAll('path').length]))"""
# Words drawn outside the page, over one another, or crossed by a line of a lane.
CLASHES = """(() => {
  const texts = [...document.querySelectorAll('.chart-view text')]
    .filter((t) => t.textContent && t.getAttribute('opacity') !== '0');
  const boxes = texts.map((t) => [t.textContent, t.getBoundingClientRect()]).filter(([, b]) => b.width);
  const wide = document.documentElement.clientWidth, found = [];
  boxes.forEach(([text, b], i) => {
    if (b.left < -1 || b.right > wide + 1) found.push(text + ' leaves the page');
    boxes.slice(i + 1).forEach(([other, c]) => {
      const across = Math.min(b.right, c.right) - Math.max(b.left, c.left);
      const down = Math.min(b.bottom, c.bottom) - Math.max(b.top, c.top);
      if (across > 1 && down > 3) found.push(text + ' over ' + other);
    });
  });
  document.querySelectorAll('g[class*=spans] line, g[class*=ticks] line').forEach((line) => {
    const c = line.getBoundingClientRect();
    boxes.forEach(([text, b]) => {
      const across = Math.min(b.right, c.right) - Math.max(b.left, c.left);
      const down = Math.min(b.bottom, c.bottom) - Math.max(b.top, c.top);
      if (across > 1 && down > 5) found.push('a line over ' + text);
    });
  });
  return found;
})()"""


@pytest.fixture(scope="session")
def kinds(tmp_path_factory: pytest.TempPathFactory) -> KindsScript:
    return kinds_script(tmp_path_factory.mktemp("kinds"))


def opened(page: Page, folder: Path, made: Finding, kinds: KindsScript, *, fragment: str = "") -> None:
    page.open(write(folder, made, kinds), fragment=fragment)
    assert page.wait_for(STATE) == "live"


def assert_silent(page: Page, folder: Path) -> None:
    assert page.console == []
    assert page.exceptions == []
    assert page.failed == []
    root = folder.resolve().as_uri() + "/"
    assert [address for address in page.requests if not address.startswith(root)] == []


def real_points(made: Finding) -> dict[str, int]:
    return {panel.name: int(np.count_nonzero(~np.isnan(panel.value))) for panel in made.panels}


@pytest.mark.parametrize("timed", [True, False])
@pytest.mark.parametrize("kind", KINDS)
def test_each_kind_draws_every_point(
    page: Page, tmp_path: Path, kinds: KindsScript, kind: str, *, timed: bool
) -> None:
    made = finding("bore", chart=kind, timed=timed, shift=-1.9, state="signalling")
    opened(page, tmp_path, made, kinds)
    assert page.evaluate(MARKS) == real_points(made)
    assert page.evaluate("document.querySelectorAll('figure svg').length") == 1
    assert page.evaluate("document.querySelectorAll('figure svg.chart-static').length") == 0
    assert_silent(page, tmp_path)


@pytest.mark.parametrize("width", [1440, 390])
@pytest.mark.parametrize("name", sorted(set(varied()) - {"long"}))
def test_odd_histories_are_drawn_whole_and_no_word_is_over_another(
    page: Page, tmp_path: Path, kinds: KindsScript, name: str, width: int
) -> None:
    made = varied()[name]
    page.size(width, 900)
    opened(page, tmp_path, made, kinds)
    assert page.evaluate(MARKS) == real_points(made)
    assert page.evaluate(CLASHES) == []
    assert page.evaluate("document.documentElement.scrollWidth <= innerWidth")
    assert not re.search(
        r"NaN|Infinity|undefined", page.evaluate("document.querySelector('.chart-view').innerHTML")
    )
    assert_silent(page, tmp_path)


def test_what_stands_apart_is_told_by_shape(page: Page, tmp_path: Path, kinds: KindsScript) -> None:
    made = two_eras()
    opened(page, tmp_path, made, kinds)
    strokes = page.evaluate(
        "[...document.querySelectorAll('g[class*=location_points] path')].map((p) => ["
        "p.getAttribute('stroke'), "
        "p.getAttribute('fill'), p.getAttribute('stroke-dasharray'), p.getAttribute('d').includes('A')])"
    )
    marks = picture.marks(made, made.panels[0])
    accent = page.evaluate("getComputedStyle(document.documentElement).getPropertyValue('--open').trim()")
    rings = [s for s in strokes if s[0] == accent]
    assert len(rings) == np.count_nonzero(marks == picture.RING) > 0
    assert [s[3] for s in strokes].count(False) == np.count_nonzero(marks == picture.FAULT) == 1
    dashed = [s for s in strokes if s[2] not in (None, "", "none")]
    assert len(dashed) == np.count_nonzero(marks == picture.INCOMPLETE) == 1


def test_limits_step_from_point_to_point_where_n_differs(
    page: Page, tmp_path: Path, kinds: KindsScript
) -> None:
    made = unequal("p")
    opened(page, tmp_path, made, kinds)
    band = page.evaluate("document.querySelector('g.mark-area path').getAttribute('d')")
    assert made.points is not None
    changes = np.count_nonzero(np.diff(made.points.n)) + 1
    assert len(re.findall(r"[ML]", band)) >= 4 * changes
    assert "C" not in band


def test_thousands_of_points_are_thinned_and_every_flagged_one_stays(
    page: Page, tmp_path: Path, kinds: KindsScript
) -> None:
    made = long(5_000)
    opened(page, tmp_path, made, kinds)
    drawn = page.evaluate(MARKS)
    assert 500 < drawn["location"] < 2_500
    accent = page.evaluate("getComputedStyle(document.documentElement).getPropertyValue('--open').trim()")
    rings = f"document.querySelectorAll('g[class*=location_points] path[stroke=\"{accent}\"]').length"
    assert page.evaluate(rings) == np.count_nonzero(picture.in_open_case(made, made.panels[0])) > 0
    page.evaluate("document.querySelector('button[data-choice=\"60\"]').click()")
    assert page.evaluate(MARKS)["location"] == 60
    assert_silent(page, tmp_path)


def test_hostile_text_is_inert(page: Page, tmp_path: Path, kinds: KindsScript) -> None:
    opened(page, tmp_path, hostile(), kinds)
    page.press("Tab")
    page.evaluate("document.querySelector('.chart-live').focus()")
    page.press("End")
    assert page.evaluate("document.querySelector('.chart-note').textContent.includes('<img src=x')")
    assert page.evaluate("document.querySelectorAll('img, figure script, figure b').length") == 0
    assert page.evaluate("document.querySelector('.chart-view').textContent.includes('<img')")
    assert_silent(page, tmp_path)


def test_the_static_picture_stays_when_the_data_cannot_be_loaded(
    page: Page, tmp_path: Path, kinds: KindsScript
) -> None:
    path = write(tmp_path, finding("bore"), kinds)
    (tmp_path / "assets" / "data" / "d.js").unlink()
    page.open(path)
    assert page.wait_for(STATE) == "static"
    assert page.evaluate("document.querySelectorAll('figure svg.chart-static').length") == 1
    assert page.evaluate("document.querySelectorAll('.chart-live, .chart-choice').length") == 0


@pytest.mark.parametrize("scheme", ["light", "dark"])
def test_colours_are_the_readers_and_follow_a_change(
    page: Page, tmp_path: Path, kinds: KindsScript, scheme: str
) -> None:
    page.prefer("dark" if scheme == "light" else "light")
    opened(page, tmp_path, two_eras(), kinds)
    page.prefer(scheme)
    ink = page.evaluate("getComputedStyle(document.documentElement).getPropertyValue('--ink').trim()")
    page.wait_for(f"document.querySelector('.chart-view text[fill=\"{ink}\"]') !== null")
    assert_silent(page, tmp_path)


def test_paper_is_white_with_dark_ink_and_the_screen_returns(
    page: Page, tmp_path: Path, kinds: KindsScript
) -> None:
    page.prefer("dark")
    opened(page, tmp_path, two_eras(), kinds)
    width = "Number(document.querySelector('.chart-view svg').getAttribute('width'))"
    ground = "getComputedStyle(document.querySelector('.chart-view svg')).backgroundColor"
    before = page.evaluate(width)
    page.evaluate("dispatchEvent(new Event('beforeprint'))")
    assert page.evaluate(width) == 680
    assert page.evaluate(ground) == "rgb(255, 255, 255)"
    page.evaluate("dispatchEvent(new Event('afterprint'))")
    assert page.evaluate(width) == before
    page.pdf(tmp_path / "sheet.pdf")
    assert (tmp_path / "sheet.pdf").read_bytes().startswith(b"%PDF")
    assert_silent(page, tmp_path)


def test_points_are_read_by_keyboard(page: Page, tmp_path: Path, kinds: KindsScript) -> None:
    opened(page, tmp_path, finding("bore", shift=-1.9, state="signalling", seed=2), kinds)
    page.evaluate("document.querySelector('.chart-live').focus()")
    page.press("End")
    said = page.evaluate("[...document.querySelector('.chart-note').children].map((e) => e.textContent)")
    assert said[0] == "Tue 17 Mar 2026, 14:10"
    assert re.fullmatch(r"Mean of 5 1[12]\.\d{3} mm · limits 11\.989 to 12\.011", said[1])
    assert re.fullmatch(r"Range of 5 0\.\d{3} mm · upper limit 0\.0(39|40)", said[2])
    assert said[3] == "S89 · n = 5"
    assert said[-1] == "low since about 16 Mar"
    page.press("ArrowLeft")
    assert (
        page.evaluate("document.querySelector('.chart-note').firstChild.textContent")
        == "Tue 17 Mar 2026, 12:10"
    )
    page.press("Home")
    assert page.evaluate("document.querySelector('.chart-note').textContent.includes('in the baseline')")
    page.press("Escape")
    assert page.evaluate("document.querySelector('.chart-note').hidden")
    assert_silent(page, tmp_path)


def test_points_are_read_by_pointer_and_the_note_stays_inside(
    page: Page, tmp_path: Path, kinds: KindsScript
) -> None:
    page.size(390, 900)
    opened(page, tmp_path, finding("bore"), kinds)
    box = json.loads(
        page.evaluate("JSON.stringify(document.querySelector('.chart-live').getBoundingClientRect())")
    )
    for share in (0.05, 0.4, 0.72):
        page.move_to(box["left"] + box["width"] * share, box["top"] + 120)
        page.wait_for("!document.querySelector('.chart-note').hidden")
        assert page.evaluate("document.documentElement.scrollWidth <= innerWidth")
    page.move_to(2, 2)
    page.wait_for("document.querySelector('.chart-note').hidden")
    assert_silent(page, tmp_path)


def test_the_stretch_is_chosen_by_button_and_kept_in_the_address(
    page: Page, tmp_path: Path, kinds: KindsScript
) -> None:
    made = two_eras(n=140)
    opened(page, tmp_path, made, kinds)
    texts = page.evaluate("[...document.querySelectorAll('.chart-choice button')].map((b) => b.textContent)")
    assert texts == ["last 60", "since limits", "all"]
    page.evaluate("document.querySelector('button[data-choice=limits]').click()")
    assert page.evaluate(MARKS)["location"] == 70
    assert page.evaluate("location.hash") == "#show=limits"
    assert page.evaluate("document.querySelector('button[aria-pressed=true]').textContent") == "since limits"
    page.evaluate("location.hash = '#show=60'")
    page.wait_for(f"({MARKS}).location === 60")
    assert_silent(page, tmp_path)


def test_an_address_opens_on_its_stretch(page: Page, tmp_path: Path, kinds: KindsScript) -> None:
    opened(page, tmp_path, two_eras(n=140), kinds, fragment="#show=60")
    assert page.evaluate(MARKS)["location"] == 60


def test_a_chart_follows_the_width_of_its_page(page: Page, tmp_path: Path, kinds: KindsScript) -> None:
    opened(page, tmp_path, finding("bore"), kinds)
    for width in (1000, 600, 390, 1440):
        page.size(width, 900)
        page.evaluate(SETTLED)
        page.wait_for(
            "Math.abs(document.querySelector('.chart-view svg').getBoundingClientRect().width"
            " - document.querySelector('.chart-live').clientWidth) <= 1"
        )
    assert_silent(page, tmp_path)


def test_a_value_beyond_the_scale_points_outwards_and_is_read_as_it_is(
    page: Page, tmp_path: Path, kinds: KindsScript
) -> None:
    opened(page, tmp_path, varied()["wild"], kinds)
    page.evaluate("document.querySelector('.chart-live').focus()")
    page.press("Home")
    for _ in range(60):
        page.press("ArrowRight")
    said = page.evaluate("document.querySelector('.chart-note').textContent")
    assert "Value 4000.000 bar" in said
    assert "drawn at the edge" in said
    assert_silent(page, tmp_path)


def test_where_many_points_share_a_time_they_stand_in_order_and_still_tell_it(
    page: Page, tmp_path: Path, kinds: KindsScript
) -> None:
    made = dated()
    opened(page, tmp_path, made, kinds)
    texts = page.evaluate("[...document.querySelectorAll('.chart-view text')].map((e) => e.textContent)")
    assert "in order; many share a time" in texts
    assert "100" in texts  # an order below the axis
    places = page.evaluate(
        "new Set([...document.querySelectorAll('g.mark-symbol[class*=location_points] path')]"
        ".map((e) => Math.round(10 * e.getBoundingClientRect().left))).size"
    )
    assert places > 130
    page.evaluate("document.querySelector('.chart-live').focus()")
    page.press("Home")
    said = page.evaluate("[...document.querySelector('.chart-note').children].map((e) => e.textContent)")
    assert re.fullmatch(r"\w{3} \d+ Mar 2026, 14:10", said[0])
    assert any(line.startswith("S0 · n = ") for line in said)
    assert page.evaluate(CLASHES) == []
    assert_silent(page, tmp_path)
