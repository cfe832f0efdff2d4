"""The command line: what it says, where, and with which exit code."""

from __future__ import annotations

import io
import os
import subprocess
import sys
from pathlib import Path

import click
import pytest
from tests.small_project import SETTINGS, small_project

from holdsteady import __version__, cli, console
from holdsteady.problems import Problem, Severity
from holdsteady.publish import held

BUILDER = Path(cli.__file__).parents[1]
HEAVY = {"numpy", "pandas", "pyarrow", "scipy", "altair", "jinja2", "pydantic", "rich"}


def holdsteady(*arguments: str | Path, cwd: Path | None = None) -> subprocess.CompletedProcess[str]:
    """Run the command as a process of its own."""
    return subprocess.run(
        [sys.executable, "-m", "holdsteady", *map(str, arguments)],
        cwd=cwd,
        env=os.environ | {"PYTHONPATH": str(BUILDER)},
        capture_output=True,
        text=True,
        check=False,
        timeout=120,
    )


class TestProcess:
    def test_a_build_says_what_it_came_to_and_what_to_open(self, tmp_path: Path) -> None:
        project = small_project(tmp_path / "p", shift=6)
        done = holdsteady("build", cwd=project)
        assert done.returncode == 0, done.stderr
        assert done.stderr == ""
        first, second, third, took, last = done.stdout.splitlines()
        assert first == "1 file, 120 rows: 120 used, 0 set aside."
        assert second == "2 characteristics with 120 readings: 1 signalling, 1 steady."
        assert "open." in third
        assert took.startswith("Took ")
        assert last == f"Open {project / 'site' / 'index.html'}"

    def test_problems_go_to_standard_error_with_a_remedy_and_no_traceback(self, tmp_path: Path) -> None:
        project = small_project(tmp_path / "p", settings=SETTINGS.replace("baseline", "basline"))
        done = holdsteady("build", project)
        assert done.returncode == 2
        assert done.stdout == ""
        problem, remedy = done.stderr.splitlines()
        assert problem.startswith("holdsteady.toml:19: characteristic.bore.basline: ")
        assert "baseline" in problem + remedy
        assert remedy.startswith("  ")
        assert "Traceback" in holdsteady("build", project, "--debug").stderr
        assert "Traceback" in holdsteady("--debug", "build", project).stderr

    def test_another_build_holds_the_site(self, tmp_path: Path) -> None:
        project = small_project(tmp_path / "p")
        with held(project / "site"):
            done = holdsteady("build", project)
        assert done.returncode == 4
        assert "another build holds this site" in done.stderr

    def test_check_lists_every_file_and_publishes_nothing(self, tmp_path: Path) -> None:
        project = small_project(tmp_path / "p")
        done = holdsteady("check", project)
        assert done.returncode == 0, done.stderr
        assert done.stdout.splitlines()[2].split() == ["press/march.csv", "120", "120", "0", "0", "0", "0"]
        assert not (project / "site").exists()


