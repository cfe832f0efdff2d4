"""A whole project folder."""

from __future__ import annotations

from pathlib import Path

import pytest

from holdsteady.problems import SettingsError
from holdsteady.project.load import load_project
from holdsteady.project.output_folder import output_fault
from holdsteady.project.settings import Source

SETTINGS = """[site]
timezone = "Europe/Lisbon"
[[source]]
id = "press"
files = ["press/*.csv"]
[[characteristic]]
id = "bore"
source = "press"
value = "bore_mm"
"""


def only_problem(folder: Path) -> tuple[str, int | None, str, str]:
    with pytest.raises(SettingsError) as caught:
        load_project(folder)
    (problem,) = caught.value.problems
    return problem.where, problem.line, problem.what, problem.remedy


def test_a_folder_is_read(tmp_path: Path) -> None:
    (tmp_path / "holdsteady.toml").write_text("\ufeff" + SETTINGS, encoding="utf-8")
    (tmp_path / "logbook.csv").write_text("when,kind,text\n2026-05-09,note,Seen\n2026-05-09,nte,Seen\n")
    (tmp_path / "limits.csv").write_text("characteristic\nbore\n")
    project = load_project(tmp_path)
    assert project.zone.key == "Europe/Lisbon"
    assert project.output == tmp_path / "site"
    assert [entry.text for entry in project.logbook.entries] == ["Seen"]
    assert [(p.where, p.line) for p in project.problems] == [("logbook.csv", 3), ("limits.csv", 1)]
    assert project.register.broken_at == 1


def test_a_folder_without_settings(tmp_path: Path) -> None:
    assert only_problem(tmp_path) == (
        "holdsteady.toml",
        None,
        f"there is no holdsteady.toml in {tmp_path}",
        f"Name a folder that has one, or run `holdsteady start {tmp_path}`.",
    )


def test_settings_in_another_encoding(tmp_path: Path) -> None:
    (tmp_path / "holdsteady.toml").write_bytes("[site]\ntitle = 'Füße'\n".encode("cp1252"))
    assert only_problem(tmp_path) == ("holdsteady.toml", 2, "is not UTF-8", "Save the file as UTF-8.")


@pytest.mark.parametrize(
    ("pattern", "output", "allowed"),
    [
        ("press/*.csv", "site", True),
        ("press/*.csv", "../elsewhere", True),
        ("press/*.csv", "press/site", True),
        ("press/2026/*.csv", "press", False),
        ("press/*/day.csv", "press", False),
        ("press/*.csv", "press/", False),
        ("*.csv", "site", True),
        ("**/*.csv", "site", True),
        ("press/*.csv", "site/../press", False),
    ],
)
def test_output_folders(tmp_path: Path, pattern: str, output: str, allowed: bool) -> None:  # noqa: FBT001
    source = Source(id="press", files=(pattern,))
    assert (output_fault(tmp_path, [source], tmp_path / output) is None) is allowed
