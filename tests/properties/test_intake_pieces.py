"""A file read with care is taken in pieces: where they are cut changes nothing."""

from __future__ import annotations

import tempfile
from pathlib import Path
from typing import Any
from unittest.mock import patch

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from tests.intake.case_folders import all_cases, take_in
from tests.properties.test_intake_round_trip import same

from holdsteady.intake import careful, fast, rows
from holdsteady.intake.lines import line_pieces, physical_lines, texts_of_lines

TEXTS = st.text(alphabet="ab\n\r,\u00e9", max_size=60)
CASES = [one for one in all_cases() if "long" not in one.name and "many" not in one.name]


@settings(max_examples=200, deadline=None)
@given(TEXTS, st.integers(1, 20))
def test_pieces_hold_whole_lines(text: str, size: int) -> None:
    pieces = list(line_pieces(text.encode(), size))
    assert [is_last for _, is_last in pieces] == [False] * (len(pieces) - 1) + [True] * bool(pieces)
    assert all(piece.endswith(b"\n") for piece, _ in pieces[:-1])
    lines = [line for piece, _ in pieces for line in physical_lines(piece.decode())[0]]
    assert lines == physical_lines(text)[0]


@settings(max_examples=100, deadline=None)
@given(st.text(alphabet="ab\n,\u00e9", max_size=60), st.sampled_from(["\n", "\r\n"]))
def test_texts_are_found_by_their_lines(text: str, end: str) -> None:
    lines, _ = physical_lines(text)
    written = text.replace("\n", end).encode()
    assert texts_of_lines(written, range(1, len(lines) + 1)) == lines
    assert texts_of_lines(written, [len(lines) + 5]) == [""]


@pytest.mark.parametrize("size", [1, 100])
def test_pieces_of_any_size_give_the_same(size: int) -> None:
    for one in CASES:
        with tempfile.TemporaryDirectory() as folder, patch.object(fast, "read", return_value=None):
            project = one.set_up(Path(folder))
            whole = take_in(project)
            with _cut(size):
                same(whole, take_in(project))


def _cut(size: int) -> Any:
    return patch.multiple(careful, _PIECE=size, MOST_JOINED=6)


def test_a_row_of_many_lines_across_pieces(tmp_path: Path) -> None:
    note = "\n".join(f"line {number}" for number in range(5))
    text = "stamp,note,v\n" + "".join(f'2025-03-{day:02d},"{note}",{day}.5\n' for day in range(1, 29))
    (tmp_path / "a.csv").write_text(text + "x\n", encoding="utf-8")
    (tmp_path / "holdsteady.toml").write_text(
        '[[source]]\nid = "s"\nfiles = ["*.csv"]\ntime = "stamp"\n'
        '[[characteristic]]\nid = "c"\nsource = "s"\nvalue = "v"\n',
        encoding="utf-8",
    )
    for size in (1, 50, 100_000):
        with _cut(size), patch.object(rows, "MOST_JOINED", 6):
            intake = take_in(tmp_path)
        assert intake.readings["c"][0].line.tolist() == list(range(2, 2 + 28 * 5, 5))
        assert intake.readings["c"][0].values[:, 0].tolist() == [day + 0.5 for day in range(1, 29)]
        assert [one.line for one in intake.set_aside] == [2 + 28 * 5]
