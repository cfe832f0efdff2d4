"""Whole pages: what stands on them, that links lead somewhere, and that text stays text."""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import replace
from functools import cache
from itertools import pairwise, product
from posixpath import dirname, join, normpath
from urllib.parse import unquote

import numpy as np
import pytest
from tests.made_findings import AS_OF, ENTRY, all_findings, finding
from tests.site.made_site import HOSTILE, Reader, file_account, made_intake, made_site, made_view
from tests.small_project import CACHE

from holdsteady import places
from holdsteady.intake.readings import Intake, SetAside
from holdsteady.monitor.finding import Finding, State
from holdsteady.site.render import render
from holdsteady.site.words import CAUTION

POLICY = "default-src 'none'; script-src 'self'; style-src 'self'; img-src 'self' data:"
# What another stage adds to the folder; see the contract of `tables/`.
TABLES = {
    f"tables/{name}.csv" for name in ("characteristics", "cases", "signals", "limits", "files", "set-aside")
} | {f"tables/points/{f.slug}.csv" for f in all_findings()}


@cache
def site() -> dict[str, bytes]:
    return made_site()


def pages(files: dict[str, bytes] | None = None) -> Iterator[tuple[str, Reader]]:
    for path, content in (files or site()).items():
        if path.endswith(".html"):
            yield path, Reader(content)


def page(path: str, files: dict[str, bytes] | None = None) -> Reader:
    return Reader((files or site())[path])


def rows(reader: Reader) -> list[str]:
    return [e.text for e in reader.all("tr") if "data-row" in e.attributes]


def test_every_page_is_there_and_no_other() -> None:
    expected = {"index.html", "signals.html", "data.html", "methods.html"}
    expected |= {f"characteristic/{f.slug}.html" for f in all_findings()}
    assert {path for path in site() if path.endswith(".html")} == expected


def test_every_link_leads_to_a_file_of_the_site() -> None:
    for path, reader in pages():
        for element in reader.elements:
            for name in ("href", "src", "data-src"):
                if name in element.attributes:
                    check_link(path, element.attributes[name])


def check_link(path: str, link: str) -> None:
    assert not re.match(r"[a-z]+:|/", link), f"{path} links out of the folder: {link}"
    target, _, fragment = link.partition("#")
    found = normpath(join(dirname(path), unquote(target))) if target else path
    assert found in site() or found in TABLES, f"{path} links to {link}, which is not there"
    if fragment:
        ids = {e.attributes.get("id") for e in page(found).elements}
        assert fragment in ids, f"{path} links to {link}, which has no such place"


def test_ids_are_unique_on_a_page() -> None:
    for path, reader in pages():
        ids = [e.attributes["id"] for e in reader.elements if "id" in e.attributes]
        assert len(ids) == len(set(ids)), path


def test_nothing_is_inline_and_the_policy_says_so() -> None:
    for path, reader in pages():
        assert reader.one("meta", http_equiv="Content-Security-Policy").attributes["content"] == POLICY
        for element in reader.elements:
            assert element.tag not in {"style", "iframe", "object", "base", "img"}, path
            assert element.tag != "script" or (element.attributes.get("src") and not element.text), path
            assert not [n for n in element.attributes if n == "style" or n.startswith("on")], path


def test_every_page_has_its_landmarks_and_says_how_far_the_data_reach() -> None:
    for path, reader in pages():
        assert reader.one("html").attributes["lang"] == "en"
        assert reader.one("meta", charset="utf-8")
        assert reader.all("title")[0].text.endswith(" · Osmire Filterworks")
        for tag in ("main", "h1"):
            assert len(reader.all(tag)) == 1, (path, tag)
        assert len(reader.all("header", class_="site")) == len(reader.all("footer", class_="site")) == 1
        assert reader.one("a", class_="skip").attributes["href"] == "#main"
        assert reader.one("nav", aria_label="Site")
        assert reader.one("time", class_="reach").text == "data up to Tue 17 Mar 2026, 14:10"
        assert CAUTION in reader.one("footer", class_="site").text
        assert "capability" not in reader.one("nav", aria_label="Site").text.lower()


def test_headings_never_skip_a_level() -> None:
    for path, reader in pages():
        levels = [int(e.tag[1]) for e in reader.elements if re.fullmatch("h[1-6]", e.tag)]
        assert levels[0] == 1
        assert all(b <= a + 1 for a, b in pairwise(levels)), path


