"""The data page: examples, files, reasons, lateness and members, and that it stays small."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest
from tests.made_findings import AS_OF, HOUR, finding
from tests.site.made_site import HOSTILE, Reader, file_account, made_view
from tests.small_project import CACHE

from holdsteady.build import build
from holdsteady.intake.readings import Example, ExampleCell, FileAccount, Intake, SetAside
from holdsteady.monitor.arrivals import Arrivals, Lateness, Member
from holdsteady.site.render import render

DAY = 24 * HOUR


def example(*, text: str = "12,004", number: float | None = 12.004, line: int = 7) -> Example:
    """A row of a press."""
    return Example(
        line=line,
        cells=(
            ExampleCell(column="stamp", text="17.03.2026 14:10:05", role="time", time=AS_OF + 5_000_000),
            ExampleCell(column="press", text="2", role="label"),
            ExampleCell(column="bore_mm", text=text, role="number", number=number),
        ),
    )


def account(file: str, **given: Any) -> FileAccount:
    """A file whose header names two columns that nothing asks for."""
    header = ("stamp", "press", "bore_mm", "lot", "operator")
    plain: dict[str, Any] = {"header": header, "columns": 5, "example": example()}
    return replace(file_account(file), **(plain | given))


def data_page(
    files: Sequence[FileAccount] = (), aside: Sequence[SetAside] = (), **view: object
) -> tuple[Reader, int]:
    """The page of a site with these files, and its size in bytes."""
    intake = Intake(
        readings={}, files=tuple(files), set_aside=tuple(aside), problems=(), censored={}, implausible={}
    )
    content = render([finding("a")], intake, made_view(**view), cache=CACHE)["data.html"]
    return Reader(content), len(content)


def cells(reader: Reader) -> list[str]:
    table = reader.one("table", class_="example")
    return [text for text in table.text.split("Read as ")[1].split(" ") if text]


def test_an_example_stands_beside_what_it_was_read_as() -> None:
    reader, _ = data_page([account("press/p1.csv"), account("press/p2.csv")])
    text = reader.one("table", class_="example").text
    assert "stamp 17.03.2026 14:10:05 Tue 17 Mar 2026, 14:10:05" in text
    assert "press 2 text" in text
    assert "bore_mm 12,004 12.004" in text
    said = reader.one("main").text
    assert "For example press/p1.csv:7:" in said
    assert "Nothing asks for: lot, operator." in said
    assert "Read as utf-8 · semicolon · decimal comma · %d.%m.%Y %H:%M:%S." in said


@pytest.mark.parametrize(
    ("text", "number", "read_as"),
    [
        ("", None, "empty"),
        ("ERR", None, "no number"),
        ("<0.05", None, "a limit, no value"),
        ("1'234,5", 1234.5, "1234.5"),
        ("-12345,25", -12345.25, "−12\u202f345.25"),
        ("12,0", 12.0, "12"),
        ("1e-9", 1e-9, "1e−09"),
    ],
)
def test_every_cell_of_an_example_is_said(text: str, number: float | None, read_as: str) -> None:
    reader, _ = data_page([account("p.csv", example=example(text=text, number=number))])
    assert reader.all("td", data_name="Read as")[-1].text == read_as


def test_files_laid_out_differently_have_an_example_each() -> None:
    other = account(
        "press/p2.csv", encoding="cp1252", delimiter=",", decimal=".", header=("stamp", "bore_mm"), columns=2
    )
    reader, _ = data_page([account("press/p1.csv"), other, account("press/p3.csv")])
    said = reader.one("main").text
    assert "2 files read as utf-8 · semicolon" in said
    assert "1 file read as cp1252 · comma · decimal point" in said
    assert [t.attributes["class"] for t in reader.all("table", class_="example")] == ["rows example"] * 2


def test_more_layouts_than_a_few_are_counted() -> None:
    files = [account(f"p{i}.csv", header=(f"c{i}",), columns=1) for i in range(9)]
    reader, _ = data_page(files)
    assert len(reader.all("table", class_="example")) == 4
    assert "5 more ways in which files are laid out." in reader.one("main").text


def test_a_file_without_a_usable_row_has_no_example() -> None:
    reader, _ = data_page([account("p.csv", example=None)])
    assert not reader.all("table", class_="example")


def test_columns_that_nothing_asks_for_are_cut_and_counted() -> None:
    names = ("stamp", "press", "bore_mm", *(f"c{i}" for i in range(97)))
    reader, size = data_page([account("p.csv", header=names, columns=10_000)])
    assert "c11 and 9985 more columns." in reader.one("main").text
    assert size < 20_000


def test_a_thousand_files_stay_readable_and_small() -> None:
    files = [account(f"press/p{i:04d}.csv", set_aside=int(i % 9 == 0), used=450) for i in range(1_000)]
    aside = [
        SetAside(file=f"press/p{i:04d}.csv", line=i, column="bore_mm", reason="not a number", text="ERR")
        for i in range(0, 1_000, 9)
    ]
    reader, size = data_page(files, aside)
    assert size < 200_000
    files_shown = [e.text for e in reader.all("th", class_="main") if e.text.startswith("press/")]
    in_sight = files_shown[5 + 45 :][:20]  # after the lines of the one reason
    assert in_sight == [f"press/p{i:04d}.csv" for i in range(0, 180, 9)]
    assert "150 more files, nothing set aside" in [s.text for s in reader.all("summary")]
    assert "830 more are in tables/files.csv." in reader.one("main").text


def test_many_sources_share_one_allowance() -> None:
    files = [account(f"s{s}/p{i:03d}.csv", source=f"s{s:02d}") for s in range(30) for i in range(100)]
    reader, size = data_page(files)
    folded = [s.text for s in reader.all("summary")]
    assert folded == ["100 files, nothing set aside"] * 6
    assert reader.one("main").text.count("100 more are in tables/files.csv.") == 24
    assert size < 600_000


def test_no_reason_hides_another_and_whole_files_come_first() -> None:
    many = [
        SetAside(file=f"p{i // 400}.csv", line=i, column="v", reason="not a number", text="ERR")
        for i in range(1_200)
    ]
    few = [
        SetAside(file="p0.csv", line=9, column="", reason="the header again", text="stamp;v"),
        SetAside(file="q.csv", line=None, column="", reason="a picture; take it out of `files`", text=""),
    ]
    reader, _ = data_page([account("p0.csv")], [*many, *few])
    headings = [h.text for h in reader.all("h3")]
    assert headings == [
        "a picture; take it out of `files` 1 in 1 file",
        "not a number 1200 in 3 files",
        "the header again 1 in 1 file",
    ]
    table = reader.all("table", class_="aside")[1]
    assert all(f"p{i}.csv:" in table.text for i in range(3))  # a line of each file
    assert "1150 more are in tables/set-aside.csv." in reader.one("main").text
    assert "name it under `missing` of its source" in reader.one("main").text


def late(name: str, *, late: int, last: int = AS_OF - 40 * HOUR) -> Lateness:
    return Lateness(
        name=name, slug=name, title=name.title(), last=last, due=last + 8 * HOUR, late=late, cadence=8 * HOUR
    )


def test_lateness_is_said_with_its_denominator() -> None:
    arrivals = Arrivals(lateness=(late("bore", late=20 * HOUR), late("mass", late=0)))
    reader, _ = data_page(arrivals=arrivals)
    text = reader.one("main").text
    assert "1 of 2 characteristics with a cadence is late" in text
    assert reader.one("a", href="characteristic/bore.html").text == "Bore"
    assert reader.all("td", data_name="Late by")[0].text == "20 hours"
    assert [td.text for td in reader.all("td", data_name="Due")] == ["Mon 06:10", "Mon 06:10"]
    assert reader.all("td", data_name="Cadence")[0].text == "every 8 hours"


def test_what_is_all_on_time_is_said_and_without_cadence_nothing_is() -> None:
    reader, _ = data_page(arrivals=Arrivals(lateness=(late("bore", late=0), late("mass", late=0))))
    assert "All 2 with a cadence are on time." in reader.one("main").text
    reader, _ = data_page()
    assert "Late" not in [h.text for h in reader.all("h2")]


def test_new_and_gone_members_are_named() -> None:
    new = Member(
        family="bore", name="bore[press=4]", slug="bore-press-4", title="Bore, press 4", change="new",
        since=AS_OF - 2 * DAY,
    )  # fmt: skip
    gone = replace(new, title=f"Bore {HOSTILE}", change="gone", since=AS_OF - 30 * DAY)
    members = (new, gone)
    reader, _ = data_page(arrivals=Arrivals(members=members))
    said = [dd.text for dd in reader.all("dd")]
    assert "new: its first reading came at 14:10 on Sunday" in said
    assert "gone: no reading since 14:10 on 15 February, while others of its kind still come" in said


def test_what_became_of_the_other_rows_is_told() -> None:
    reader, _ = data_page([account("p.csv", rows=460, used=440, filtered=12, repeated=7, corrected=1)])
    assert reader.one("p", class_="lede").text == (
        "440 gave a reading to some characteristic; 12 were asked for by none; 7 were there before; "
        "1 was corrected by a newer row. Every row is accounted for."
    )
    assert "460 rows: 440 used, 12 filtered, 7 repeated, 1 corrected, 0 set aside." in reader.one("main").text


def test_corrected_rows_are_listed_with_the_rows_that_count_instead(tmp_path: Path) -> None:
    (tmp_path / "holdsteady.toml").write_text(
        "[site]\nas_of = 2026-03-02T00:00:00\n"
        '[[source]]\nid = "s"\nfiles = ["*.csv"]\ntime = "t"\nkey = ["t"]\n'
        '[[characteristic]]\nid = "x"\nsource = "s"\nvalue = "v"\n'
    )
    (tmp_path / "a.csv").write_text("t,v\n2026-03-01 08:00,1.0\n2026-03-01 09:00,2.0\n")
    (tmp_path / "b.csv").write_text("t,v\n2026-03-01 08:00,1.5\n2026-03-01 09:00,2.0\n")
    build(tmp_path)
    page = (tmp_path / "site/data.html").read_text(encoding="utf-8")
    assert "1 row has the key of a newer row with other values" in page
    assert page.index("a.csv:2</th>") < page.index("b.csv:2</td>")
    files = (tmp_path / "site/tables/files.csv").read_text(encoding="utf-8").splitlines()
    assert files[1].split(",")[3:9] == ["2", "1", "0", "0", "1", "0"]
    assert files[2].split(",")[3:9] == ["2", "1", "0", "1", "0", "0"]
