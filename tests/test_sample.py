"""The sample project: its files come from their seed, and its story is there for the reader to find."""

from __future__ import annotations

import importlib.util
import sys
from collections.abc import Mapping
from pathlib import Path
from types import ModuleType

import pytest

from holdsteady.intake.read import read
from holdsteady.intake.readings import Intake
from holdsteady.monitor.finding import Case, Finding
from holdsteady.monitor.monitor import monitor_all
from holdsteady.project.load import Project, load_project
from holdsteady.times import to_datetime, to_microseconds

SAMPLE = Path(__file__).resolve().parent.parent / "sample-project"
BY_HAND = {"holdsteady.toml", "logbook.csv", "make_sample.py", ".gitattributes"}


@pytest.fixture(scope="module")
def maker() -> ModuleType:
    spec = importlib.util.spec_from_file_location("make_sample", SAMPLE / "make_sample.py")
    assert spec is not None
    assert spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    sys.modules[spec.name] = module  # dataclasses look their module up
    spec.loader.exec_module(module)
    return module


@pytest.fixture(scope="module")
def project() -> Project:
    return load_project(SAMPLE)


@pytest.fixture(scope="module")
def as_of(project: Project) -> int:
    moment = project.settings.site.as_of
    assert moment is not None
    return to_microseconds(moment, project.zone)


@pytest.fixture(scope="module")
def intake(project: Project, as_of: int) -> Intake:
    return read(project.folder, project.settings, as_of=as_of, zone=project.zone)


@pytest.fixture(scope="module")
def findings(intake: Intake, project: Project, as_of: int) -> Mapping[str, Finding]:
    return {finding.name: finding for finding in monitor_all(intake, project, as_of=as_of)}


def shipped() -> dict[str, bytes]:
    """The files of the sample, without what builds leave in it."""
    files = {path.relative_to(SAMPLE).as_posix(): path for path in SAMPLE.rglob("*") if path.is_file()}
    return {
        name: path.read_bytes()
        for name, path in files.items()
        if name.split("/")[0] not in {"site", ".holdsteady", "__pycache__"}
    }


def moment(finding: Finding, index: int | None, project: Project) -> str:
    """When a point was, by the plant's clock."""
    assert finding.points is not None
    assert finding.points.time is not None
    assert index is not None
    return f"{to_datetime(int(finding.points.time[index]), project.zone):%a %d %b %H:%M}"


def cases_in(finding: Finding, state: str) -> list[Case]:
    return [case for case in finding.cases if case.state == state]


def test_the_same_seed_writes_the_same_bytes(maker: ModuleType, tmp_path: Path) -> None:
    for name in ("holdsteady.toml", "logbook.csv"):
        (tmp_path / name).write_bytes((SAMPLE / name).read_bytes())
    maker.main(tmp_path)
    made = {p.relative_to(tmp_path).as_posix(): p.read_bytes() for p in tmp_path.rglob("*") if p.is_file()}
    kept = shipped()
    for name in ("make_sample.py", ".gitattributes"):
        del kept[name]
    assert sorted(made) == sorted(kept)
    assert [name for name in made if made[name] != kept[name]] == []


def test_the_sample_is_small_and_invented() -> None:
    assert sum(map(len, shipped().values())) < 3_000_000
    assert "All data invented" in (SAMPLE / "holdsteady.toml").read_text(encoding="utf-8")
    assert set(shipped()) >= BY_HAND


def test_every_chart_and_enough_areas(project: Project, findings: Mapping[str, Finding]) -> None:
    assert {finding.chart for finding in findings.values()} == {
        "individuals", "mean-range", "mean-sd", "median-range", "p", "np", "c", "u",
    }  # fmt: skip
    assert len(project.settings.characteristic) >= 16
    assert len({c.area for c in project.settings.characteristic}) >= 4


def test_nothing_in_the_project_is_complained_about(project: Project, intake: Intake) -> None:
    assert project.problems == ()
    assert intake.problems == ()
    assert project.register.broken_at is None


