"""The data page of a project in trouble, as a reader sees it: wide and narrow, light, dark and on paper."""

from __future__ import annotations

from pathlib import Path

import pytest
from tests.browser.browser import Page
from tests.test_check import troubled

from holdsteady.build import build

CENSORED = """
[[source]]
id = "lab"
files = ["lab.csv"]
time = "sampled"

[[characteristic]]
id = "turbidity"
source = "lab"
value = "ntu"
unit = "NTU"
censored = "at-limit"
"""


@pytest.fixture(scope="module")
def site(tmp_path_factory: pytest.TempPathFactory) -> Path:
    project = troubled(tmp_path_factory.mktemp("data") / "p")
    settings = project / "holdsteady.toml"
    settings.write_text(settings.read_text() + CENSORED, encoding="utf-8")
    cells = ["<0.05" if i % 7 == 3 else f"{0.06 + i % 5 / 100:.2f}" for i in range(40)]
    cells[20] = ">0.2"
    rows = [f"2026-03-0{1 + i // 10} {i % 10:02d}:00,{cell}" for i, cell in enumerate(cells)]
    (project / "lab.csv").write_text("\n".join(["sampled,ntu", *rows]) + "\n", encoding="utf-8")
    build(project)
    return project / "site"


@pytest.mark.parametrize("scheme", ["light", "dark"])
@pytest.mark.parametrize("width", [1440, 390])
def test_it_fits_and_says_all(page: Page, site: Path, width: int, scheme: str) -> None:
    page.size(width, 900)
    page.prefer(scheme)
    page.open(site / "data.html")
    assert page.evaluate("document.documentElement.scrollWidth") <= width
    text = page.evaluate("document.body.innerText")
    for said in (
        "12.0 mm",
        "2 fields where the header has 3",
        "Worn insert",
        "picture.csv",
        "with a cadence",
    ):
        assert said in text
    assert page.console == page.exceptions == page.failed == []


def test_what_is_folded_opens(page: Page, site: Path) -> None:
    page.open(site / "data.html")
    shown = "document.querySelector('table.example td').getBoundingClientRect().height"
    assert page.evaluate(shown) > 10
    assert (
        page.evaluate("getComputedStyle(document.querySelectorAll('table.aside thead')[1]).position")
        == "absolute"
    )


def test_on_paper_nothing_is_cut_off(page: Page, site: Path, tmp_path: Path) -> None:
    page.size(718, 1000)  # an upright A4 between its margins, at 96 pixels an inch
    page.prefer("light", medium="print")
    page.open(site / "data.html")
    assert page.evaluate("document.documentElement.scrollWidth") <= 718
    page.pdf(tmp_path / "data.pdf")
    assert (tmp_path / "data.pdf").stat().st_size > 5_000


def test_a_point_known_by_a_limit_has_a_bar_in_the_live_chart(page: Page, site: Path) -> None:
    page.open(site / "characteristic/turbidity.html")
    page.wait_for("document.querySelector('figure.chart').dataset.state === 'live'")
    drawn = page.evaluate(
        "[...document.querySelectorAll('g[class*=location_points] path')].map((p) => p.getAttribute('d'))"
    )
    below = [d for d in drawn if "A" not in d and d.count("M") == 2]
    assert len(below) == 6
    (above,) = [d for d in drawn if d.count("M") == 3]  # with a ring: it is part of an open case
    assert "C" in above
    assert ",-" in above.split("M")[2]  # its stem goes up
    assert not any(",-" in d.split("M")[2] for d in below)
    assert len(drawn) == 40
    page.evaluate("document.querySelector('.chart-live').focus()")
    page.press("Home")
    for _ in range(3):
        page.press("ArrowRight")
    note = page.wait_for("document.querySelector('.chart-note').innerText")
    assert "lies below" in note
    assert page.exceptions == []
