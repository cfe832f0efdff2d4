"""Random tables in random dialects read back equal; random bytes and spoilt files are accounted for."""

from __future__ import annotations

import csv
import datetime as dt
import gzip
import io
import tempfile
from collections.abc import Mapping
from contextlib import AbstractContextManager, nullcontext
from pathlib import Path
from typing import Any
from unittest.mock import patch

import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from tests.intake.case_folders import all_cases, take_in
from tests.intake.folders import adds_up, settings_of
from tests.intake.folders import take_in as take_in_files
from tests.properties.test_intake_round_trip import each_row_once, same

from holdsteady.intake import fast
from holdsteady.intake.readings import Intake

EPOCH = dt.datetime(1970, 1, 1)  # noqa: DTZ001  walls of UTC throughout
MOMENTS = st.datetimes(dt.datetime(1970, 1, 2), dt.datetime(2025, 12, 30)).map(  # noqa: DTZ001
    lambda moment: moment.replace(microsecond=0)
)
PROOF = (dt.datetime(2025, 5, 25, 13, 14, 15), "proof", 0.25)  # noqa: DTZ001  day above 12, a mark in no doubt
DATES = ("%Y-%m-%d", "%Y/%m/%d", "%d.%m.%Y", "%d.%m.%y", "%d/%m/%Y", "%m/%d/%Y", "%d-%m-%Y")
CLOCKS = ("%H:%M:%S", "%I:%M:%S %p")
ENCODINGS = ("utf-8", "utf-8-sig", "utf-16-le", "utf-16-be", "utf-16", "cp1252")
GROUPS = ("", "'", "’", " ", "\u00a0", "\u202f", "other")
LOTS = st.text(alphabet="abü€é ß;,|\t\"'0\n", max_size=6)
TABLES = st.lists(
    st.tuples(MOMENTS, LOTS, st.integers(-99_999_999, 99_999_999).map(lambda count: count / 1000)),
    max_size=8,
)
DIALECTS = st.fixed_dictionaries(
    {
        "delimiter": st.sampled_from(",;\t|"),
        "quoting": st.sampled_from([csv.QUOTE_MINIMAL, csv.QUOTE_ALL, csv.QUOTE_NONNUMERIC]),
        "lineterminator": st.sampled_from(["\n", "\r\n", "\r"]),
    }
)
SHAPES = st.fixed_dictionaries(
    {
        "encoding": st.sampled_from(ENCODINGS),
        "mark": st.sampled_from(".,"),
        "group": st.sampled_from(GROUPS),
        "date": st.sampled_from((*DATES, "seconds", "milliseconds")),
        "clock": st.sampled_from(CLOCKS),
        "split": st.booleans(),
        "packed": st.booleans(),
        "preamble": st.sampled_from(["", "gauge 7\n\n", "sep=;\n", "bore; of station\t2, v\n"]),
        "units": st.booleans(),
    }
)


def number(value: float, mark: str, group: str) -> str:
    between = {".": ",", ",": "."}[mark] if group == "other" else group
    return f"{value:,.3f}".replace(",", "\0").replace(".", mark).replace("\0", between)


def stamped(moment: dt.datetime, shape: Mapping[str, Any]) -> list[str]:
    if shape["date"] in ("seconds", "milliseconds"):
        seconds = (moment - EPOCH) // dt.timedelta(seconds=1)
        return [str(seconds) if shape["date"] == "seconds" else f"{seconds}000"]
    parts = [moment.strftime(shape["date"]), moment.strftime(shape["clock"])]
    return parts if shape["split"] else [" ".join(parts)]


