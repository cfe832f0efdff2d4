"""The stage as a whole: sources together, what is missing, and which way a file is read."""

from __future__ import annotations

from pathlib import Path
from typing import Any
from zoneinfo import ZoneInfo

import pytest
from tests.intake.folders import ONE, PLAIN, STAMPED, adds_up, outcome, settings_of, take_in

from holdsteady.intake import careful
from holdsteady.intake.read import read
from holdsteady.intake.readings import FileAccount
from holdsteady.problems import SettingsError, Severity
from holdsteady.project.settings import Settings


def accounts(files: tuple[FileAccount, ...]) -> dict[tuple[str, str], tuple[int, int, int, int]]:
    return {(one.source, one.file): outcome(one) for one in files}


def two_sources(first: str, second: str) -> Settings:
    return Settings.model_validate(
        {
            "source": (
                {"id": "s", "files": (first,), "time": "stamp"},
                {"id": "t", "files": (second,), "time": "stamp"},
            ),
            "characteristic": (ONE, {"id": "d", "source": "t", "value": "w"}),
        }
    )


def test_a_source_without_files_is_a_message(tmp_path: Path) -> None:
    intake = take_in(tmp_path, {"a.csv": "stamp,v\n2025-01-01,1\n"}, two_sources("a.csv", "nothing.csv"))
    assert intake.readings["d"] == ()
    assert len(intake.readings["c"]) == 1
    (problem,) = intake.problems
    assert problem.severity is Severity.WARNING
    assert str(problem) == "holdsteady.toml: source 't': no file matches nothing.csv"
    (tmp_path / "holdsteady.toml").write_text("[[source]]\nid = 's'\n[[source]]\nfiles = ['nothing.csv']\n")
    intake = take_in(tmp_path, {}, two_sources("a.csv", "nothing.csv"))
    assert intake.problems[0].line == 4


def test_no_source_with_files_is_an_error(tmp_path: Path) -> None:
    with pytest.raises(SettingsError) as caught:
        take_in(tmp_path, {}, two_sources("a.csv", "b.csv"))
    assert [one.what for one in caught.value.problems] == [
        "source 's': no file matches a.csv",
        "source 't': no file matches b.csv",
    ]
    assert {one.where for one in caught.value.problems} == {"holdsteady.toml"}
    assert caught.value.exit_code == 2


def test_a_format_that_is_none_is_an_error(tmp_path: Path) -> None:
    with pytest.raises(SettingsError, match="time_format"):
        take_in(tmp_path, {"a.csv": ""}, settings_of(source={**STAMPED, "time_format": "%Q"}))


def test_two_sources_may_read_one_file(tmp_path: Path) -> None:
    intake = take_in(tmp_path, {"a.csv": "stamp,v,w\n2025-01-01,1,2\n2025-01-02,,3\n"}, two_sources("*", "*"))
    assert accounts(intake.files) == {("s", "a.csv"): (2, 1, 1, 0), ("t", "a.csv"): (2, 2, 0, 0)}


def test_progress_is_told(tmp_path: Path) -> None:
    told: list[tuple[str, int, int]] = []
    take_in(tmp_path, {"a.csv": "", "b.csv": ""})
    read(tmp_path, settings_of(), as_of=0, zone=ZoneInfo("UTC"), progress=lambda *what: told.append(what))
    assert [(done, total) for _, done, total in told] == [(1, 2), (2, 2)]


CLEAN: dict[str, tuple[str, dict[str, Any]]] = {
    "iso": ("stamp,v,lot\n2025-01-01T10:00:00,1.5,a\n2025-01-01T10:01:00,,b\n", {}),
    "no end": ("stamp,v\n2025-01-01,1.5\n2025-01-02,2.5", {}),
    "semicolon": ("stamp;v\r\n13.01.2025 10:00;1,5\r\n14.01.2025 9:00;-2,5\r\n", {}),
    "quoted": ('"stamp","v"\n"1/13/2025 1:00 PM","1.5"\n"1/14/2025 1:00 PM","a,b"\n'.replace("a,b", "2"), {}),
    "preamble": ('gauge;"seven"\nstamp;v\n1700000000;1,5\n', {}),
    "no time": ("v\n1.5\n2.5\n", PLAIN),
}


