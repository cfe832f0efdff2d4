"""The same reading twice: cumulative and overlapping exports, and corrections by key."""

from __future__ import annotations

import os
from pathlib import Path
from typing import Any

import pytest
from tests.intake.folders import STAMPED, adds_up, settings_of, take_in, write

from holdsteady.intake import repeats
from holdsteady.intake.readings import Correction, FileAccount, Intake

KEYED: dict[str, Any] = {**STAMPED, "key": ("stamp", "serial")}
HEAD = "stamp,serial,v,w\n"


def keyed(*characteristics: dict[str, Any], **source: Any) -> Any:
    return settings_of(*characteristics, source={**KEYED, **source})


def five(one: FileAccount) -> tuple[int, int, int, int, int, int]:
    return one.rows, one.used, one.filtered, one.repeated, one.corrected, one.set_aside


def accounts(intake: Intake) -> dict[str, tuple[int, int, int, int, int, int]]:
    adds_up(intake)
    return {one.file: five(one) for one in intake.files}


def values(intake: Intake, name: str = "c") -> list[float]:
    return [value for one in intake.readings[name] for value in one.values[:, 0].tolist()]


def test_a_cumulative_export_counts_each_row_once(tmp_path: Path) -> None:
    day = [f"2025-01-0{number} 06:00,A{number},{number}.5,0\n" for number in range(1, 5)]
    files = {f"{number}.csv": HEAD + "".join(day[:number]) for number in range(1, 5)}
    intake = take_in(tmp_path, files, keyed())
    assert values(intake) == [1.5, 2.5, 3.5, 4.5]
    assert accounts(intake) == {
        "1.csv": (1, 1, 0, 0, 0, 0),
        "2.csv": (2, 1, 0, 1, 0, 0),
        "3.csv": (3, 1, 0, 2, 0, 0),
        "4.csv": (4, 1, 0, 3, 0, 0),
    }
    assert intake.corrections == ()


def test_without_a_key_nothing_is_a_repeat(tmp_path: Path) -> None:
    row = "2025-01-01 06:00,A1,1.5,0\n"
    intake = take_in(tmp_path, {"a.csv": HEAD + row + row, "b.csv": HEAD + row})
    assert values(intake) == [1.5, 1.5, 1.5]
    assert accounts(intake) == {"a.csv": (2, 2, 0, 0, 0, 0), "b.csv": (1, 1, 0, 0, 0, 0)}


def test_the_newest_file_corrects_the_others(tmp_path: Path) -> None:
    files = {
        "a.csv": HEAD + "2025-01-01 06:00,A1,1.5,0\n2025-01-01 07:00,A2,2.5,0\n",
        "b.csv": HEAD + "2025-01-01 06:00,A1,1.6,0\n2025-01-01 07:00,A2,2.50,0\n",
        "c.csv": HEAD + "2025-01-01 06:00,A1,1.7,0\n",
    }
    intake = take_in(tmp_path, files, keyed())
    assert values(intake) == [1.7, 2.5]
    assert accounts(intake) == {
        "a.csv": (2, 1, 0, 0, 1, 0),
        "b.csv": (2, 0, 0, 1, 1, 0),
        "c.csv": (1, 1, 0, 0, 0, 0),
    }
    assert intake.corrections == (
        Correction(file="a.csv", line=2, by_file="c.csv", by_line=2),
        Correction(file="b.csv", line=2, by_file="c.csv", by_line=2),
    )


def test_within_a_file_a_later_line_is_newer(tmp_path: Path) -> None:
    text = HEAD + "2025-01-01 06:00,A1,1.5,0\n2025-01-01 06:00,A1,1.6,0\n2025-01-01 06:00, A1 ,1.6,0\n"
    intake = take_in(tmp_path, {"a.csv": text}, keyed())
    assert values(intake) == [1.6]
    assert accounts(intake) == {"a.csv": (3, 1, 0, 1, 1, 0)}
    assert intake.corrections == (Correction(file="a.csv", line=2, by_file="a.csv", by_line=3),)


