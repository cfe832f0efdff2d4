"""Whole builds: what is published, from what, and what the report says."""

from __future__ import annotations

import csv
import datetime as dt
import json
from collections.abc import Sequence
from pathlib import Path
from typing import Any

import pytest
from tests.small_project import SETTINGS, files_of, small_project

from holdsteady import build as module
from holdsteady.build import build, check
from holdsteady.monitor.finding import Finding
from holdsteady.problems import PublishError, RefusedFolderError, SettingsError, SiteBusyError
from holdsteady.publish import held
from holdsteady.site import pictures, plan, render


def table(site: Path, name: str) -> list[dict[str, str]]:
    with (site / "tables" / f"{name}.csv").open(encoding="utf-8", newline="") as stream:
        return list(csv.DictReader(stream))


def test_a_build_publishes_pages_and_tables(tmp_path: Path) -> None:
    project = small_project(tmp_path / "p")
    report = build(project)
    site = project / "site"
    assert report.index == site / "index.html"
    for page in (
        "index",
        "signals",
        "data",
        "methods",
        "characteristic/bore-press-1",
        "characteristic/bore-press-2",
    ):
        assert (site / f"{page}.html").read_bytes().startswith(b"<!doctype html>") or (
            site / f"{page}.html"
        ).read_bytes()
    assert report.counts.characteristics == 2
    assert report.counts.readings == report.counts.used == report.counts.rows == 120
    assert report.exit_code() == 0
    assert {row["characteristic"] for row in table(site, "characteristics")} == {
        "bore[press=1]",
        "bore[press=2]",
    }


def test_building_twice_gives_the_same_bytes(tmp_path: Path) -> None:
    first, second = small_project(tmp_path / "a", shift=4), small_project(tmp_path / "b", shift=4)
    build(first)
    once = files_of(first / "site")
    build(first)
    build(second)
    again, elsewhere = files_of(first / "site"), files_of(second / "site")
    for files in (once, again, elsewhere):
        files.pop("tables/build.json")
    assert once == again == elsewhere


def test_an_unchanged_site_is_left_as_it_is(tmp_path: Path) -> None:
    project = small_project(tmp_path / "p")
    build(project)
    assert build(project).written <= 1  # tables/build.json, unless it took as long to the millisecond


def test_build_json_says_what_was_built(tmp_path: Path) -> None:
    project = small_project(tmp_path / "p")
    build(project)
    about = json.loads((project / "site/tables/build.json").read_text())
    assert list(about) == [
        "version", "when", "as_of", "input_digest", "register", "register_check", "counts", "seconds",
    ]  # fmt: skip
    assert about["as_of"] == "2026-03-10T12:00:00+00:00"
    assert about["register"] == "ok"
    assert about["counts"]["rows"] == 120
    assert set(about["seconds"]) == {"reading", "computing", "pages", "tables"}


def test_the_input_digest_changes_with_any_input(tmp_path: Path) -> None:
    project = small_project(tmp_path / "p")
    digests = set()
    for name, text in (
        ("press/march.csv", "\n"),
        ("holdsteady.toml", "\n"),
        ("logbook.csv", TestLogbook.HEADER),
    ):
        build(project)
        digests.add(json.loads((project / "site/tables/build.json").read_text())["input_digest"])
        with (project / name).open("a") as stream:
            stream.write(text)
    build(project)
    digests.add(json.loads((project / "site/tables/build.json").read_text())["input_digest"])
    assert len(digests) == 4


class TestAsOf:
    def test_later_readings_are_not_looked_at_and_are_no_faults(self, tmp_path: Path) -> None:
        project = small_project(tmp_path / "p", shift=6)
        moment = dt.datetime(2026, 3, 8, 11, tzinfo=dt.UTC)
        report = build(project, as_of=moment)
        rows = table(project / "site", "characteristics")
        assert {row["last_time"] for row in rows} == {"2026-03-08T09:00:00+00:00"}
        assert report.counts.states == {"steady": 2}
        # The rows of the day after are good rows, only not of this moment's business yet.
        assert report.counts.readings < report.counts.used

    def test_the_command_line_comes_before_the_settings(self, tmp_path: Path) -> None:
        project = small_project(tmp_path / "p")
        build(project, as_of=dt.date(2026, 3, 9))
        about = json.loads((project / "site/tables/build.json").read_text())
        assert about["as_of"] == "2026-03-09T00:00:00+00:00"

    def test_without_either_the_clock_is_read(self, tmp_path: Path) -> None:
        settings = SETTINGS.replace("as_of = 2026-03-10T12:00:00Z\n", "")
        project = small_project(tmp_path / "p", settings=settings)
        before = dt.datetime.now(dt.UTC).replace(microsecond=0)
        build(project)
        about = json.loads((project / "site/tables/build.json").read_text())
        assert before <= dt.datetime.fromisoformat(about["as_of"]) <= dt.datetime.now(dt.UTC)


