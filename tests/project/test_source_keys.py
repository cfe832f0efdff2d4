"""How a source says where its times are and what its files are written in."""

from __future__ import annotations

from pathlib import Path

import pytest

from holdsteady.problems import Problem, SettingsError
from holdsteady.project.read_settings import read_settings
from holdsteady.project.settings import Source

TEXT = """[[source]]
id = "press"
files = ["*.csv"]
{line}

[[characteristic]]
id = "bore"
source = "press"
value = "bore"
"""


def source(line: str) -> Source:
    return read_settings(TEXT.format(line=line), Path("/nowhere")).source[0]


def problems(line: str) -> tuple[Problem, ...]:
    with pytest.raises(SettingsError) as caught:
        source(line)
    return caught.value.problems


@pytest.mark.parametrize(
    ("line", "time"),
    [
        ("", None),
        ("time = 'stamp'", "stamp"),
        ("time = ['stamp']", "stamp"),
        ("time = ['date', 'clock']", ("date", "clock")),
    ],
)
def test_columns_of_time(line: str, time: object) -> None:
    assert source(line).time == time


@pytest.mark.parametrize(
    "line", ["time = []", "time = ['a', 'b', 'c']", "time = ['a', 1]", "time = ''", "time = 3"]
)
def test_what_cannot_be_columns_of_time(line: str) -> None:
    (problem,) = problems(line)
    assert (problem.where, problem.line) == ("source.press.time", 4)
    assert "the name of a column, or two" in problem.what


def test_one_column_cannot_be_date_and_clock() -> None:
    (problem,) = problems("time = ['a', 'a']")
    assert "names one column twice" in problem.what


@pytest.mark.parametrize("name", ["utf-8", "cp1252", "latin-1", "UTF-16", "utf-16-be", "cp1250", "shift_jis"])
def test_encodings(name: str) -> None:
    assert source(f"encoding = '{name}'").encoding == name


@pytest.mark.parametrize("value", ["'none such'", "'rot13'", "''", "1252", "['utf-8']"])
def test_what_is_no_encoding(value: str) -> None:
    (problem,) = problems(f"encoding = {value}")
    assert (problem.where, problem.line) == ("source.press.encoding", 4)
    assert "must be an encoding of text" in problem.what