def test_hostile_text_is_text() -> None:
    hostile = replace(finding("x", title=HOSTILE, area=HOSTILE, unit=HOSTILE, shift=2.0, state="signalling"))
    settings = hostile.settings.model_copy(update={"gauge": HOSTILE, "owner": HOSTILE, "reaction": HOSTILE})
    entry = replace(ENTRY, text=HOSTILE, by=HOSTILE, action=HOSTILE)
    hostile = replace(hostile, settings=settings, logbook=(entry,))
    files = made_site([hostile])
    for path, reader in pages(files):
        assert not reader.all("img"), path
        assert all(not e.attributes.get("onmouseover") for e in reader.elements), path
    assert page("characteristic/x.html", files).one("h1").text.startswith(HOSTILE)
    assert HOSTILE in page("data.html", files).one("main").text
    script = next(content for path, content in files.items() if path.startswith("assets/data/"))
    assert b"<" not in script


def test_no_page_shows_a_number_that_is_none() -> None:
    for path, reader in pages():
        shown = reader.one("main").text
        assert not re.search(r"\b(nan|inf|None(?! of )|True|False)\b", shown), path


def test_no_page_claims_more_than_a_chart_can() -> None:
    for path, reader in pages():
        assert "root cause" not in reader.one("main").text.lower(), path
        assert not re.search(r"\bC[pP]k?\b|\bPpk?\b", reader.one("main").text), path


def test_the_same_findings_in_another_order_give_the_same_bytes() -> None:
    assert made_site(all_findings()[::-1]) == site()
    assert made_site() == site()


def test_assets_are_named_by_content_in_plain_lower_case() -> None:
    for path in site():
        assert re.fullmatch(r"[a-z0-9./-]+", path), path
    assets = [path for path in site() if path.startswith("assets/") and "/data/" not in path]
    named = {path for path in assets if re.search(r"-[0-9a-f]{16}\.(css|js|txt)$", path)}
    assert set(assets) - named == {"assets/kinds.vl.json"}  # people name it in documents of their own
    other = made_site([finding("bore", seed=5)])
    assert {p for p in site() if p.startswith("assets/app")} == {
        p for p in other if p.startswith("assets/app")
    }


def test_rows_of_the_first_page_can_be_found_by_text_area_and_state() -> None:
    reader = page("index.html")
    found = [e.attributes for e in reader.all("tr") if "data-row" in e.attributes]
    assert len(found) == len(all_findings())
    by_text = {a["data-text"]: (a["data-area"], a["data-state"]) for a in found}
    (bore,) = [t for t in by_text if "bore[press=2]" in t]
    assert bore == "bore diameter, press 2 bore[press=2] pressing cmm-2 pressing cell mm"
    assert by_text[bore] == ("Pressing", "signalling")
    headings = [e.attributes["data-area"] for e in reader.all("tr", class_="area")]
    assert headings == ["Firing", "Pressing", "Inspection & <b>more</b>", "Inspection"]
    options = [e.attributes["value"] for e in reader.all("option")]
    assert set(headings) | {a["data-state"] for a in found} | {""} == set(options)
    assert reader.one("input", id="find")
    assert reader.one("span", id="shown").attributes["aria-live"] == "polite"


def test_the_first_page_says_who_needs_someone_before_all_else() -> None:
    reader = page("index.html")
    assert reader.one("h1").text == "Two of 9 characteristics need someone now."
    work = [e.text for e in reader.all("p", class_="saying")]
    assert work == [
        "Burst pressure has run high since about 04:10 on Monday, by 0.008 bar.",
        "Bore diameter, press 2 has run low since about 04:10 on Monday, by 0.007 mm.",
    ]
    assert [e.text for e in reader.all("div", class_="who")] == [
        "Firing · Pressing cell no reason recorded",
        "Pressing · Pressing cell no reason recorded",
    ]
    (bore,) = [row for row in rows(reader) if row.startswith("Bore diameter, press 2")]
    assert re.search(r"mm\s+signalling\s+1 open\s+14:10$", bore)


def test_one_area_or_none_needs_no_choice_of_areas() -> None:
    reader = page("index.html", made_site([finding("a", area=""), finding("b", area="")]))
    assert not reader.all("tr", class_="area")
    assert not reader.all("select", id="area")
    mixed = page("index.html", made_site([finding("a", area=""), finding("b", area="Firing")]))
    assert [e.text for e in mixed.all("tr", class_="area")] == ["Firing", "Elsewhere"]