class TestExitCodes:
    def test_codes_of_a_build(self, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
        more = '\n[[characteristic]]\nid = "length"\nsource = "press"\nvalue = "length_mm"\n'
        project = small_project(tmp_path / "p", settings=SETTINGS + more, shift=6)
        assert cli.run(["build", str(project)]) == 3
        assert "length: not computed" in capsys.readouterr().err
        assert cli.run(["build", str(project), "--fail-on", "signalling"]) == 1
        assert cli.run(["build", str(project), "--fail-on", "signalling", "--as-of", "2026-03-08"]) == 3
        (tmp_path / "mine").mkdir()
        (tmp_path / "mine/thesis.txt").write_text("mine")
        assert cli.run(["build", str(project), "--out", str(tmp_path / "mine")]) == 2
        (project / "site/index.html").write_text("mine")
        assert cli.run(["build", str(project)]) == 5
        assert "Move it elsewhere" in capsys.readouterr().err

    @pytest.mark.parametrize(
        "arguments",
        [
            ["bild"],
            ["build", "--no-such"],
            ["build", "no/such/folder"],
            ["build", "--as-of", "yesterday"],
            ["build", "--fail-on", "silent"],
        ],
        ids=" ".join,
    )
    def test_wrong_usage_is_2(
        self,
        arguments: list[str],
        tmp_path: Path,
        monkeypatch: pytest.MonkeyPatch,
        capsys: pytest.CaptureFixture[str],
    ) -> None:
        monkeypatch.chdir(tmp_path)
        assert cli.run(arguments) == 2
        streams = capsys.readouterr()
        assert streams.out == ""
        assert streams.err

    def test_a_fault_of_the_program_is_told_without_a_traceback(
        self, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
    ) -> None:
        project = small_project(tmp_path / "p")

        def fail(*_: object, **__: object) -> None:
            raise RuntimeError("no luck")

        monkeypatch.setattr("holdsteady.build.draw", fail)
        assert cli.run(["build", str(project)]) == 5
        lines = capsys.readouterr().err.splitlines()
        assert lines[0] == "holdsteady failed: RuntimeError: no luck"
        assert "--debug" in lines[1]
        with pytest.raises(RuntimeError):
            cli.run(["build", str(project), "--debug"])

    def test_an_interruption_is_no_result(
        self, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
    ) -> None:
        project = small_project(tmp_path / "p")

        def interrupt(*_: object, **__: object) -> None:
            raise KeyboardInterrupt

        monkeypatch.setattr("holdsteady.build.draw", interrupt)
        assert cli.run(["build", str(project)]) == 130
        assert "still stands" in capsys.readouterr().err


class TestHelp:
    def test_version(self, capsys: pytest.CaptureFixture[str]) -> None:
        assert cli.run(["--version"]) == 0
        assert capsys.readouterr().out == f"holdsteady {__version__}\n"

    def test_every_command_and_option_explains_itself(self) -> None:
        for name, command in cli.commands.commands.items():
            assert command.help, name
            for parameter in command.params:
                if isinstance(parameter, click.Option):
                    assert parameter.help, f"{name} {parameter.name}"

    def test_help_loads_nothing_heavy(self) -> None:
        code = (
            "import sys; from holdsteady.cli import run; run(['build', '--help']);"
            f"print(sorted(set(sys.modules) & {HEAVY}))"
        )
        done = subprocess.run(
            [sys.executable, "-c", code],
            env=os.environ | {"PYTHONPATH": str(BUILDER)},
            capture_output=True,
            text=True,
            check=True,
        )
        assert done.stdout.splitlines()[-1] == "[]"

    @pytest.mark.skipif(sys.platform == "win32", reason="processor time of children is not told there")
    def test_help_is_quick(self) -> None:
        bare, helping = [], []
        for _ in range(15):  # by turns, and the least of each, because other work disturbs
            bare.append(processor_seconds(["-c", "pass"]))
            helping.append(processor_seconds(["-m", "holdsteady", "--help"]))
        assert min(helping) <= 5 * min(bare)


def processor_seconds(arguments: list[str]) -> float:
    import resource  # noqa: PLC0415  not there on Windows

    before = resource.getrusage(resource.RUSAGE_CHILDREN)
    environment = os.environ | {"PYTHONPATH": str(BUILDER)}
    subprocess.run([sys.executable, *arguments], env=environment, check=True, capture_output=True)
    after = resource.getrusage(resource.RUSAGE_CHILDREN)
    return after.ru_utime + after.ru_stime - before.ru_utime - before.ru_stime


class TestConsole:
    PROBLEM = Problem(severity=Severity.WARNING, where="a\x1b[2J\n.csv", line=3, what="odd", remedy="Look.")

    def test_names_cannot_steer_the_terminal(self) -> None:
        stream = io.StringIO()
        console.print_problems([self.PROBLEM], stream)
        assert stream.getvalue() == "a\\x1b[2J\\n.csv:3: odd\n  Look.\n"

    def test_a_stream_that_cannot_show_a_letter_gets_its_escape(self) -> None:
        raw = io.BytesIO()
        stream = io.TextIOWrapper(raw, encoding="ascii", newline="\n")
        console.print_problems(
            [Problem(severity=Severity.NOTE, where="größe", what="odd", remedy="")], stream
        )
        stream.flush()
        assert raw.getvalue() == b"gr\\xf6\\xdfe: odd\n"

    def test_many_problems_are_cut_short_and_say_so(self) -> None:
        stream = io.StringIO()
        console.print_problems([self.PROBLEM] * 25, stream)
        assert stream.getvalue().endswith("and 5 more, all of them on the data page\n")
        stream = io.StringIO()
        console.print_all([self.PROBLEM] * 25, stream)
        assert stream.getvalue().count("odd") == 25

    def test_bars_on_a_terminal_only(self) -> None:
        with console.progress(io.StringIO()) as progress:
            assert progress is None

        class Terminal(io.StringIO):
            def isatty(self) -> bool:
                return True

        stream = Terminal()
        with console.progress(stream) as progress:
            assert progress is not None
            progress("reading", 1, 2)
            progress("reading", 2, 2)
            progress("computing", 1, 0)
        assert "Reading" in stream.getvalue()
