"""Every hostile file or folder of tests/cases: the account of each row, what is listed, and the readings."""

from __future__ import annotations

import functools
import tempfile
from collections.abc import Mapping
from pathlib import Path
from typing import Any
from zoneinfo import ZoneInfo

import pytest
from tests.intake.case_folders import Case, all_cases, case, take_in

from holdsteady.intake.readings import Intake
from holdsteady.times import iso

ALL = all_cases()
OUTCOMES = ("rows", "used", "filtered", "repeated", "corrected", "set_aside")
Found = Mapping[str, list[list[Any]]]


def readings(intake: Intake) -> Found:
    """Return time and value of each reading by characteristic and member, in order."""
    found = {}
    for members in intake.readings.values():
        for one in members:
            assert one.values.shape[1] == 1
            times: list[str | None] = [None] * one.line.size
            if one.time is not None:
                times = [iso(one.time[at : at + 1], ZoneInfo("UTC"))[0] for at in range(one.line.size)]
            found[one.name] = [
                [time, value] for time, value in zip(times, one.values[:, 0].tolist(), strict=True)
            ]
    return found


@functools.cache
def read_of(name: str) -> Found:
    with tempfile.TemporaryDirectory() as folder:
        return readings(take_in(case(name).set_up(Path(folder))))


def expected_readings(one: Case) -> Found:
    expected = one.expected
    if "twin" not in expected:
        return dict(expected["readings"])
    whole = read_of(expected["twin"])
    moments = sorted({time for rows in whole.values() for time, _ in rows})
    survived: dict[str, list[list[Any]]] = {}
    for name, rows in whole.items():
        family = name.partition("[")[0]
        gone = {*expected.get("lost", ()), *expected.get("lost_cells", {}).get(family, ())}
        for time, value in rows:
            place = moments.index(time)
            named = expected.get("renamed", {}).get(name, name)
            if "[" in name:
                named = expected.get("renamed_rows", {}).get(str(place), named)
            if place not in gone:
                survived.setdefault(named, []).append([time, value])
    return survived


@pytest.mark.parametrize("one", ALL, ids=[one.name for one in ALL])
def test_case(one: Case, tmp_path: Path) -> None:
    intake = take_in(one.set_up(tmp_path))
    for account in intake.files:
        parts = [getattr(account, outcome) for outcome in OUTCOMES]
        assert parts[0] == sum(parts[1:]), account
        assert min(parts) >= 0
    compare_accounts(intake, one.expected["files"])
    listed = [[line.file, line.line, line.column, line.reason] for line in intake.set_aside]
    assert [line[:3] for line in listed] == [line[:3] for line in one.expected["set_aside"]], listed
    for (*_, reason), (*_, part) in zip(listed, one.expected["set_aside"], strict=True):
        assert str(part) in str(reason)
    assert readings(intake) == expected_readings(one)
    if "problems" in one.expected:
        remedies = [problem.remedy for problem in intake.problems]
        assert len(remedies) == len(one.expected["problems"]), remedies
        for remedy, part in zip(remedies, one.expected["problems"], strict=True):
            assert part in remedy
    assert intake.censored == one.expected.get("censored", {})


def compare_accounts(intake: Intake, expected: Mapping[str, Mapping[str, Any]]) -> None:
    assert {account.file for account in intake.files} == set(expected)
    for account in intake.files:
        wanted = {"repeated": 0, "corrected": 0, **expected[account.file]}
        assert {key: getattr(account, key) for key in wanted} == wanted, account.file


def test_there_are_enough_of_them() -> None:
    assert len(ALL) >= 60
    assert sum("twin" in one.expected for one in ALL) >= 40