def written(table: list[Any], dialect: Mapping[str, Any], shape: Mapping[str, Any]) -> bytes:
    sheet = io.StringIO(newline="")
    writer = csv.writer(sheet, **dialect)
    times = stamped(EPOCH, shape)
    writer.writerow([*("date", "clock")[: len(times)], "lot", "v"])
    if shape["units"]:
        writer.writerow([*("d", "h")[: len(times)], "-", "mm"])
    for moment, lot, value in table:
        writer.writerow([*stamped(moment, shape), lot, number(value, shape["mark"], shape["group"])])
    text = shape["preamble"].replace("\n", dialect["lineterminator"]) + sheet.getvalue()
    data = text.encode(shape["encoding"])
    return gzip.compress(data, mtime=0) if shape["packed"] else data


def _is_also_utf_8(row: Any) -> bool:
    """Whether cp1252 bytes of a row could as well be UTF-8: nothing can tell which was meant."""
    data = repr(row).encode("cp1252", "ignore")
    try:
        return not data.decode("utf-8").isascii()
    except UnicodeDecodeError:
        return False


def fits(table: list[Any], dialect: Mapping[str, Any], shape: Mapping[str, Any]) -> bool:
    """Whether the dialect can hold the table at all."""
    if dialect["lineterminator"] == "\r" and any("\n" in lot for _, lot, _ in table):
        return False  # the writer does not quote a line end that is not its own
    if shape["encoding"] == "cp1252" and shape["group"] == "\u202f":
        return False
    first = min(moment for moment, *_ in table)
    if shape["date"] in ("seconds", "milliseconds"):
        return not shape["split"] and first >= dt.datetime(2001, 9, 10)  # noqa: DTZ001  ten digits
    return True