def test_a_value_that_returns_was_right_from_the_start(tmp_path: Path) -> None:
    said = {"a": "1.5", "b": "1.6", "c": "1.6", "d": "1.5"}
    files = {f"{name}.csv": f"{HEAD}2025-01-01 06:00,A1,{value},0\n" for name, value in said.items()}
    intake = take_in(tmp_path, files, keyed())
    assert values(intake) == [1.5]
    assert intake.readings["c"][0].file.tolist() == [0]
    assert accounts(intake) == {
        "a.csv": (1, 1, 0, 0, 0, 0),
        "b.csv": (1, 0, 0, 0, 1, 0),
        "c.csv": (1, 0, 0, 1, 0, 0),
        "d.csv": (1, 0, 0, 1, 0, 0),
    }
    assert intake.corrections == (Correction(file="b.csv", line=2, by_file="d.csv", by_line=2),)


def test_the_date_of_a_file_can_decide(tmp_path: Path) -> None:
    files = {
        "a.csv": HEAD + "2025-01-01 06:00,A1,1.5,0\n",
        "b.csv": HEAD + "2025-01-01 06:00,A1,1.6,0\n",
    }
    write(tmp_path, files)
    os.utime(tmp_path / "a.csv", (2_000, 2_000))
    os.utime(tmp_path / "b.csv", (1_000, 1_000))
    assert values(take_in(tmp_path, {}, keyed())) == [1.6]
    intake = take_in(tmp_path, {}, keyed(newest="modified"))
    assert values(intake) == [1.5]
    assert accounts(intake) == {"a.csv": (1, 1, 0, 0, 0, 0), "b.csv": (1, 0, 0, 0, 1, 0)}


def test_only_columns_that_are_used_tell_a_correction_from_a_repeat(tmp_path: Path) -> None:
    files = {
        "a.csv": HEAD + "2025-01-01 06:00,A1,1.5,1\n",
        "b.csv": HEAD + "2025-01-01 06:00,A1,1.5,2\n",
    }
    assert accounts(take_in(tmp_path, files, keyed()))["b.csv"] == (1, 0, 0, 1, 0, 0)
    both = keyed({"id": "c", "source": "s", "value": "v"}, {"id": "d", "source": "s", "value": "w"})
    intake = take_in(tmp_path, files, both)
    assert (accounts(intake)["a.csv"], values(intake, "d")) == ((1, 0, 0, 0, 1, 0), [2.0])


@pytest.mark.parametrize(
    ("older", "newer", "outcome"),
    [
        ("1.5", "1.50", "repeated"),
        ("0", "-0", "repeated"),
        ("<0.5", "<0.5", "repeated"),
        ("<0.5", "<0.6", "corrected"),
        ("<0.5", ">0.5", "corrected"),
        ("bad", "bad", "repeated"),
        ("bad", "worse", "corrected"),
        ("", "", "repeated"),
        ("", "0", "corrected"),
        ("1.5", "bad", "corrected"),
    ],
)
def test_how_cells_compare(tmp_path: Path, older: str, newer: str, outcome: str) -> None:
    """A newer row that cannot be read still stands in the place of the older one, and is listed."""
    files = {
        "a.csv": f"{HEAD}2025-01-01 06:00,A1,{older},0\n",
        "b.csv": f"{HEAD}2025-01-01 06:00,A1,{newer},0\n",
    }
    intake = take_in(tmp_path, files, keyed())
    adds_up(intake)
    first, second = intake.files
    assert (second.repeated, first.corrected) == (int(outcome == "repeated"), int(outcome == "corrected"))
    assert sum(one.repeated + one.corrected for one in intake.files) == 1


def test_times_compare_as_times(tmp_path: Path) -> None:
    files = {
        "a.csv": HEAD + "2025-01-01 06:00,A1,1.5,0\n",
        "b.csv": HEAD + "2025-01-01T06:00:00.000,A1,1.5,0\n",
        "c.csv": HEAD.replace(",", ";") + "01.01.2025 06:00;A1;1,5;0\n",
    }
    intake = take_in(tmp_path, files, keyed())
    assert [one[:4] for one in accounts(intake).values()] == [(1, 1, 0, 0), (1, 0, 0, 1), (1, 0, 0, 1)]


def test_another_time_is_a_correction_where_the_key_has_none(tmp_path: Path) -> None:
    files = {
        "a.csv": HEAD + "2025-01-01 06:00,A1,1.5,0\n",
        "b.csv": HEAD + "2025-01-01 07:00,A1,1.5,0\n",
    }
    intake = take_in(tmp_path, files, keyed(key=("serial",)))
    assert accounts(intake)["a.csv"] == (1, 0, 0, 0, 1, 0)
    (readings,) = intake.readings["c"]
    assert readings.time is not None
    assert readings.time.tolist() == [1_735_714_800_000_000]