def test_the_signals_page_is_an_agenda_with_lines_to_copy() -> None:
    reader = page("signals.html")
    assert reader.one("h1").text == "Two cases are open among 9 characteristics."
    lines = [e.text for e in reader.all("code", class_="line")]
    assert lines[1] == (
        "2026-03-17 14:10,2026-03-16 04:10,2026-03-17 14:11,bore[press=2],c-bore[press=2]1,,cause,,,,"
    )
    assert all(len(line.split(",")) == 11 for line in lines)
    assert reader.all("p", class_="reaction")[0].text.startswith("Stop the press")
    assert "‘Binder lot 118 was too dry’ (A. R.)" in reader.one("table").text
    quiet = page("signals.html", made_site([finding("a")]))
    assert quiet.one("h1").text == "No case is open among 1 characteristic."


def test_a_page_opens_with_its_sentence_and_holds_its_chart() -> None:
    reader = page("characteristic/bore-press-2.html")
    said = "Bore diameter, press 2 has run low since about 04:10 on Monday, by 0.007 mm."
    assert reader.one("h1").text == said
    figure = reader.one("figure", class_="chart")
    assert figure.attributes["data-kind"] == "mean-range"
    assert figure.attributes["data-id"] == "bore-press-2"
    data = site()[normpath(join("characteristic", figure.attributes["data-src"]))]
    assert data.startswith(b'holdsteady.data("bore-press-2",')
    assert len(reader.all("svg")) == 1
    assert "which vary more than their means" in reader.one("figcaption").text
    lede = reader.one("p", class_="lede").text
    assert lede == (
        "Most likely it began between 00:10 and 06:10. That is 1.9 sigma of the sample mean. "
        "None of its 90 readings is outside specification. Nobody has recorded a reason."
    )


def test_limits_their_origin_and_their_calculation_stand_on_the_page() -> None:
    text = page("characteristic/bore-press-2.html").one("main").text
    for said in (
        "Mean of 5 11.989 – 12.000 – 12.011 mm",
        "Range of 5 centre 0.019 mm, upper limit 0.040 mm; no lower limit",
        "Origin adopted by A. R. on 13 Mar: 25 quiet samples",
        "From 25 points, 10 Mar to 12 Mar; 1 left out by the logbook",
        "Sigma 0.00804 mm of a single reading, from the mean range",
        "d2 for n = 5 2.326",
        "Wanted 11.950 to 12.050 mm, target 12.000 mm",
        "Seen none of 450 readings outside so far",
        "18 points in a row below the centre line",
    ):
        assert said in text, said


def test_the_table_of_points_has_every_flagged_point_with_its_origin() -> None:
    (made,) = [f for f in all_findings() if f.slug == "bore-press-2"]
    assert made.points is not None
    flagged = (made.panels[0].met["run-one-side"] != 0) | made.points.excluded | made.points.faulty
    table = next(t for t in page("characteristic/bore-press-2.html").all("table") if "Read from" in t.text)
    assert table.text.count("press/p2.csv:") == flagged.sum() == 12
    assert "measurement fault: not judged press/p2.csv:33" in table.text


def test_many_flagged_points_are_cut_and_counted() -> None:
    made = finding("long", n=400)
    met = {"outside-limits": np.ones(400, dtype=np.int64)}
    made = replace(made, panels=(replace(made.panels[0], met=met), made.panels[1]))
    text = page("characteristic/long.html", made_site([made])).one("main").text
    assert "340 older ones are in the table of all points." in text


def test_class_brings_the_caution_and_nothing_else_does() -> None:
    cautioned = [path for path, reader in pages() if reader.all("p", class_="caution")]
    assert cautioned == ["characteristic/burst.html"]
    regulated = page("characteristic/a.html", made_site([finding("a", class_="Regulatory")]))
    assert "concerning a regulation" in regulated.one("p", class_="caution").text


def test_a_page_without_a_chart_says_why_and_what_to_do() -> None:
    reader = page("characteristic/none.html")
    assert reader.one("h1").text.endswith("cannot be computed: no file matches press/*.csv.")
    assert reader.one("p", class_="lede").text == "Check `files` of source press."
    assert not reader.all("figure")
    assert not reader.all("script")


def test_neighbours_follow_the_order_of_the_first_page() -> None:
    first = [e for e in page("index.html").all("a") if e.attributes["href"].startswith("characteristic/")]
    order = [e.attributes["href"].removeprefix("characteristic/") for e in first[-len(all_findings()) :]]
    for before, after in pairwise(order):
        assert page(f"characteristic/{before}").one("a", rel="next").attributes["href"] == after
        assert page(f"characteristic/{after}").one("a", rel="prev").attributes["href"] == before