@settings(max_examples=200, deadline=None)
@given(TABLES, DIALECTS, SHAPES, st.booleans())
def test_any_dialect_reads_back_equal(
    table: list[Any],
    dialect: dict[str, Any],
    shape: dict[str, Any],
    careful: bool,  # noqa: FBT001
) -> None:
    table = [PROOF, *table]
    assume(fits(table, dialect, shape))
    assume(shape["encoding"] != "cp1252" or not any(_is_also_utf_8(row) for row in table))
    time = ("date", "clock") if len(stamped(EPOCH, shape)) == 2 else "date"
    source = {"id": "s", "files": ("*",), "time": time}
    wanted = settings_of(
        {"id": "c", "source": "s", "value": "v", "subgroup": {"column": "lot"}}, source=source
    )
    name = "a.csv.gz" if shape["packed"] else "a.csv"
    with tempfile.TemporaryDirectory() as folder, _way(careful):
        intake = take_in_files(Path(folder), {name: written(table, dialect, shape)}, wanted)
    adds_up(intake)
    (account,) = intake.files
    assert [line.reason for line in intake.set_aside] == ["units, not readings"] * shape["units"]
    assert (account.rows, account.used) == (len(table) + shape["units"], len(table))
    assert account.decimal == shape["mark"]
    (readings,) = intake.readings["c"]
    expected = sorted(table, key=lambda row: row[0])
    assert readings.time is not None
    assert readings.time.tolist() == [(row[0] - EPOCH) // dt.timedelta(microseconds=1) for row in expected]
    assert readings.values[:, 0].tolist() == [value for *_, value in expected]
    assert readings.subgroup == tuple(lot.strip() for _, lot, _ in expected)


def _way(careful: bool) -> AbstractContextManager[Any]:  # noqa: FBT001
    return patch.object(fast, "read", return_value=None) if careful else nullcontext()


BOTH = (
    {"id": "c", "source": "s", "value": "v", "subgroup": {"column": "lot"}},
    {"id": "d", "source": "s", "count": "n", "size": 50, "where": {"lot": "a"}},
)
TEXT_PIECES = st.sampled_from(
    [
        "stamp", "v", "lot", "n", ",", ";", "\t", "|", "\n", "\r", "\r\n", '"', '""', "\0", " ", "1", "12.5",
        "1,5", "1.234", "-", "<", "2025-03-13", "T06:00", "13/03/2025", "é", "\ufeff", "\ufffd", "Total",
        "\u2028", "\x85", "stamp,lot,n,v\n", "2025-03-13T06:00:00,a,1,1.5\n", "\x1a", "1e400", "nan",
        "\x0b", "\x1c",
    ]
)  # fmt: skip
NOISE = st.one_of(
    st.binary(max_size=300),
    st.lists(TEXT_PIECES, max_size=60).map(lambda pieces: "".join(pieces).encode()),
    st.tuples(
        st.lists(TEXT_PIECES, max_size=40).map("".join), st.sampled_from(["utf-16-le", "utf-16", "latin-1"])
    ).map(lambda pair: pair[0].encode(pair[1], "replace")),
    st.binary(max_size=120).map(lambda data: b"\x1f\x8b\x08" + data),
)


def both_ways(files: Mapping[str, bytes], source: Mapping[str, Any]) -> tuple[Intake, Intake]:
    found = []
    for careful in (False, True):
        with tempfile.TemporaryDirectory() as folder, _way(careful):
            found.append(take_in_files(Path(folder), files, settings_of(*BOTH, source=source)))
    return found[0], found[1]


@settings(max_examples=250, deadline=5_000)
@given(
    st.lists(NOISE, min_size=1, max_size=3),
    st.sampled_from([None, "stamp", ("stamp", "lot")]),
    st.sampled_from([None, "utf-8", "utf-16", "cp1252"]),
)
def test_random_bytes_are_accounted_for(pieces: list[bytes], time: Any, encoding: str | None) -> None:
    files = {f"{place}.csv": data for place, data in enumerate(pieces)}
    swift, slow = both_ways(files, {"id": "s", "files": ("*",), "time": time, "encoding": encoding})
    adds_up(swift)
    same(swift, slow)
    each_row_once(swift)


CASES = [
    one
    for one in all_cases()
    if "long" not in one.name
    and "many" not in one.name
    and not any("link" in r or "pipe" in r for r in one.expected.get("make", ()))
]
SPOILING = st.lists(
    st.tuples(
        st.sampled_from(["cut", "drop", "insert", "double", "flip"]),
        st.integers(0, 1_000_000),
        st.integers(1, 40),
        st.sampled_from(
            [b"\0", b'"', b"\n", b"\r", b",", b";", b"\xff", b"\xc3", b"9", b"\xef\xbb\xbf", b" "]
        ),
    ),
    min_size=1,
    max_size=5,
)


def spoilt(data: bytes, steps: list[tuple[str, int, int, bytes]]) -> bytes:
    for kind, place, length, piece in steps:
        at = place % (len(data) + 1)
        match kind:
            case "cut":
                data = data[:at]
            case "drop":
                data = data[:at] + data[at + length :]
            case "insert":
                data = data[:at] + piece * length + data[at:]
            case "double":
                data = data[: at + length] + data[at:]
            case _:
                data = data[:at] + bytes(255 - byte for byte in data[at : at + 1]) + data[at + 1 :]
    return data


@settings(max_examples=200, deadline=5_000)
@given(st.sampled_from(CASES), SPOILING, st.integers(0, 100))
def test_spoilt_cases_are_accounted_for(one: Any, steps: Any, which: int) -> None:
    """Any case with one of its files spoilt: no crash, every row has its outcome, both ways agree."""
    found = []
    for careful in (False, True):
        with tempfile.TemporaryDirectory() as folder, _way(careful):
            project = one.set_up(Path(folder))
            files = sorted(path for path in project.rglob("*") if path.is_file() and path.suffix != ".toml")
            chosen = files[which % len(files)]
            chosen.write_bytes(spoilt(chosen.read_bytes(), steps))
            found.append(take_in(project))
    adds_up(found[0])
    same(*found)
    each_row_once(found[0])


@pytest.mark.parametrize("one", CASES, ids=[one.name for one in CASES])
def test_both_ways_of_reading_agree_on_every_case(one: Any, tmp_path: Path) -> None:
    project = one.set_up(tmp_path)
    swift = take_in(project)
    with _way(careful=True):
        slow = take_in(project)
    same(swift, slow)
    assert swift.problems == slow.problems
