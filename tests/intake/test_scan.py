"""Which files a source's globs match."""

from __future__ import annotations

import errno
import os
from pathlib import Path

import pytest
from tests.intake.folders import settings_of, take_in, write

from holdsteady.intake.scan import Scanner
from holdsteady.project.settings import Settings

NAMES = (
    "a.csv", "B.CSV", ".hidden.csv", "press/1.csv", "press/2.tsv", "press/deep/3.csv", ".git/4.csv",
    "site/tables/points.csv", "logbook.csv", "limits.csv", "holdsteady.toml", "notes.md",
)  # fmt: skip


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    write(tmp_path, dict.fromkeys(NAMES, "stamp,v\n"))
    return tmp_path


@pytest.mark.parametrize(
    ("globs", "expected"),
    [
        (("*.csv",), ["B.CSV", "a.csv"]),
        (("*.csv", "a.csv", "./a.csv"), ["B.CSV", "a.csv"]),
        (("press/*",), ["press/1.csv", "press/2.tsv"]),
        (("**/*.csv",), ["B.CSV", "a.csv", "press/1.csv", "press/deep/3.csv"]),
        (("**",), ["B.CSV", "a.csv", "notes.md", "press/1.csv", "press/2.tsv", "press/deep/3.csv"]),
        (("press/**/3.csv",), ["press/deep/3.csv"]),
        (("press/**/*.csv",), ["press/1.csv", "press/deep/3.csv"]),
        (("p[qr]ess/?.csv",), ["press/1.csv"]),
        ((".hidden.csv",), [".hidden.csv"]),
        (("../*.csv", "/*.csv"), []),
        (("nothing/*.csv", "site/tables/*.csv", "site/tables/points.csv"), []),
    ],
)
def test_globs(folder: Path, globs: tuple[str, ...], expected: list[str]) -> None:
    found = Scanner(folder, Settings()).files(globs)
    assert [one.name for one in found] == expected
    assert [one.name for one in found if one.trouble] == [name for name in expected if name == "notes.md"]


def test_links_stay_inside_the_project(tmp_path: Path) -> None:
    project, outside = tmp_path / "project", tmp_path / "outside"
    write(project, {"data/a.csv": "stamp,v\n2025-01-01,1\n"})
    write(outside, {"b.csv": "stamp,v\n2025-01-01,2\n"})
    (project / "inner.csv").symlink_to(project / "data/a.csv")
    (project / "outer.csv").symlink_to(outside / "b.csv")
    (project / "gone.csv").symlink_to(project / "nowhere.csv")
    (project / "data/loop").symlink_to(project)
    os.mkfifo(project / "pipe.csv")
    intake = take_in(project, {}, settings_of(source={"id": "s", "files": ("**/*.csv",), "time": "stamp"}))
    used = {one.file: one.rows for one in intake.files}
    assert used == {"data/a.csv": 1, "gone.csv": 0, "inner.csv": 0, "outer.csv": 0, "pipe.csv": 0}
    reasons = {one.file: one.reason for one in intake.set_aside}
    assert set(reasons) == {"data/loop", "gone.csv", "inner.csv", "outer.csv", "pipe.csv"}
    assert "lies in" in reasons["data/loop"]
    assert reasons["inner.csv"] == "a link to data/a.csv, which is read already"
    assert "out of the project" in reasons["outer.csv"]
    assert "not a regular file" in reasons["pipe.csv"]


def test_a_link_to_a_folder_outside_is_listed(tmp_path: Path) -> None:
    write(tmp_path, {"project/a.csv": "stamp,v\n2025-01-01,1\n", "outside/b.csv": "stamp,v\n2025-01-01,2\n"})
    (tmp_path / "project/share").symlink_to(tmp_path / "outside")
    source = {"id": "s", "files": ("*.csv", "*/*.csv"), "time": "stamp"}
    intake = take_in(tmp_path / "project", {}, settings_of(source=source))
    assert [(one.file, one.line) for one in intake.set_aside] == [("share", None)]
    assert [one.values.tolist() for one in intake.readings["c"]] == [[[1.0]]]


def test_a_file_that_cannot_be_read_is_one_line(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Refused by a stand-in, since the superuser may read whatever its permissions say."""
    read_bytes = Path.read_bytes

    def refusing(path: Path) -> bytes:
        if path.name == "a.csv":
            raise PermissionError(errno.EACCES, os.strerror(errno.EACCES))
        return read_bytes(path)

    monkeypatch.setattr(Path, "read_bytes", refusing)
    text = "stamp,v\n2025-01-01,1\n"
    intake = take_in(tmp_path, {"a.csv": text, "b.csv": text})
    (line,) = intake.set_aside
    assert (line.file, line.line) == ("a.csv", None)
    assert "Permission denied" in line.reason
    assert [(one.file, one.rows) for one in intake.files] == [("a.csv", 0), ("b.csv", 1)]


def test_a_site_in_the_project_folder_itself_hides_nothing(folder: Path) -> None:
    found = Scanner(folder, Settings.model_validate({"site": {"output": "."}})).files(("*.csv",))
    assert [one.name for one in found] == ["B.CSV", "a.csv"]


def test_a_site_published_elsewhere_in_the_project_is_no_measurement(tmp_path: Path) -> None:
    rows = "stamp,v\n"
    write(tmp_path, {"a.csv": rows, "old/.holdsteady-site.json": "{}", "old/tables/b.csv": rows})
    for globs in (("**/*.csv",), ("*.csv", "old/tables/*.csv")):
        assert [one.name for one in Scanner(tmp_path, Settings()).files(globs)] == ["a.csv"]
