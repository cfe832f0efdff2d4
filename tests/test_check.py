"""`holdsteady check`: the whole accounting on one screen, and nothing written."""

from __future__ import annotations

from pathlib import Path

import pytest
from tests.small_project import SETTINGS, START, small_project

from holdsteady import cli
from holdsteady.accounting import accounting
from holdsteady.build import check

MORE = """cadence = "1h"

[[characteristic]]
id = "torque"
source = "press"
value = "torque_nm"
"""
LOGBOOK = (
    "entered,when,until,characteristic,case,gauge,kind,text,action,exclude,by\n"
    ",2026-03-02 10:00,,boar,,,cause,Worn insert,,,A. R.\n"
    ",2026-03-02 10:00,,bore,,,note,New shift,,,A. R.\n"
)


def troubled(folder: Path) -> Path:
    """A project with a bad cell, a bad row, a picture, late presses and an odd logbook line."""
    project = small_project(folder, settings=SETTINGS + MORE)
    (project / "logbook.csv").write_text(LOGBOOK, encoding="utf-8")
    (project / "press/picture.csv").write_bytes(b"\x89PNG\r\n\x1a\n" + bytes(range(256)))
    day = f"{START:%Y-%m}"
    rows = [f"{day}-10 08:00:00,9,12.0", f"{day}-10 09:00:00,9,12.0 mm", f"{day}-10,9"]
    (project / "press/new.csv").write_text("\n".join(["stamp,press,bore_mm", *rows]) + "\n", encoding="utf-8")
    return project


def test_all_of_it_on_one_screen(tmp_path: Path) -> None:
    report = check(troubled(tmp_path / "p"))
    lines = accounting(report)
    assert len(lines) < 40
    assert max(map(len, lines)) < 140
    text = "\n".join(lines)
    assert "picture.csv" in text
    assert "12.0 mm" in text
    assert "let the export write the number alone" in text
    assert "2 fields where the header has 3" in text
    assert "Late: 3 of 3 with a cadence." in text
    assert "line 2, about boar: Worn insert" in text
    assert "New shift" not in text


def test_the_numbers_of_a_source_add_up(tmp_path: Path) -> None:
    report = check(troubled(tmp_path / "p"))
    header, press = accounting(report)[:2]
    assert header.split()[:3] == ["source", "files", "rows"]
    name, files, *numbers = press.split("  read as")[0].split()
    rows, used, filtered, repeated, corrected, aside = (int(n) for n in numbers[:6])
    assert (name, files) == ("press", "3")
    assert rows == used + filtered + repeated + corrected + aside == 123
    assert (used, aside) == (121, 2)


def test_members_that_are_new_or_have_gone_are_named(tmp_path: Path) -> None:
    settings = SETTINGS.replace('timezone = "UTC"', 'timezone = "UTC"\nattention = "6h"')
    project = small_project(tmp_path / "p", settings=settings)
    rows = "stamp,press,bore_mm\n2026-03-10 08:00:00,9,12.0\n2026-03-02 08:00:00,8,12.0\n"
    (project / "press/new.csv").write_text(rows, encoding="utf-8")
    lines = accounting(check(project))
    assert lines[lines.index("New: first read") + 1] == "  bore[press=9]: Tue 10 Mar 2026, 08:00"
    gone = lines.index("Gone: not read since")
    assert lines[gone + 1] == "  bore[press=1]: Mon 9 Mar 2026, 15:00"
    assert "  bore[press=8]: Mon 2 Mar 2026, 08:00" in lines[gone:]


def test_a_quiet_project_is_short(tmp_path: Path) -> None:
    lines = accounting(check(small_project(tmp_path / "p")))
    assert len(lines) == 4
    assert lines[2].split() == ["press/march.csv", "120", "120", "0", "0", "0", "0"]


def test_many_files_are_one_line_a_source_and_the_worst(tmp_path: Path) -> None:
    project = small_project(tmp_path / "p")
    for i in range(60):
        cell = "ERR" if i % 2 else "12.0"
        rows = [f"2026-03-05 0{h}:{i:02d}:00,1,{cell}" for h in range(3)]
        (project / f"press/p{i:02d}.csv").write_text("\n".join(["stamp,press,bore_mm", *rows]) + "\n")
    lines = accounting(check(project))
    assert len([line for line in lines if line.startswith("  press/")]) == 5
    assert "and 25 more with something set aside, all of them on the data page" in lines


def test_nothing_is_written(tmp_path: Path) -> None:
    project = troubled(tmp_path / "p")
    (project / ".holdsteady").unlink()  # the tests' common cache
    before = {path: path.stat().st_mtime_ns for path in project.rglob("*")}
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr("holdsteady.build.CACHE", ".holdsteady")
        check(project)
    assert {path: path.stat().st_mtime_ns for path in project.rglob("*")} == before


def test_every_problem_is_told_at_once(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    project = troubled(tmp_path / "p")
    more = "".join(
        f'\n[[characteristic]]\nid = "x{i}"\nsource = "press"\nvalue = "x{i}"\n' for i in range(30)
    )
    settings = project / "holdsteady.toml"
    settings.write_text(settings.read_text() + more)
    assert cli.run(["check", str(project)]) == 3
    said = capsys.readouterr()
    assert said.err.count("not computed") == 31
    assert "source" in said.out.splitlines()[0]
