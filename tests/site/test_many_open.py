"""Many open cases: a characteristic stands once, what found no room is counted, and nothing is lost."""

from __future__ import annotations

import re
from dataclasses import replace
from functools import cache

from tests.made_findings import finding
from tests.site.made_site import Reader, made_site
from tests.site.test_sentences import CLOCK, with_case

from holdsteady.monitor.finding import Finding
from holdsteady.site.headlines import headline
from holdsteady.site.worklist import by_urgency, tiers

MANY = 240


def several(name: str, count: int) -> Finding:
    """A characteristic whose newest case is ongoing, the others over; all are open."""
    made, first = with_case(finding(name, title=name), direction="low")
    first = replace(first, id=f"c-{name}-0", aliases=(f"c-{name}-0",))
    others = tuple(
        replace(
            first, id=f"c-{name}-{i}", first_index=2 * i, fired_index=2 * i, last_index=2 * i + 1,
            start_index=2 * i, ongoing=False, direction="high", shift=0.004, shift_sigma=0.1 * i,
        )
        for i in range(1, count)
    )  # fmt: skip
    signals = tuple(
        replace(
            made.signals[0], id=f"s-{case.id}", case=case.id, first_index=case.first_index,
            fired_index=case.fired_index, last_index=case.last_index, direction=case.direction,
        )
        for case in (first, *others)
    )  # fmt: skip
    cases = tuple(
        replace(case, signals=(signal.id,)) for case, signal in zip((first, *others), signals, strict=True)
    )
    return replace(made, cases=cases[::-1], signals=signals)


@cache
def site() -> dict[str, bytes]:
    return made_site([several(f"x{i:03d}", 9) for i in range(MANY)])


def page(path: str) -> Reader:
    return Reader(site()[path])


def test_a_characteristic_stands_once_with_its_most_urgent_case() -> None:
    made = several("bore", 9)
    (tier,) = tiers([made])
    (work,) = tier.work
    assert work.case.id == "c-bore-0"  # ongoing, though others are no smaller
    assert [case.id for case in work.further] == [f"c-bore-{i}" for i in range(8, 0, -1)]
    assert [case.id for case in by_urgency(made)] == [work.case.id, *(case.id for case in work.further)]
    # The page of a characteristic opens with the case that the worklist shows.
    assert "has run low" in headline(made, CLOCK).text


def test_readings_outside_specification_come_before_size() -> None:
    made = several("bore", 3)
    ongoing = tuple(replace(case, ongoing=True) for case in made.cases)
    (small,) = [case for case in ongoing if case.id == "c-bore-1"]
    cases = tuple(replace(c, outside_specification=2) if c is small else c for c in ongoing)
    (tier,) = tiers([replace(made, cases=cases)])
    assert tier.work[0].case.id == "c-bore-1"


def test_the_first_page_shows_thirty_lines_and_counts_the_rest() -> None:
    reader = page("index.html")
    assert len(reader.all("p", class_="saying")) == 30
    text = reader.one("main").text
    assert text.count("And eight more open cases") == 30
    assert f"{MANY - 30} more characteristics on the signals page" in text
    assert {e.attributes["href"] for e in reader.all("a") if "And eight more" in e.text} >= {
        "characteristic/x000.html#cases"
    }
    assert len([e for e in reader.all("tr") if "data-row" in e.attributes]) == MANY


def test_the_signals_page_tells_two_hundred_in_full_and_names_the_others() -> None:
    reader = page("signals.html")
    assert reader.one("h1").text == f"{9 * MANY} cases are open on {MANY} of {MANY} characteristics."
    assert len(reader.all("p", class_="saying")) == len(reader.all("code", class_="line")) == 200
    assert len(reader.all("ul", class_="further")) == 200
    named = [e.attributes["href"] for e in reader.all("a") if re.fullmatch(r"x\d{3}", e.text)]
    assert len(named) - 200 == MANY - 200
    assert len(set(named)) == MANY
    assert reader.one("main").text.count("9 open") == MANY - 200
    assert len(site()["index.html"]) + len(site()["signals.html"]) < 1_500_000


def test_every_open_case_has_its_line_on_its_own_page() -> None:
    lines = [e.text for e in page("characteristic/x003.html").all("code", class_="line")]
    assert sorted(line.split(",")[4] for line in lines) == [f"c-x003-{i}" for i in range(9)]
    assert lines[0].split(",")[4] == "c-x003-0"
    many = made_site([several("y", 40)])["characteristic/y.html"]
    assert len(Reader(many).all("code", class_="line")) == 30
    assert "10 more cases are open" in Reader(many).one("main").text


def test_long_tables_of_cases_are_cut_and_say_so() -> None:
    def ended(name: str) -> Finding:
        made = several(name, 15)
        cases = tuple(replace(case, state="ended", ongoing=False) for case in made.cases)
        return replace(made, cases=cases, state="steady")

    reader = Reader(made_site([ended(f"z{i}") for i in range(10)])["signals.html"])
    table = reader.one("table")
    assert table.text.count("none recorded") == 100
    assert "The newest 100 of 150; all are in tables/cases.csv." in reader.one("main").text


def test_one_case_each_is_told_as_ever() -> None:
    few = made_site([several("x", 1), finding("s")])
    assert Reader(few["signals.html"]).one("h1").text == "One case is open among 2 characteristics."
    assert "more open" not in Reader(few["index.html"]).one("main").text
    assert "more open" not in Reader(few["signals.html"]).one("main").text