@pytest.mark.parametrize("name", CLEAN)
def test_clean_files_are_read_fast(name: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    text, source = CLEAN[name]

    def refuse(*_: object) -> None:
        raise AssertionError("read with care")

    monkeypatch.setattr(careful, "read", refuse)
    intake = take_in(tmp_path, {"a.csv": text}, settings_of(source=source or STAMPED))
    assert intake.files[0].used >= 1


def test_one_bad_file_leaves_the_others_fast(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    read_with_care: list[str] = []
    original = careful.read

    def note(data: bytes, file: str, *rest: Any) -> careful.Records:
        read_with_care.append(file)
        return original(data, file, *rest)

    monkeypatch.setattr(careful, "read", note)
    good = "stamp,v\n2025-01-01,1\n"
    intake = take_in(tmp_path, {"a.csv": good, "b.csv": good + "2025-01-02,x\n", "c.csv": good})
    assert read_with_care == ["b.csv"]
    assert [one.values.size for one in intake.readings["c"]] == [3]


def test_the_text_of_a_cell_is_found_in_a_file_read_fast(tmp_path: Path) -> None:
    text = "note\nstamp;lot;v\n2025-01-01;a;1,50\n2025-01-02;b; 99,90 \n"
    intake = take_in(tmp_path, {"a.csv": text}, settings_of({**ONE, "plausible": {"upper": 50}}))
    (one,) = intake.set_aside
    assert (one.line, one.column, one.reason, one.text) == (4, "v", "not plausible", "99,90")


def test_a_long_text_is_shortened(tmp_path: Path) -> None:
    intake = take_in(tmp_path, {"a.csv": f"stamp,v\n2025-01-01,1\n2025-01-02,{'x' * 5_000}\n"})
    (one,) = intake.set_aside
    assert one.text == "x" * 1_000 + "…"


MARK_FILES = {  # the decimal mark of one file settled by another
    "comma": {"a.csv": "stamp;v\n2025-01-01;1.250\n", "b.csv": "stamp;v\n2025-01-01;1.250,5\n"},
    "dot": {"a.csv": "stamp,v\n2025-01-01,1.250\n", "b.csv": "stamp,v\n2025-01-01,0.5\n"},
}


@pytest.mark.parametrize(("name", "first"), [("comma", 1250.0), ("dot", 1.25)])
def test_the_mark_is_judged_over_the_source(name: str, first: float, tmp_path: Path) -> None:
    intake = take_in(tmp_path, MARK_FILES[name])
    (readings,) = intake.readings["c"]
    assert readings.values[0, 0] == first
    assert not intake.problems


def test_a_mark_that_nothing_settles_is_named(tmp_path: Path) -> None:
    intake = take_in(tmp_path, {"a.csv": "stamp;v\n2025-01-01;1,250\n"})
    (readings,) = intake.readings["c"]
    assert readings.values.tolist() == [[1.25]]
    (problem,) = intake.problems
    assert "decimal" in problem.remedy
    told = take_in(tmp_path, {}, settings_of(source={**STAMPED, "decimal": "."}))
    assert [one.values.tolist() for one in told.readings["c"]] == [[[1250.0]]]
    assert not told.problems


def test_censored_cells_are_counted_for_each_that_asks(tmp_path: Path) -> None:
    text = "stamp,press,v\n2025-01-01,1,<0.05\n2025-01-02,2,<0.05\n2025-01-03,1,0.1\n"
    wanted = settings_of(ONE, {**ONE, "id": "d", "where": {"press": 1}})
    intake = take_in(tmp_path, {"a.csv": text}, wanted)
    assert intake.censored == {"c": 2, "d": 1}
    assert len(intake.set_aside) == 2
    adds_up(intake)


def test_rows_without_a_time_keep_file_order(tmp_path: Path) -> None:
    files = {"b.csv": "v\n3\n1\n", "a.csv": "v\n2\n"}
    intake = take_in(tmp_path, files, settings_of(source=PLAIN))
    (readings,) = intake.readings["c"]
    assert readings.time is None
    assert readings.values[:, 0].tolist() == [2, 3, 1]
    assert [readings.files[index] for index in readings.file] == ["a.csv", "b.csv", "b.csv"]


def test_members_and_sizes(tmp_path: Path) -> None:
    text = "stamp,press,lot,x\n2025-01-01,2,a,1\n2025-01-02,1,b,2\n2025-01-03,2,a,3\n"
    counted = {"id": "c", "source": "s", "count": "x", "size": 50, "chart": "np"}
    wanted = settings_of({**counted, "each": ("press",), "subgroup": {"column": "lot"}})
    first, second = take_in(tmp_path, {"a.csv": text}, wanted).readings["c"]
    assert (first.family, first.name, dict(first.each)) == ("c", "c[press=1]", {"press": "1"})
    assert second.name == "c[press=2]"
    assert second.subgroup == ("a", "a")
    assert second.size is not None
    assert second.size.tolist() == [50, 50]
    assert not second.values.flags.writeable


def test_a_column_may_be_a_number_and_a_label(tmp_path: Path) -> None:
    text = "stamp,v\n2025-01-01,2\n2025-01-02,2.0\n2025-01-03,3\n"
    intake = take_in(tmp_path, {"a.csv": text}, settings_of({**ONE, "where": {"v": 2}, "each": ("v",)}))
    assert [one.name for one in intake.readings["c"]] == ["c[v=2.0]", "c[v=2]"]
    assert outcome(intake.files[0]) == (3, 2, 1, 0)
