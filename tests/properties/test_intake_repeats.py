"""Exports that overlap, arrive in any order or correct each other, against a plain loop over the rows."""

from __future__ import annotations

import tempfile
from pathlib import Path
from typing import Any

from hypothesis import given, settings
from hypothesis import strategies as st
from tests.intake.folders import STAMPED, adds_up, settings_of, take_in

from holdsteady.intake.readings import Intake

KEYED: dict[str, Any] = {**STAMPED, "key": ("stamp", "serial")}
FAMILY: tuple[dict[str, Any], ...] = (
    {"id": "c", "source": "s", "value": "v", "subgroup": {"column": "serial"}},
    {"id": "d", "source": "s", "value": "w", "each": ("lot",)},
)
Row = tuple[int, str, str, str, str]  # hour, serial, lot, v, w
NUMBERS = st.sampled_from(["1", "1.0", "2", "2.5", "bad", "", "<3"])
ROWS: st.SearchStrategy[Row] = st.tuples(
    st.integers(0, 5), st.sampled_from("AB"), st.sampled_from("xy"), NUMBERS, NUMBERS
)


def text(rows: list[Row]) -> str:
    lines = ["stamp,serial,lot,v,w"]
    lines += [f"2025-01-01 {hour:02d}:00,{','.join(rest)}" for hour, *rest in rows]
    return "\n".join(lines) + "\n"


def read_back(files: dict[str, list[Row]]) -> Intake:
    with tempfile.TemporaryDirectory() as folder:
        contents = {name: text(rows) for name, rows in files.items()}
        intake = take_in(Path(folder), contents, settings_of(*FAMILY, source=KEYED))
    adds_up(intake)
    return intake


def said(intake: Intake) -> dict[str, list[Any]]:
    """What the readings say, wherever they stand: those of one time come in the order of files."""
    return {
        one.name: sorted(
            zip(
                [] if one.time is None else one.time.tolist(),
                one.values[:, 0].tolist(),
                one.subgroup or [""] * one.line.size,
                strict=True,
            )
        )
        for several in intake.readings.values()
        for one in several
    }


TABLES = st.lists(
    st.tuples(st.integers(0, 23), st.sampled_from("ABC"), st.sampled_from("xy"), NUMBERS, NUMBERS),
    unique_by=lambda row: row[:2],
    max_size=15,
).map(lambda rows: sorted(rows, key=lambda row: row[:2]))


@settings(max_examples=80, deadline=None)
@given(TABLES, st.lists(st.tuples(st.integers(0, 15), st.integers(0, 15)), max_size=4), st.randoms())
def test_any_overlapping_exports_read_back_as_the_table(
    table: list[Row], spans: list[tuple[int, int]], random: Any
) -> None:
    """Whatever the exports are called, and so in whatever order they are taken for new."""
    parts = [table[min(span) : max(span)] for span in spans]
    covered = {row[:2] for part in parts for row in part}
    parts.append([row for row in table if row[:2] not in covered])
    random.shuffle(parts)
    split = read_back({f"{index}.csv": part for index, part in enumerate(parts)})
    assert said(split) == said(read_back({"whole.csv": table}))
    assert all(one.corrected == 0 for one in split.files)
    assert sum(one.repeated for one in split.files) == sum(map(len, parts)) - len(table)


@settings(max_examples=120, deadline=None)
@given(st.lists(st.lists(ROWS, max_size=6), min_size=1, max_size=4))
def test_as_a_plain_loop_over_the_rows_has_it(parts: list[list[Row]]) -> None:
    intake = read_back({f"{index}.csv": rows for index, rows in enumerate(parts)})
    groups: dict[tuple[int, str], list[tuple[int, int, Any]]] = {}
    for file, rows in enumerate(parts):
        for line, (hour, serial, *rest) in enumerate(rows, start=2):
            content = tuple(float(cell) if cell[:1].isdigit() else cell for cell in rest)
            groups.setdefault((hour, serial), []).append((file, line, content))
    repeated, corrected, kept = [0] * len(parts), [0] * len(parts), []
    corrections = []
    for members in groups.values():
        seen = []
        truth = members[-1][2]
        for place, (file, line, content) in enumerate(members):
            if content in seen:
                repeated[file] += 1
            elif content == truth:
                kept.append((file, line))
            else:
                corrected[file] += 1
                later = next(one for one in members[place:] if one[2] == truth)
                is_first = truth not in seen
                by = later if is_first else members[-1]
                corrections.append((file, line, *by[:2]))
            seen.append(content)
    assert [one.repeated for one in intake.files] == repeated
    assert [one.corrected for one in intake.files] == corrected
    places = {
        (int(file), int(line))
        for several in intake.readings.values()
        for one in several
        for file, line in zip(one.file, one.line, strict=True)
    }
    assert places <= set(kept)
    found = [(int(one.file[0]), one.line, int(one.by_file[0]), one.by_line) for one in intake.corrections]
    assert found == sorted(corrections)


@settings(max_examples=60, deadline=None)
@given(TABLES, st.integers(0, 14), st.sampled_from(["7", "8.25"]))
def test_a_correction_in_a_newer_file_wins(table: list[Row], at: int, value: str) -> None:
    if not table:
        return
    hour, serial, lot, _, w = table[at % len(table)]
    fixed = [(hour, serial, lot, value, w) if row[:2] == (hour, serial) else row for row in table]
    intake = read_back({"a.csv": table, "b.csv": [(hour, serial, lot, value, w)]})
    assert said(intake) == said(read_back({"a.csv": fixed}))
    assert [one.corrected for one in intake.files] == [1, 0]


@settings(max_examples=30, deadline=None)
@given(st.lists(st.lists(ROWS, max_size=5), min_size=2, max_size=4), st.randoms())
def test_the_order_in_which_files_arrive_says_nothing(parts: list[list[Row]], random: Any) -> None:
    named = [(f"{index}.csv", rows) for index, rows in enumerate(parts)]
    shuffled = random.sample(named, len(named))
    one, other = read_back(dict(named)), read_back(dict(shuffled))
    assert (one.files, one.set_aside, one.corrections) == (other.files, other.set_aside, other.corrections)
    assert said(one) == said(other)