def test_a_number_can_be_a_key(tmp_path: Path) -> None:
    text = HEAD + "2025-01-01 06:00,A1,1.0,3\n2025-01-01 07:00,A2,1,4\n2025-01-01 08:00,A3,2,4\n"
    both = keyed(
        {"id": "c", "source": "s", "value": "v"}, {"id": "d", "source": "s", "value": "w"}, key=("v",)
    )
    intake = take_in(tmp_path, {"a.csv": text}, both)
    assert accounts(intake)["a.csv"] == (3, 2, 0, 0, 1, 0)
    assert values(intake, "d") == [4.0, 4.0]


def test_one_of_date_and_clock_is_compared_as_text(tmp_path: Path) -> None:
    text = "date,clock,serial,v\n2025-01-01,06:00,A1,1\n2025-01-01,07:00,A1,2\n2025-01-02,06:00,A1,3\n"
    intake = take_in(tmp_path, {"a.csv": text}, keyed(time=("date", "clock"), key=("date", "serial")))
    assert values(intake) == [2.0, 3.0]
    both = keyed(time=("date", "clock"), key=("date", "clock"))
    assert values(take_in(tmp_path, {"a.csv": text}, both)) == [1.0, 2.0, 3.0]


def test_rows_in_whose_key_nothing_stands_are_all_kept(tmp_path: Path) -> None:
    text = HEAD + "2025-01-01 06:00,,1,0\n2025-01-01 07:00, ,2,0\n2025-01-01 08:00,A1,3,0\n"
    intake = take_in(tmp_path, {"a.csv": text}, keyed(key=("serial",)))
    assert accounts(intake)["a.csv"] == (3, 3, 0, 0, 0, 0)


def test_a_file_without_the_key_column_is_set_aside(tmp_path: Path) -> None:
    files = {
        "a.csv": "stamp,v\n2025-01-01 06:00,1.5\n2025-01-01 07:00,2.5\n",
        "b.csv": HEAD + "2025-01-01 06:00,A1,1.5,1\n",
    }
    intake = take_in(tmp_path, files, keyed())
    assert accounts(intake) == {"a.csv": (2, 0, 0, 0, 0, 2), "b.csv": (1, 1, 0, 0, 0, 0)}
    assert [(one.line, one.column, one.reason) for one in intake.set_aside] == [
        (2, "serial", "no column 'serial'"),
        (3, "serial", "no column 'serial'"),
    ]


def test_what_is_repeated_or_corrected_is_not_set_aside_as_well(tmp_path: Path) -> None:
    files = {
        "a.csv": HEAD + "2025-01-01 06:00,A1,bad,0\n2025-01-01 07:00,A2,bad,0\n",
        "b.csv": HEAD + "2025-01-01 06:00,A1,1.5,0\n2025-01-01 07:00,A2,bad,0\n",
    }
    intake = take_in(tmp_path, files, keyed())
    assert accounts(intake) == {"a.csv": (2, 0, 0, 0, 1, 1), "b.csv": (2, 1, 0, 1, 0, 0)}
    assert [(one.file, one.line, one.text) for one in intake.set_aside] == [("a.csv", 3, "bad")]


def test_rows_that_nobody_asks_for_are_repeats_too(tmp_path: Path) -> None:
    row = "2025-01-01 06:00,A1,1.5,0\n"
    narrow = keyed({"id": "c", "source": "s", "value": "v", "where": {"serial": "B9"}})
    intake = take_in(tmp_path, {"a.csv": HEAD + row + row}, narrow)
    assert accounts(intake) == {"a.csv": (2, 0, 1, 1, 0, 0)}


def test_only_the_first_corrections_are_listed(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(repeats, "MOST_LISTED", 2)
    rows = "".join(f"2025-01-01 06:00,A{number},1.5,0\n" for number in range(5))
    intake = take_in(tmp_path, {"a.csv": HEAD + rows, "b.csv": HEAD + rows.replace("1.5", "2")}, keyed())
    assert accounts(intake)["a.csv"] == (5, 0, 0, 0, 5, 0)
    assert [one.line for one in intake.corrections] == [2, 3]
