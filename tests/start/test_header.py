"""The header of a table that no settings describe."""

from __future__ import annotations

import pytest

from holdsteady.start.header import find_header, is_data


@pytest.mark.parametrize(
    ("lines", "line", "delimiter", "names"),
    [
        (["stamp,bore", "2026-01-05,12.0", "2026-01-06,12.1"], 1, ",", ("stamp", "bore")),
        (["a;b", "1,5;2,5", "1,6;2,6"], 1, ";", ("a", "b")),
        (["a\tb", "1.5\t2", "1.6\t3"], 1, "\t", ("a", "b")),
        (["a|b", "1.5|2", "1.6|3"], 1, "|", ("a", "b")),
        (["value", "1.5", "1.6"], 1, ",", ("value",)),
        (["Works;;", "Gauge;7;", "", "when;x;y", "05.01.2026;1,5;2"], 4, ";", ("when", "x", "y")),
        (["Works", "Gauge,7", "when,x,y", "2026-01-05,1.5,2"], 3, ",", ("when", "x", "y")),
        (["when,x,y", "-,mm,bar", "2026-01-05,1.5,2", "2026-01-06,1.6,3"], 1, ",", ("when", "x", "y")),
        (["when,1,2,3", "2026-01-05,1.5,2,2", "2026-01-06,1.6,3,3"], 1, ",", ("when", "1", "2", "3")),
        (['"when","x, y"', '"2026-01-05","1.5"', '"2026-01-06","1.6"'], 1, ",", ("when", "x, y")),
    ],
)  # fmt: skip
def test_it_is_found(lines: list[str], line: int, delimiter: str, names: tuple[str, ...]) -> None:
    header = find_header(lines)
    assert header is not None
    assert (header.line, header.delimiter, header.names) == (line, delimiter, names)


@pytest.mark.parametrize("lines", [[], [""], ["words", "more words"], ["1,2", "3,4", "5,6"], ["a,b"]])
def test_there_is_none(lines: list[str]) -> None:
    assert find_header(lines) is None


def test_names_that_stand_twice_cannot_be_used() -> None:
    header = find_header(["a,b,a,", "1,2,3,4", "1,2,3,4"])
    assert header is not None
    assert header.usable == ("b",)


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("1.5", True), ("-1,5", True), ("1.234,5", True), ("<0.05", True), ("1e-3", True), ("06:30", True),
        ("2026-01-05T06:00", True), ("5/1/26", True), ("05.01.2026 06:00", True),
        ("", False), ("mm", False), ("g/cm3", False), ("1 bar", False), ("P1-0001", False), ("set", False),
    ],
)  # fmt: skip
def test_what_looks_like_data(text: str, expected: bool) -> None:  # noqa: FBT001
    assert is_data(text) is expected
