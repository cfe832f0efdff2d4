"""Tables written in any dialect read back equal; damaged ones are accounted for, fast or with care."""

from __future__ import annotations

import csv
import datetime as dt
import io
import tempfile
from pathlib import Path
from typing import Any
from unittest.mock import patch

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st
from tests.intake.folders import STAMPED, adds_up, settings_of, take_in

from holdsteady.intake import fast
from holdsteady.intake.readings import Intake, Readings

EPOCH = dt.datetime(1970, 1, 1)  # noqa: DTZ001  walls of UTC throughout
FORMATS = (
    "%Y-%m-%dT%H:%M:%S", "%Y-%m-%d %H:%M:%S", "%Y-%m-%d %H:%M:%SZ", "%Y/%m/%d %H:%M:%S", "%Y%m%dT%H%M%S",
    "%d.%m.%Y %H:%M:%S", "%d.%m.%y %H:%M:%S", "%d/%m/%Y %H:%M:%S", "%m/%d/%Y %I:%M:%S %p",
    "%d-%m-%Y %H:%M:%S",
)  # fmt: skip
MOMENTS = st.datetimes(dt.datetime(1970, 1, 2), dt.datetime(2025, 12, 30)).map(  # noqa: DTZ001
    lambda moment: moment.replace(microsecond=0)
)
PROOF = (dt.datetime(2025, 5, 25, 13, 14, 15), "proof", 0.25, 0.75)  # noqa: DTZ001  day above 12, two decimals
TEXTS = st.text(alphabet="ab ,;|\t\"'\né0", max_size=8)
HUNDREDTHS = st.integers(-9_999_999, 9_999_999).map(lambda count: count / 100)
TABLES = st.lists(st.tuples(MOMENTS, TEXTS, HUNDREDTHS, st.none() | HUNDREDTHS), max_size=12)
FAMILY: tuple[dict[str, Any], ...] = (
    {"id": "c", "source": "s", "value": "v", "subgroup": {"column": "lot"}},
    {"id": "d", "source": "s", "value": "w", "where": {"lot": "ab"}},
    {"id": "e", "source": "s", "values": ("v", "w"), "each": ("lot",), "plausible": {"upper": 50_000}},
)
DIALECTS = st.fixed_dictionaries(
    {
        "delimiter": st.sampled_from(",;\t|"),
        "quoting": st.sampled_from([csv.QUOTE_MINIMAL, csv.QUOTE_ALL]),
        "lineterminator": st.sampled_from(["\n", "\r\n"]),
    }
)


def number(value: float | None, mark: str) -> str:
    return "" if value is None else f"{value:.2f}".replace(".", mark)


def written(table: list[Any], dialect: dict[str, Any], mark: str, form: str) -> str:
    sheet = io.StringIO(newline="")
    writer = csv.writer(sheet, **dialect)
    writer.writerow(["stamp", "lot", "w", "v"])
    for moment, text, v, w in table:
        writer.writerow([moment.strftime(form), text, number(w, mark), number(v, mark)])
    return sheet.getvalue()


def read_back(files: dict[str, bytes], *, careful: bool = False, **source: Any) -> Intake:
    with tempfile.TemporaryDirectory() as folder:
        wanted = settings_of(*FAMILY, source={**STAMPED, **source})
        if not careful:
            return take_in(Path(folder), files, wanted)
        with patch.object(fast, "read", return_value=None):
            return take_in(Path(folder), files, wanted)


def micros(moment: dt.datetime) -> int:
    return (moment - EPOCH) // dt.timedelta(microseconds=1)


