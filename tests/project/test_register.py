"""The limits register: its chain finds every change but the loss of its end."""

from __future__ import annotations

import csv
import hashlib
import io
import tempfile
from dataclasses import replace
from pathlib import Path
from zoneinfo import ZoneInfo

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from holdsteady.project.register import COLUMNS, Register, RegisterLine, next_check, read_register, to_cells

LISBON = ZoneInfo("Europe/Lisbon")
LINE = RegisterLine(
    line=2,
    characteristic="bore[press=2]",
    chart="mean-range",
    panel="location",
    era_from=None,
    in_force_from=1_773_756_600_000_000,
    centre=12.0,
    sigma=0.1 + 0.2,
    parameters={"b": 1, "a": [2.5]},
    width=3.0,
    rules="outside-limits run-one-side:9",
    n=5.0,
    points=25,
    baseline_from=1_773_000_000_000_000,
    baseline_to=1_773_100_000_000_001,
    excluded=0,
    estimator="mean-range",
    reason='quiet, "good" weeks',
    by="A. R.",
    adopted_at=1_780_000_000_000_000,
    version="0.1.0",
    check="",
)


def rows_of(lines: list[RegisterLine]) -> list[list[str]]:
    rows: list[list[str]] = []
    check = ""
    for line in lines:
        cells = to_cells(line, LISBON)
        check = next_check(check, cells)
        rows.append([*cells, check])
    return rows


def text_of(rows: list[list[str]], delimiter: str = ",") -> str:
    out = io.StringIO()
    writer = csv.writer(out, delimiter=delimiter)
    writer.writerows([list(COLUMNS), *rows])
    return out.getvalue()


def read(text: str, encoding: str = "utf-8") -> Register:
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "limits.csv"
        path.write_bytes(text.encode(encoding))
        return read_register(path, LISBON)


def test_the_check_is_as_published() -> None:
    first = hashlib.sha256(b"\x1fbore\x1f12").hexdigest()
    assert next_check("", ["bore", "12"]) == first
    assert next_check(first, ["é"]) == hashlib.sha256(f"{first}\x1fé".encode()).hexdigest()


def test_cells_are_written_at_full_precision_with_offsets() -> None:
    cells = dict(zip(COLUMNS, to_cells(LINE, LISBON), strict=False))
    assert cells["centre"] == "12"
    assert cells["sigma"] == "0.30000000000000004"
    assert cells["parameters"] == '{"a": [2.5], "b": 1}'
    assert cells["era_from"] == ""
    assert cells["in_force_from"] == "2026-03-17T14:10:00+00:00"
    assert cells["adopted_at"] == "2026-05-28T21:26:40+01:00"
    assert cells["n"] == "5"


numbers = st.floats(allow_nan=False, allow_infinity=False)
moments = st.integers(0, 4 * 10**15)


@st.composite
def register_lines(draw: st.DrawFn) -> RegisterLine:
    text = st.text(st.characters(exclude_categories=["Cs", "Cc"]), max_size=8)
    return replace(
        LINE,
        centre=draw(numbers),
        sigma=draw(st.none() | numbers),
        n=draw(st.none() | st.floats(1, 9)),
        points=draw(st.none() | st.integers(0, 99)),
        era_from=draw(st.none() | moments),
        in_force_from=draw(moments),
        adopted_at=draw(moments),
        reason=draw(text),
        by=draw(text),
    )


@given(
    st.lists(register_lines(), max_size=4), st.sampled_from(",;\t"), st.sampled_from(["utf-8", "utf-8-sig"])
)
@settings(max_examples=60, deadline=None)
def test_what_is_written_reads_back(lines: list[RegisterLine], delimiter: str, encoding: str) -> None:
    rows = rows_of(lines)
    register = read(text_of(rows, delimiter), encoding)
    expected = [
        replace(line, line=i, check=row[-1]) for i, (line, row) in enumerate(zip(lines, rows, strict=True), 2)
    ]
    assert register.problems == ()
    assert register.broken_at is None
    assert register.lines == tuple(expected)
    assert register.last_check == (rows[-1][-1] if rows else "")


@given(st.data())
@settings(max_examples=150, deadline=None)
def test_any_edit_loss_or_move_is_found(data: st.DataObject) -> None:
    count = data.draw(st.integers(2, 6))
    rows = rows_of([replace(LINE, centre=float(i), reason=f"r{i}") for i in range(count)])
    changed = [list(row) for row in rows]
    what = data.draw(st.sampled_from(["edit", "delete", "move", "repeat"]))
    at = data.draw(st.integers(0, count - (2 if what == "delete" else 1)))
    if what == "edit":
        column = data.draw(st.integers(0, len(COLUMNS) - 1))
        changed[at][column] += data.draw(st.sampled_from(["x", "0", " "]))
        first = at
    elif what == "delete":
        del changed[at]
        first = at
    elif what == "repeat":
        to = data.draw(st.integers(0, count))
        changed.insert(to, list(rows[at]))
        first = to + 1 if to == at else to  # the first of two equal lines still follows
    else:
        to = data.draw(st.integers(0, count - 1).filter(lambda t: t != at))
        changed.insert(to, changed.pop(at))
        first = min(at, to)
    register = read(text_of(changed))
    assert register.broken_at == first + 2
    assert (register.problems[0].where, register.problems[0].line) == ("limits.csv", first + 2)


def test_a_break_is_named_and_the_rest_still_used() -> None:
    rows = rows_of([LINE, LINE, LINE])
    rows[1][COLUMNS.index("centre")] = "11.9"
    register = read(text_of(rows))
    assert [line.centre for line in register.lines] == [12.0, 11.9, 12.0]
    (problem,) = register.problems
    assert str(problem) == (
        "limits.csv:3: the check of this line does not follow: "
        "it, or a line before it, was edited, moved or removed"
    )
    assert problem.remedy == "Put the file back as it was, from a copy; limits change by adopting new ones."


@pytest.mark.parametrize(
    ("column", "text", "what"),
    [
        ("centre", "twelve", "`centre` is no number: 'twelve'"),
        ("sigma", "inf", "`sigma` is no number: 'inf'"),
        ("centre", "", "`centre` is empty"),
        ("points", "2.5", "`points` is no whole number: '2.5'"),
        ("parameters", "[1]", "`parameters` is no JSON object: '[1]'"),
        ("era_from", "spring", "`era_from` is no date or time: 'spring'"),
    ],
)
def test_a_line_that_cannot_be_read_is_named(column: str, text: str, what: str) -> None:
    rows = rows_of([LINE, LINE, LINE])
    rows[1][COLUMNS.index(column)] = text
    register = read(text_of(rows))
    assert [line.line for line in register.lines] == [2, 4]
    assert register.broken_at == 3
    assert f"this line is not used: {what}" in [p.what for p in register.problems if p.line == 3]


def test_a_file_that_is_cut_or_of_another_shape_is_broken() -> None:
    text = text_of(rows_of([LINE, LINE]))
    assert read(text[:-5]).broken_at == 3
    assert read(text.replace("centre", "center")).broken_at == 1
    assert read(text.replace('"quiet', "quiet", 1)).broken_at == 2
    assert read("").broken_at is None


def test_a_missing_register_is_empty(tmp_path: Path) -> None:
    assert read_register(tmp_path / "limits.csv", LISBON) == Register()
