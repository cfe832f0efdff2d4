"""Pages for those who hear them, and for those who hold them on paper."""

from __future__ import annotations

from itertools import pairwise

from tests.made_findings import all_findings
from tests.site.made_site import Element, Reader, made_intake, made_view
from tests.site.test_pages import page, pages
from tests.small_project import CACHE

from holdsteady.site.render import render

ROLES = {"table": "table", "thead": "rowgroup", "tbody": "rowgroup", "tr": "row", "td": "cell"}
NAMELESS = {"code", "p", "div", "span", "strong", "caption", "dt", "dd"}  # by themselves


def narrow_tables(reader: Reader) -> list[list[Element]]:
    """The tables that a narrow screen takes apart, each with the elements in it."""
    places = [i for i, e in enumerate(reader.elements) if e.tag == "table"]
    inside = {*ROLES, "th"}
    tables = [
        [e for e in reader.elements[start:stop] if e.tag in inside]
        for start, stop in pairwise([*places, len(reader.elements)])
    ]
    return [table for table in tables if "constants" not in table[0].attributes["class"].split()]


def test_tables_keep_their_meaning_where_a_narrow_screen_takes_them_apart() -> None:
    seen = 0
    for path, reader in pages():
        for table in narrow_tables(reader):
            seen += 1
            for element in table:
                wanted = ROLES.get(element.tag)
                if element.tag == "th":
                    wanted = "columnheader" if element.attributes["scope"] == "col" else "rowheader"
                assert element.attributes.get("role") == wanted, (path, element)
    assert seen > 10


def test_every_row_of_data_has_one_head() -> None:
    for path, reader in pages():
        for table in narrow_tables(reader):
            body = table[next(i for i, e in enumerate(table) if e.tag == "tbody") :]
            rows = [i for i, e in enumerate(body) if e.tag == "tr"]
            for start, stop in pairwise([*rows, len(body)]):
                heads = [e for e in body[start:stop] if e.tag == "th"]
                assert len(heads) == 1, (path, [e.text for e in body[start:stop]])


def test_names_are_given_only_to_what_may_have_one_and_lead_somewhere() -> None:
    for path, reader in pages():
        ids = [e.attributes["id"] for e in reader.elements if "id" in e.attributes]
        assert len(ids) == len(set(ids)), path
        for element in reader.elements:
            if {"aria-label", "aria-labelledby"} & set(element.attributes):
                assert element.tag not in NAMELESS or "role" in element.attributes, (path, element.tag)
            assert element.attributes.get("aria-labelledby", ids[0]) in ids, path


def test_a_figure_is_named_by_the_sentence_of_its_page_and_has_a_caption() -> None:
    reader = page("characteristic/bore-press-2.html")
    assert reader.one("figure").attributes["aria-labelledby"] == reader.one("h1").attributes["id"]
    assert reader.one("figcaption").text


def test_a_line_to_copy_is_named_by_its_case() -> None:
    reader = page("characteristic/bore-press-2.html")
    box = reader.one("div", class_="copy")
    assert box.attributes["aria-label"] == "Line for logbook.csv, case c-bore[press=2]1"
    assert (box.attributes["role"], box.attributes["tabindex"]) == ("group", "0")
    assert box.text == reader.one("code", class_="line").text


def test_paper_says_which_page_it_is_and_where_the_folded_rest_lies() -> None:
    for path, reader in pages():
        assert reader.one("footer", class_="site").text.endswith(f"· {path}")
        assert len(reader.all("p", class_="paper")) == len(reader.all("details")), path
    files = render(all_findings(), made_intake(files=60), made_view(), cache=CACHE)
    reader = page("data.html", files)
    assert reader.all("details")
    assert len(reader.all("p", class_="paper")) == len(reader.all("details"))
    assert "all files are in tables/files.csv" in reader.one("main").text
