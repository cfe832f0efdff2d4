"""The methods page: every formula, rule and doubt as it is applied, with publications in full."""

from __future__ import annotations

import json
import re
from typing import get_args

from tests.site.test_pages import page, site

from holdsteady.project.settings import EstimatorName
from holdsteady.site.references import REFERENCES
from holdsteady.spc.doubt import LEVEL, RECENT_AT_LEAST


def test_every_publication_is_given_in_full_and_no_other() -> None:
    reader = page("methods.html")
    given = [e.text for e in reader.all("li") if e.text in REFERENCES.values()]
    assert given == list(REFERENCES.values())
    main = reader.one("main").text
    cited = main[: main.index(given[0])]
    for name in REFERENCES:
        assert name in cited, name
    names = r"(?:[A-Z][a-z]+(?:, [A-Z][a-z]+)* & )?[A-Z][a-z]+"
    found = set(re.findall(rf"(?:{names}|Western Electric) (?:19|20)\d\d\b", cited))
    assert found == {name for name in REFERENCES if not name.startswith("ISO")}


def test_entries_begin_with_the_names_and_year_they_are_cited_by() -> None:
    for name, full in REFERENCES.items():
        words = re.findall(r"[A-Z][a-z]+|\d{4}", name)
        head = full[: full.index(words[-1]) + 4]
        assert [word for word in words if word not in head] == [], full


def test_shewhart_is_cited_for_the_idea_of_three_sigma_limits_alone() -> None:
    main = page("methods.html").one("main").text
    for before in re.findall(r"(.{36})Shewhart 1931", main):
        assert before.endswith("the idea of three-sigma limits: ")


def test_it_says_what_binds_rules_doubts_and_limits() -> None:
    main = page("methods.html").one("main").text
    for said in (
        "in eight of ten such baselines between 38 and 373",
        "(3 unless set)",
        "about one in 217 (Champ & Woodall 1987)",
        f"at least {RECENT_AT_LEAST}, differ",
        f"{LEVEL:.1%} level".replace("%", " %"),
        "median of their binomial or Poisson distribution",
        "fewer than 5 are expected",
        "more than 2 : 1",
        "Not applied to counts.",
        "larger than sigma",
        "more than a quarter of at least 8 ranges are zero",
    ):
        assert said in main, said


def test_every_estimator_of_the_settings_has_its_formula() -> None:
    names = [e.text for e in page("methods.html").all("dt")]
    assert set(get_args(EstimatorName)) <= set(names)


def test_licence_and_sources_of_charts_are_linked_and_published() -> None:
    links = {e.attributes["href"] for e in page("methods.html").all("a")}
    (licence,) = [path for path in site() if "license" in path]
    assert {licence, "assets/kinds.vl.json"} <= links
    assert b"University of Washington" in site()[licence]
    assert "mean-range" in json.loads(site()["assets/kinds.vl.json"])
