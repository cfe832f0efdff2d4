"""The logbook as people and spreadsheets leave it."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path
from zoneinfo import ZoneInfo

import pytest

from holdsteady.problems import Severity
from holdsteady.project.logbook import COLUMNS, Logbook, LogbookEntry, read_logbook

LISBON = ZoneInfo("Europe/Lisbon")
HEADER = ",".join(COLUMNS)
# 2026-05-09T06:00 in Lisbon is 05:00 UTC (summer time); 20582 days from 1970-01-01 to 2026-05-09.
MAY_9 = 20_582 * 86_400_000_000
SIX = MAY_9 + 5 * 3_600_000_000
ENTRY = LogbookEntry(
    line=2,
    entered=SIX,
    when=SIX,
    until=None,
    characteristic="bore",
    case="",
    gauge="",
    kind="cause",
    text="Binder lot 118",
    action="",
    exclude=False,
    by="A. R.",
)


def read(tmp_path: Path, text: str | bytes) -> Logbook:
    path = tmp_path / "logbook.csv"
    path.write_bytes(text if isinstance(text, bytes) else text.encode())
    return read_logbook(path, LISBON)


def said(logbook: Logbook) -> list[tuple[int | None, str, str]]:
    assert all(p.severity is Severity.WARNING and p.where == "logbook.csv" for p in logbook.problems)
    return [(p.line, p.what, p.remedy) for p in logbook.problems]


def test_a_missing_or_empty_file_is_empty(tmp_path: Path) -> None:
    assert read_logbook(tmp_path / "logbook.csv", LISBON) == Logbook()
    assert read(tmp_path, "") == Logbook()
    assert read(tmp_path, HEADER) == Logbook()


LINE = ",2026-05-09 06:00,,bore,,,cause,Binder lot 118,,,A. R."


@pytest.mark.parametrize(
    "text",
    [
        f"{HEADER}\n{LINE}",
        f"\ufeff{HEADER}\r\n{LINE}\r\n",
        f"{HEADER}\r{LINE}\r",
        f"{HEADER};\n{LINE};\n".replace(",", ";"),
        f"{HEADER}\n{LINE}\n".replace(",", "\t"),
        f"{HEADER}\n{LINE},,,\n,,,,\n\n",
        f" {HEADER.title()} \n{LINE}",
        f"{HEADER}\n{LINE.replace('cause', ' Cause ')}",
        f"{HEADER}\n{LINE.replace('Binder lot 118', chr(34) + 'Binder lot 118' + chr(34))}",
        "when,text,kind,by,characteristic\n2026-05-09T06:00:00,Binder lot 118,cause,A. R.,bore",
        f"{HEADER}\n{LINE.replace('2026-05-09 06:00', '2026-05-09T05:00Z')}",
        f"{HEADER}\n{LINE.replace('2026-05-09 06:00', '2026-05-09T07:00:00+02:00')}",
        f"{HEADER}\n{LINE.replace(',,,A. R.', ',,no,A. R.')}",
    ],
)
def test_forms_of_the_same_line(tmp_path: Path, text: str) -> None:
    logbook = read(tmp_path, text)
    assert logbook.problems == ()
    assert logbook.entries == (ENTRY,)


def test_lines_are_counted_where_they_begin(tmp_path: Path) -> None:
    quoted = LINE.replace("Binder lot 118", '"Binder\nlot 118"')
    text = f"\n{HEADER}\n\n{quoted}\n{LINE}\n"
    logbook = read(tmp_path, text)
    assert logbook.problems == ()
    assert [(e.line, e.text) for e in logbook.entries] == [(4, "Binder\nlot 118"), (6, "Binder lot 118")]


def test_dates_and_spans(tmp_path: Path) -> None:
    text = f"{HEADER}\n2026-05-10,2026-05-09,2026-05-09 06:00:30.5,*,,,note,Seen,,,"
    (entry,) = read(tmp_path, text).entries
    midnight = MAY_9 - 3_600_000_000
    assert (entry.when, entry.until) == (midnight, SIX + 30_500_000)
    assert entry.entered == midnight + 86_400_000_000


@pytest.mark.parametrize(
    ("action", "exclude", "kind", "expected"),
    [
        ("", "", "process-change", ("learn", False)),
        ("keep-sigma", "", "process-change", ("keep-sigma", False)),
        ("Keep-Limits", "", "process-change", ("keep-limits", False)),
        ("Lot returned", "yes", "cause", ("Lot returned", True)),
        ("", "1", "measurement-fault", ("", True)),
        ("", "TRUE", "measurement-fault", ("", True)),
        ("", "false", "note", ("", False)),
        ("", "0", "note", ("", False)),
        ("", " No ", "note", ("", False)),
    ],
)
def test_actions_and_exclusions(
    tmp_path: Path, action: str, exclude: str, kind: str, expected: tuple[str, bool]
) -> None:
    (entry,) = read(tmp_path, f"{HEADER}\n,2026-05-09,,bore,,,{kind},T,{action},{exclude},").entries
    assert (entry.action, entry.exclude) == expected


NOT_USED = "this line is not used: "
WRITE = "Write it as in 2026-03-17 14:10, or as a date alone."


@pytest.mark.parametrize(
    ("line", "what", "remedy"),
    [
        (",,,bore,,,cause,T,,,", "`when` is empty", "Fill in `when`."),
        (",2026-05-09,,bore,,,,T,,,", "`kind` is empty", "Fill in `kind`."),
        (",2026-05-09,,bore,,,cause, ,,,", "`text` is empty", "Fill in `text`."),
        (",09.05.2026,,bore,,,cause,T,,,", "`when` is no date or time: '09.05.2026'", WRITE),
        (",2026-02-30,,bore,,,cause,T,,,", "`when` is no date or time: '2026-02-30'", WRITE),
        (",2026-05-09,soon,bore,,,cause,T,,,", "`until` is no date or time: 'soon'", WRITE),
        ("?,2026-05-09,,bore,,,cause,T,,,", "`entered` is no date or time: '?'", WRITE),
        (
            ",2026-05-09,2026-05-09,bore,,,cause,T,,,",
            "`until` is not after `when`",
            "Give a later `until`, or leave it empty for that moment alone.",
        ),
        (
            ",2026-05-09,,bore,,,process change,T,,,",
            "`kind` cannot be 'process change'",
            "Did you mean 'process-change'?",
        ),
        (
            ",2026-05-09,,bore,,,zzz,T,,,",
            "`kind` cannot be 'zzz'",
            "Write one of cause, process-change, measurement-fault, note.",
        ),
        (
            ",2026-05-09,,bore,,,process-change,T,keep,,",
            "`action` cannot be 'keep'",
            "Write one of learn, keep-sigma, keep-limits.",
        ),
        (
            ",2026-05-09,,bore,,,note,T,,maybe,",
            "`exclude` cannot be 'maybe'",
            "Write yes or no, or leave it empty.",
        ),
        (
            ",2026-05-09,,bore,,,cause,Belt, torn,,,A. R.",
            "it has 12 fields where the header has 11",
            "Put a text that holds ',' between quotes.",
        ),
        (
            ',2026-05-09,,bore,,,cause,"Belt torn,,,',
            "its quotes do not match",
            'Put the text between two ", and double those within.',
        ),
    ],
)
def test_a_line_that_cannot_be_read_is_named_and_costs_only_itself(
    tmp_path: Path, line: str, what: str, remedy: str
) -> None:
    logbook = read(tmp_path, f"{HEADER}\n{LINE}\n{line}\n{LINE}\n")
    assert said(logbook) == [(3, NOT_USED + what, remedy)]
    assert logbook.entries == (ENTRY, replace(ENTRY, line=4))


def test_an_open_quote_does_not_swallow_quoted_lines_below(tmp_path: Path) -> None:
    quoted = LINE.replace("Binder lot 118", '"Binder lot 118"')
    logbook = read(tmp_path, f'{HEADER}\n,2026-05-09,,bore,,,cause,"torn,,,\n{quoted}\n{quoted}\n')
    assert [line for line, _, _ in said(logbook)] == [2]
    assert [e.line for e in logbook.entries] == [3, 4]


def test_a_line_in_another_encoding(tmp_path: Path) -> None:
    logbook = read(
        tmp_path, f"{HEADER}\n{LINE}\n".encode() + LINE.replace("Binder", "Bänder").encode("cp1252")
    )
    assert said(logbook) == [(3, NOT_USED + "it is not UTF-8", "Save the file as CSV in UTF-8.")]
    assert logbook.entries == (ENTRY,)


def test_a_file_in_another_form(tmp_path: Path) -> None:
    assert said(read(tmp_path, f"{HEADER}\n{LINE}".encode("utf-16"))) == [
        (None, "is UTF-16, not UTF-8", "Save it as CSV in UTF-8.")
    ]
    assert said(read(tmp_path, LINE)) == [
        (1, "has no column when, kind, text; nothing of the file was used", f"Give it the header {HEADER}.")
    ]


def test_columns_that_are_not_known_are_named(tmp_path: Path) -> None:
    logbook = read(tmp_path, f"{HEADER},untill,text\n{LINE},x,y\n")
    assert said(logbook) == [
        (1, "column 'untill' is not used", "Did you mean 'until'?"),
        (1, "column 'text' stands there twice; the first is used", "Take one out."),
    ]
    assert logbook.entries == (ENTRY,)