class TestTrouble:
    def test_a_characteristic_without_data_is_published_and_reported(self, tmp_path: Path) -> None:
        more = '\n[[characteristic]]\nid = "length"\nsource = "press"\nvalue = "length_mm"\n'
        project = small_project(tmp_path / "p", settings=SETTINGS + more)
        report = build(project)
        assert report.exit_code() == 3
        assert any(
            problem.where == "length" and "not computed" in problem.what for problem in report.problems
        )
        assert report.counts.states["not-computed"] == 1
        assert (project / "site/characteristic/length.html").exists()

    def test_signals_can_be_made_to_fail(self, tmp_path: Path) -> None:
        report = build(small_project(tmp_path / "p", shift=6))
        assert report.counts.states["signalling"] == 1
        assert report.counts.open_cases >= 1
        assert report.exit_code() == 0
        assert report.exit_code(fail_on_signalling=True) == 1

    def test_no_file_at_all_publishes_nothing(self, tmp_path: Path) -> None:
        project = small_project(tmp_path / "p")
        (project / "press/march.csv").unlink()
        with pytest.raises(SettingsError, match="no file matches") as caught:
            build(project)
        assert caught.value.exit_code == 2
        assert not (project / "site").exists()

    def test_a_failed_build_leaves_the_site_as_it_was(
        self, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
    ) -> None:
        project = small_project(tmp_path / "p")
        build(project)
        before = files_of(project / "site")
        (project / "holdsteady.toml").write_text("[site\n")
        with pytest.raises(SettingsError):
            build(project)
        assert files_of(project / "site") == before
        (project / "holdsteady.toml").write_text(SETTINGS)

        def fail(*_: object, **__: object) -> None:
            raise RuntimeError("a fault of ours")

        monkeypatch.setattr(module, "draw", fail)
        with pytest.raises(RuntimeError):
            build(project)
        assert files_of(project / "site") == before

    def test_a_page_that_cannot_be_drawn_takes_no_other_down(
        self, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
    ) -> None:
        project = small_project(tmp_path / "p", shift=6)
        build(project)
        before = files_of(project / "site")
        whole = pictures.chart_picture

        def fail(finding: Finding, *given: Any) -> Any:
            if finding.name == "bore[press=2]":
                raise ValueError("no such pen")
            return whole(finding, *given)

        monkeypatch.setattr(render, "chart_picture", fail)
        report = build(project)
        assert report.exit_code() == 3
        assert report.counts.states == {"not-computed": 1, "steady": 1}
        (problem,) = [one for one in report.problems if one.where == "bore[press=2]"]
        assert problem.what == "not computed: its page could not be drawn: no such pen"
        assert problem.remedy
        after = files_of(project / "site")
        page = after["characteristic/bore-press-2.html"].decode()
        assert "cannot be computed" in page
        assert "no such pen" in page
        assert "No signal among 2 characteristics" in after["index.html"].decode()
        assert "1 cannot be computed" in after["index.html"].decode()
        states = {row["characteristic"]: row for row in table(project / "site", "characteristics")}
        assert states["bore[press=2]"]["state"] == "not-computed"
        assert states["bore[press=2]"]["slug"] == "bore-press-2"
        cases = table(project / "site", "cases")
        assert not [row for row in cases if row["characteristic"] == "bore[press=2]"]
        data = {path for path in before if path.startswith("assets/data/bore-press-1")}
        assert data <= set(after)
        assert check(project).exit_code() == 3

    def test_a_fault_that_is_no_characteristics_own_is_not_laid_on_one(
        self, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
    ) -> None:
        project = small_project(tmp_path / "p")
        whole = plan.plan

        def fail(findings: Sequence[Finding], *given: Any) -> Any:
            if len(findings) > 1:
                raise ValueError("the list is torn")
            return whole(findings, *given)

        monkeypatch.setattr(render, "plan", fail)
        with pytest.raises(ValueError, match="torn"):
            build(project)

    def test_a_foreign_folder_is_refused_before_any_work(
        self, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
    ) -> None:
        project = small_project(tmp_path / "p")
        (tmp_path / "mine").mkdir()
        (tmp_path / "mine/thesis.txt").write_text("mine")
        monkeypatch.delattr(module, "read")
        with pytest.raises(RefusedFolderError):
            build(project, out=tmp_path / "mine")
        assert files_of(tmp_path / "mine") == {"thesis.txt": b"mine"}

    @pytest.mark.parametrize("out", [".", "..", "press", ".holdsteady", ".holdsteady/site"])
    def test_the_site_does_not_go_among_the_project(self, tmp_path: Path, out: str) -> None:
        project = small_project(tmp_path / "p")
        before = files_of(project)
        with pytest.raises(SettingsError, match="--out"):
            build(project, out=project / out)
        assert files_of(project) == before

    def test_another_build_holds_the_site(self, tmp_path: Path) -> None:
        project = small_project(tmp_path / "p")
        with held(project / "site"), pytest.raises(SiteBusyError):
            build(project)

    def test_a_foreign_file_where_a_page_belongs(self, tmp_path: Path) -> None:
        project = small_project(tmp_path / "p")
        build(project)
        (project / "site/characteristic/length.html").write_text("mine")
        before = files_of(project / "site")
        more = '\n[[characteristic]]\nid = "length"\nsource = "press"\nvalue = "bore_mm"\n'
        (project / "holdsteady.toml").write_text(SETTINGS + more)
        with pytest.raises(PublishError):
            build(project)
        assert files_of(project / "site") == before