@pytest.mark.parametrize(
    ("chart", "state"),
    list(
        product(
            ("individuals", "mean-range", "mean-sd", "median-range", "p", "np", "c", "u"),
            ("steady", "signalling", "answered", "silent", "gathering"),
        )
    ),
)
def test_every_kind_of_chart_in_every_state_has_a_page(chart: str, state: State) -> None:
    for timed in (True, False):
        shift = 2.0 if state in {"signalling", "answered"} else 0.0
        made: Finding = finding(
            "a", chart=chart, state=state, shift=shift, answered=state == "answered", timed=timed, unit=""
        )
        reader = page("characteristic/a.html", made_site([made], data_until=AS_OF if timed else None))
        assert reader.one("h1").text.startswith("a ")
        assert not re.search(r"\b(nan|inf|None(?! of ))\b", reader.one("main").text)


def test_the_data_page_accounts_for_every_file_and_row() -> None:
    reader = page("data.html")
    text = reader.one("main").text
    assert reader.one("h1").text == "1350 rows in 3 files; 2 were set aside."
    assert "press: 3 files" not in text
    assert "3 files, 1350 rows: 1348 used, 2 set aside." in text
    assert "utf-8 · semicolon · decimal comma · %d.%m.%Y %H:%M:%S" in text
    assert "Binder lot 118 was too dry" in text  # the line of the logbook that matches nothing
    assert "no file matches press/*.csv" in text
    assert "ab" * 32 in text


def test_long_lists_are_cut_and_say_so() -> None:
    aside = tuple(
        SetAside(file="a.csv", line=i, column="v", reason="not a number", text="x" * 900) for i in range(230)
    )
    accounts = tuple(file_account(f"f{i:03d}.csv") for i in range(40))
    intake = Intake(readings={}, files=accounts, set_aside=aside, problems=(), censored={})
    reader = Reader(render([finding("a")], intake, made_view(), cache=CACHE)["data.html"])
    text = reader.one("main").text
    assert "180 more are in tables/set-aside.csv." in text
    assert "x" * 161 not in text
    assert [s.text for s in reader.all("summary")] == ["45 more", "40 files, nothing set aside"]


def test_problems_of_the_project_and_of_its_files_are_listed_once() -> None:
    problems = made_intake().problems
    text = Reader(made_site(problems=problems)["data.html"]).one("main").text
    assert text.count("Look at it.") == 1


def test_the_methods_page_has_its_constants_and_every_rule() -> None:
    reader = page("methods.html")
    # ISO 7870-2:2013 and ASTM E2587, table of factors, n = 5, to the digits printed there
    (five,) = [e.text.split() for e in reader.all("tr") if e.text.startswith("5 ")]
    assert [round(float(v), 3) for v in five[1:4]] == [2.326, 0.864, 0.940]
    ids = {e.attributes.get("id") for e in reader.elements}
    assert {"mean-range", "individuals", "p", "np", "c", "u", "mean-sd", "median-range"} <= ids
    assert {"outside-limits", "two-of-three", "trend", "alternating", "hugging", "avoiding-centre"} <= ids


def luminance(colour: str) -> float:
    """Relative luminance (WCAG 2.2)."""
    digits = colour.lstrip("#")
    digits = "".join(c * 2 for c in digits) if len(digits) == 3 else digits
    channels = [int(digits[i : i + 2], 16) / 255 for i in (0, 2, 4)]
    linear = [c / 12.92 if c <= 0.04045 else ((c + 0.055) / 1.055) ** 2.4 for c in channels]
    return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]


def test_every_colour_of_text_stands_out_by_four_and_a_half_to_one() -> None:
    css = (places.templates() / "css" / "site.css").read_text(encoding="utf-8")
    palettes = [
        dict(re.findall(r"--([a-z-]+): (#[0-9a-f]+);", block))
        for block in re.findall(r":root \{([^}]*)\}", css)
    ]
    assert len(palettes) == 3  # light, dark, paper
    for palette in palettes:
        for text in ("ink", "soft", "faint", "open", "said"):
            for ground in ("paper",) if text in {"faint", "open", "said"} else ("paper", "band"):
                light, dark = sorted((luminance(palette[text]), luminance(palette[ground])), reverse=True)
                assert (light + 0.05) / (dark + 0.05) >= 4.5, (text, ground, palette)


def test_templates_are_found_in_the_checkout() -> None:
    assert (places.templates() / "layout.html").is_file()
