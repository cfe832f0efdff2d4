"""The example that each file's account carries: the first usable row as written, and what it was read as."""

from __future__ import annotations

from pathlib import Path

from tests.intake.folders import ONE, STAMPED, settings_of, take_in

from holdsteady.intake.readings import MOST_NAMES, Example, ExampleCell

MOMENT = 1_740_789_000_000_000  # 2025-03-01T00:30Z

EACH = settings_of({**ONE, "each": ("press",)})


def example(folder: Path, text: str | bytes) -> Example | None:
    intake = take_in(folder, {"a.csv": text}, EACH)
    return intake.files[0].example


def cells(number: str, *, value: float | None) -> tuple[ExampleCell, ...]:
    return (
        ExampleCell(column="press", text="P 1", role="label"),
        ExampleCell(column="stamp", text="2025-03-01 00:30", role="time", time=MOMENT),
        ExampleCell(column="v", text=number, role="number", number=value),
    )


def test_of_a_clean_file(tmp_path: Path) -> None:
    text = "press,stamp,other,v\nP 1,2025-03-01 00:30,x,12.5\nP 2,2025-03-01 01:30,x,13.5\n"
    found = example(tmp_path, text)
    assert found == Example(line=2, cells=cells("12.5", value=12.5))
    assert take_in(tmp_path, {}, EACH).files[0].header == ("press", "stamp", "other", "v")


def test_of_a_file_with_a_preamble_units_a_bad_row_and_a_decimal_comma(tmp_path: Path) -> None:
    text = (
        "Gauge 7\n\npress;stamp;v\n;;mm\nP 0;never;1,0\n"
        '"P 1";2025-03-01 00:30;"1\'012,50"\nP 2;2025-03-01 01:30;13,5\n'
    )
    assert example(tmp_path, text) == Example(line=6, cells=cells("1'012,50", value=1012.5))


def test_an_empty_or_unreadable_cell_has_no_number(tmp_path: Path) -> None:
    text = "press,stamp,v\nP 1,2025-03-01 00:30,\nP 1,2025-03-01 00:31,1.5\n"
    assert example(tmp_path, text) == Example(line=2, cells=cells("", value=None))
    text = "press,stamp,v\nP 1,2025-03-01 00:30,<2\nP 1,2025-03-01 00:31,1.5\n"
    assert example(tmp_path, text) == Example(line=2, cells=cells("<2", value=None))


def test_of_a_file_without_rows_there_is_none(tmp_path: Path) -> None:
    assert example(tmp_path, "press,stamp,v\n") is None
    assert example(tmp_path, "") is None
    assert example(tmp_path, b"\x89PNG\r\n\x1a\n" + bytes(range(256))) is None


def test_a_column_that_the_file_lacks_is_left_out(tmp_path: Path) -> None:
    found = example(tmp_path, "stamp,v\n2025-03-01 00:30,1\n")
    assert found is not None
    assert [cell.column for cell in found.cells] == ["stamp", "v"]


def test_ten_thousand_columns_do_not_travel(tmp_path: Path) -> None:
    names = ",".join(f"c{i}" for i in range(9_998))
    row = ",".join("1" for _ in range(9_998))
    settings = settings_of(source=STAMPED)
    text = f"stamp,v,{names}\n2025-03-01 00:30,2,{row}\n"
    (account,) = take_in(tmp_path, {"a.csv": text}, settings).files
    assert (len(account.header), account.columns) == (MOST_NAMES, 10_000)
    assert account.example is not None
    assert [cell.text for cell in account.example.cells] == ["2025-03-01 00:30", "2"]