class TestLogbook:
    HEADER = "entered,when,until,characteristic,case,gauge,kind,text,action,exclude,by\n"

    def test_lines_that_match_nothing_are_told(self, tmp_path: Path) -> None:
        project = small_project(tmp_path / "p")
        (project / "logbook.csv").write_text(
            self.HEADER
            + ",2026-03-03,,bore,,,note,of the family,,,A. R.\n"
            + ",2026-03-03,,bore[press=2],,,note,of a member,,,A. R.\n"
            + ",2026-03-03,,*,,,note,of all,,,A. R.\n"
            + ",2026-03-03,,boer,,,note,misspelt name,,,A. R.\n"
            + ",2026-03-03,,,c-nothing,,cause,no such case,,,A. R.\n"
            + "2027-01-01,2026-03-03,,boer,,,note,entered later,,,A. R.\n"
        )
        build(project)
        page = (project / "site/data.html").read_text()
        assert "misspelt name" in page
        assert "no such case" in page
        for text in ("of the family", "of a member", "of all", "entered later"):
            assert text not in page

    def test_lines_entered_ahead_of_the_clock_are_told_and_ahead_of_a_past_moment_are_not(
        self, tmp_path: Path
    ) -> None:
        line = "2999-01-01,2026-03-03,,bore[press=2],,,cause,a slip of the year,,,A. R.\n"
        project = small_project(tmp_path / "a")
        (project / "logbook.csv").write_text(self.HEADER + line)
        build(project)
        assert "a slip of the year" not in (project / "site/data.html").read_text()
        settings = SETTINGS.replace("as_of = 2026-03-10T12:00:00Z\n", "")
        project = small_project(tmp_path / "b", settings=settings)
        (project / "logbook.csv").write_text(self.HEADER + line)
        build(project)
        page = (project / "site/data.html").read_text()
        assert "Logbook lines entered after this build" in page
        assert "a slip of the year" in page
        assert "Entered Tue 1 Jan 2999, 00:00." in page
        assert "match nothing" not in page


def test_check_publishes_nothing_and_reports_the_same(tmp_path: Path) -> None:
    project = small_project(tmp_path / "p", shift=6)
    checked = check(project)
    assert checked.index is None
    assert not (project / "site").exists()
    assert checked.counts == build(project).counts
    assert [account.file for account in checked.files] == ["press/march.csv"]
