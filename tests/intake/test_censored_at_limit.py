"""Cells that name a limit alone, `<0.05` and `>100`: set aside and counted, or handed on as the limit."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np
import pytest
from tests.intake.folders import ONE, adds_up, settings_of, take_in

from holdsteady.intake.readings import Intake

HEAD = "stamp,v\n"


def taken(folder: Path, *cells: str, **given: Any) -> Intake:
    rows = "".join(f'2025-03-01 {hour:02d}:00,"{cell}"\n' for hour, cell in enumerate(cells))
    intake = take_in(folder, {"a.csv": HEAD + rows}, settings_of({**ONE, **given}))
    adds_up(intake)
    return intake


def test_they_are_set_aside_unless_asked_for(tmp_path: Path) -> None:
    intake = taken(tmp_path, "0.07", "<0.05", "> 100")
    (one,) = intake.readings["c"]
    assert one.values[:, 0].tolist() == [0.07]
    assert one.side is None
    assert intake.censored == {"c": 2}
    assert [(line.line, line.reason, line.text) for line in intake.set_aside] == [
        (3, "censored", "<0.05"),
        (4, "censored", "> 100"),
    ]


def test_at_limit_hands_on_the_limit_and_the_side(tmp_path: Path) -> None:
    intake = taken(tmp_path, "0.07", "<0.05", "> 100", "≤ 0.1", ">=9", "<1'000.5", "<-3", censored="at-limit")
    (one,) = intake.readings["c"]
    assert one.values[:, 0].tolist() == [0.07, 0.05, 100.0, 0.1, 9.0, 1000.5, -3.0]
    assert one.side is not None
    assert one.side[:, 0].tolist() == [0, -1, 1, -1, 1, -1, -1]
    assert intake.censored == {}
    assert intake.set_aside == ()
    assert intake.files[0].used == 7


def test_with_a_decimal_comma(tmp_path: Path) -> None:
    text = "stamp;v\n2025-03-01 00:00;0,07\n2025-03-01 01:00;<0,05\n"
    intake = take_in(tmp_path, {"a.csv": text}, settings_of({**ONE, "censored": "at-limit"}))
    assert intake.readings["c"][0].values[:, 0].tolist() == [0.07, 0.05]


@pytest.mark.parametrize("cell", ["<", "< g", "<abc", "<1e400", "<<1", "<1 g", "1<", "<nan"])
def test_what_names_no_limit_is_no_number(tmp_path: Path, cell: str) -> None:
    intake = taken(tmp_path, "1", cell, censored="at-limit")
    assert intake.readings["c"][0].values[:, 0].tolist() == [1.0]
    assert [line.reason.startswith("not a number") for line in intake.set_aside] == [True]


def test_a_limit_outside_the_plausible_bounds_is_not_plausible(tmp_path: Path) -> None:
    intake = taken(
        tmp_path, "1", "<0.5", ">50", "70", censored="at-limit", plausible={"lower": 0, "upper": 20}
    )
    (one,) = intake.readings["c"]
    assert one.values[:, 0].tolist() == [1.0, 0.5]
    assert intake.implausible == {"c": 2}
    assert [line.reason for line in intake.set_aside] == ["not plausible", "not plausible"]


def test_of_several_values_a_row_only_the_censored_carries_a_side(tmp_path: Path) -> None:
    text = "stamp,a,b\n2025-03-01 00:00,1,<2\n2025-03-01 01:00,,3\n2025-03-01 02:00,4,x\n"
    wide = {"id": "c", "source": "s", "values": ("a", "b"), "censored": "at-limit"}
    (one,) = take_in(tmp_path, {"a.csv": text}, settings_of(wide)).readings["c"]
    np.testing.assert_array_equal(one.values, [[1, 2], [np.nan, 3], [4, np.nan]])
    assert one.side is not None
    assert one.side.tolist() == [[0, -1], [0, 0], [0, 0]]


def test_a_size_is_never_a_limit(tmp_path: Path) -> None:
    text = "stamp,bad,n\n2025-03-01 00:00,1,50\n2025-03-01 01:00,1,>50\n"
    counted = {"id": "c", "source": "s", "count": "bad", "size": "n", "censored": "at-limit"}
    intake = take_in(tmp_path, {"a.csv": text}, settings_of(counted))
    assert intake.readings["c"][0].values[:, 0].tolist() == [1.0]
    assert intake.censored == {"c": 1}


@pytest.mark.parametrize("cell", ["12.3 g", "12.3g", "45 %", "45%", "20 °C", "1.5 g/cm3", "3 of 10"])
def test_a_number_with_a_unit_is_set_aside_with_its_remedy(tmp_path: Path, cell: str) -> None:
    intake = taken(tmp_path, "1", cell)
    assert [(line.line, line.text) for line in intake.set_aside] == [(3, cell)]
    assert "let the export write the number alone" in intake.set_aside[0].reason


@pytest.mark.parametrize("cell", ["0x1F", "1e400", "1_0", "abc", "1 2 3", "12.3.4"])
def test_what_is_no_number_with_a_unit_is_not_called_one(tmp_path: Path, cell: str) -> None:
    assert [line.reason for line in taken(tmp_path, "1", cell).set_aside] == ["not a number"]


def test_members_share_a_file_and_keep_their_own_sides(tmp_path: Path) -> None:
    text = "stamp,press,v\n2025-03-01 00:00,1,<2\n2025-03-01 01:00,2,3\n"
    each = {**ONE, "each": ("press",), "censored": "at-limit"}
    first, second = take_in(tmp_path, {"a.csv": text}, settings_of(each)).readings["c"]
    assert first.side is not None
    assert first.side.tolist() == [[-1]]
    assert second.side is None or not second.side.any()