def test_every_row_is_accounted_for(intake: Intake) -> None:
    for file in intake.files:
        outcomes = file.used + file.filtered + file.repeated + file.corrected + file.set_aside
        assert outcomes == file.rows, file.file
    units = [file.file for file in intake.files if file.file.startswith("slip room/")]
    listed = {(aside.file, aside.line) for aside in intake.set_aside}
    assert listed == {(file, 6) for file in units} | {
        ("slip room/Slip room 2026-W03.csv", 20),
        ("slip room/Slip room 2026-W09.csv", 15),
        ("slip room/Slip room 2026-W10.csv", 37),
        ("press/Press 1 2025-W47.csv", 58),
        ("press/Press 1 2026-W08.csv", 82),
        ("press/Press 3 2026-W06.csv", 131),
        ("scales/Line B 2026-W04.csv", 44),
        ("inspection/final inspection 2025-12.csv", 14),
        ("test bench/burst 2026-W02.csv", 31),
        ("laboratory/turbidity 2025-11.csv", 20),
        ("laboratory/turbidity 2026-01.csv", 9),
        ("laboratory/turbidity 2026-02.csv", 31),
    }
    assert intake.censored["turbidity"] == 3


def test_states(findings: Mapping[str, Finding]) -> None:
    by_state: dict[str, set[str]] = {}
    for name, finding in findings.items():
        by_state.setdefault(finding.state, set()).add(name)
    steady = by_state.pop("steady")
    assert by_state == {
        "signalling": {"bore[press=2]", "burst"},
        "silent": {"chlorine"},
        "gathering": {"cap-torque"},
        "answered": {"pinholes", "press-stops"},
    }
    assert len(steady) > len(findings) / 2


def test_the_worn_die_insert(findings: Mapping[str, Finding], project: Project) -> None:
    bore = findings["bore[press=2]"]
    (case,) = cases_in(bore, "open")
    assert (case.direction, case.panel, case.ongoing) == ("low", "location", True)
    assert moment(bore, case.start_index, project).startswith("Mon 16 Mar 08:0")
    assert case.shift is not None
    assert -0.012 < case.shift < -0.005
    assert [era.number for era in bore.eras] == [1, 2]
    adopted = {(row.era, row.panel) for row in bore.limits if row.kind == "adopted"}
    assert adopted == {(1, "location"), (1, "spread"), (2, "location"), (2, "spread")}
    assert all(not cases_in(findings[f"bore[press={press}]"], "open") for press in (1, 3))


def test_the_spread_of_burst_pressure(findings: Mapping[str, Finding], project: Project) -> None:
    burst = findings["burst"]
    (case,) = cases_in(burst, "open")
    assert burst.settings.class_ == "safety"
    assert (case.direction, case.panel) == ("high", "spread")
    assert moment(burst, case.start_index, project).startswith("Fri 13 Mar 14:")


def test_answered_cases_have_their_reason(findings: Mapping[str, Finding]) -> None:
    words = {"pinholes": "Binder lot 118", "press-stops": "compressed air", "shrinkage": "tall bodies"}
    for name, text in words.items():
        answered = cases_in(findings[name], "answered")
        assert any(text in entry.text for case in answered for entry in case.answered_by), name
    (by_id,) = cases_in(findings["bore[press=3]"], "answered")
    assert [entry.case for entry in by_id.answered_by] == [by_id.id]


def test_baseline_historical_and_ended_cases(findings: Mapping[str, Finding], project: Project) -> None:
    kiln = findings["kiln-peak[kiln=2]"]
    (baseline,) = cases_in(kiln, "baseline")
    assert baseline.direction == "high"
    height = findings["green-height"]
    assert "Dec" in moment(height, cases_in(height, "historical")[-1].fired_index, project)
    viscosity = findings["slip-viscosity"]
    assert any("Feb" in moment(viscosity, c.fired_index, project) for c in cases_in(viscosity, "ended"))


def test_in_control_is_not_in_specification(findings: Mapping[str, Finding]) -> None:
    length = findings["fired-length"]
    assert length.state == "steady"
    assert "outside-specification" in length.flags


def test_the_lamp_is_neither_estimated_nor_judged(findings: Mapping[str, Finding]) -> None:
    turbidity = findings["turbidity"]
    assert turbidity.points is not None
    assert int(turbidity.points.faulty.sum()) == 4
    assert "doubtful-gauge" in turbidity.flags


def test_limits_are_given_adopted_or_still_to_come(findings: Mapping[str, Finding]) -> None:
    kinds = {name: finding.limits[-1].kind for name, finding in findings.items()}
    provisional = {name for name, kind in kinds.items() if kind == "provisional"}
    assert kinds["slip-density"] == "given"
    assert provisional == {"cap-torque", "chlorine"}