@settings(max_examples=120, deadline=None)
@given(TABLES, DIALECTS, st.sampled_from(".,"), st.sampled_from(FORMATS), st.booleans(), st.booleans())
def test_any_dialect_reads_back_equal(
    table: list[Any],
    dialect: dict[str, Any],
    mark: str,
    form: str,
    marked: bool,  # noqa: FBT001
    ended: bool,  # noqa: FBT001
) -> None:
    table = [PROOF, *table]
    text = written(table, dialect, mark, form)
    text = text if ended else text.removesuffix(dialect["lineterminator"])
    intake = read_back({"a.csv": (("\ufeff" if marked else "") + text).encode()})
    adds_up(intake)
    assert {(one.column, one.reason) for one in intake.set_aside} <= {
        ("v", "not plausible"),
        ("w", "not plausible"),
    }
    (account,) = intake.files
    assert (account.rows, account.used) == (len(table), len(table))
    assert account.decimal == mark
    assert account.delimiter == {"\t": "tab"}.get(dialect["delimiter"], dialect["delimiter"])
    (readings,) = intake.readings["c"]
    expected = sorted(table, key=lambda row: row[0])
    assert readings.time is not None
    assert readings.time.tolist() == [micros(moment) for moment, *_ in expected]
    assert readings.values[:, 0].tolist() == [v for _, _, v, _ in expected]
    assert readings.subgroup == tuple(text.strip() for _, text, *_ in expected)
    narrow = [w for _, text, _, w in expected if text.strip() == "ab" and w is not None]
    assert [one.values[:, 0].tolist() for one in intake.readings["d"]] == ([narrow] if narrow else [])


DAMAGE = st.lists(
    st.tuples(
        st.integers(0, 10_000),
        st.integers(0, 12),
        st.sampled_from(
            ["", '"', "\n", "\r", ",", ";", "\0", "x", " ", ".", "1e400", '"\n"', "\n\n", "<", "é", "-"]
        ),
    ),
    max_size=4,
)


def damaged(text: str, damage: list[tuple[int, int, str]]) -> str:
    for place, length, inserted in damage:
        at = place % (len(text) + 1)
        text = text[:at] + inserted + text[at + length :]
    return text


@settings(max_examples=250, deadline=None)
@given(TABLES, DIALECTS, st.sampled_from(".,"), st.sampled_from(FORMATS), DAMAGE, st.booleans())
def test_damage_is_accounted_for_and_both_ways_agree(
    table: list[Any],
    dialect: dict[str, Any],
    mark: str,
    form: str,
    damage: list[tuple[int, int, str]],
    broken: bool,  # noqa: FBT001
) -> None:
    text = written([PROOF, *table], dialect, mark, form)
    files = {
        "a.csv": (damaged(text, damage) if broken else text).encode(),
        "b.csv": written([PROOF, *table[:3]], dialect, mark, form).encode(),
    }
    swift, slow = read_back(files), read_back(files, careful=True)
    adds_up(swift)
    same(swift, slow)
    each_row_once(swift)


def same(one: Intake, other: Intake) -> None:
    assert one.files == other.files
    assert one.set_aside == other.set_aside
    assert one.censored == other.censored
    assert one.readings.keys() == other.readings.keys()
    for name, members in one.readings.items():
        assert len(members) == len(other.readings[name])
        for left, right in zip(members, other.readings[name], strict=True):
            assert (left.name, left.each, left.subgroup) == (right.name, right.each, right.subgroup)
            for part in ("time", "values", "size", "file", "line"):
                np.testing.assert_array_equal(getattr(left, part), getattr(right, part))


def each_row_once(intake: Intake) -> None:
    """No line gives two readings to a characteristic, and a line is used or listed or neither."""
    touched: dict[str, set[int]] = {one.file: set() for one in intake.files}
    for members in intake.readings.values():
        places = [(one.files[f], int(row)) for one in members for f, row in _places(one)]
        assert len(places) == len(set(places))
        for file, row in places:
            touched[file].add(row)
    for account in intake.files:
        used = touched[account.file]
        assert account.used == len(used)
        listed = {one.line for one in intake.set_aside if one.file == account.file and one.line is not None}
        assert account.set_aside == len(listed - used)


def _places(readings: Readings) -> list[tuple[int, int]]:
    return list(zip(readings.file.tolist(), readings.line.tolist(), strict=True))
