"""README says all that a user may write: commands, options, exit codes, keys; its examples work."""

from __future__ import annotations

import re
import typing
from collections.abc import Iterator
from pathlib import Path

import click
import pytest
from pydantic import BaseModel

from holdsteady import problems, report
from holdsteady.cli import commands
from holdsteady.project.load import load_project
from holdsteady.project.settings import ChartName, EstimatorName, RuleName, Settings

ROOT = Path(__file__).resolve().parent.parent
README = (ROOT / "README.md").read_text(encoding="utf-8")
DEVELOPERS = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")
EXAMPLES = re.findall(r"```toml\n(.*?)```", README, re.DOTALL)


def keys(model: type[BaseModel], seen: set[type[BaseModel]]) -> Iterator[str]:
    """Yield every key that may be written in a model or below it."""
    seen.add(model)
    for name, field in model.model_fields.items():
        yield field.alias or name
        for inner in inner_models(field.annotation):
            if inner not in seen:
                yield from keys(inner, seen)


def inner_models(annotation: object) -> Iterator[type[BaseModel]]:
    if isinstance(annotation, type) and issubclass(annotation, BaseModel):
        yield annotation
    for argument in typing.get_args(annotation):
        yield from inner_models(argument)


@pytest.mark.parametrize("key", sorted(set(keys(Settings, set()))))
def test_every_key_is_in_readme(key: str) -> None:
    assert re.search(rf"(^|[\s{{,`\[]){re.escape(key)}( =|`|\]\])", README, re.MULTILINE), key


WORDS = [word for names in (ChartName, RuleName, EstimatorName) for word in typing.get_args(names)]


@pytest.mark.parametrize("word", WORDS)
def test_every_word_is_in_readme(word: str) -> None:
    assert f"`{word}`" in README


@pytest.mark.parametrize("name", sorted(commands.commands))
def test_every_command_and_option_is_in_readme(name: str) -> None:
    assert f"`holdsteady {name}" in README
    for parameter in (*commands.params, *commands.commands[name].params):
        if isinstance(parameter, click.Option):
            assert re.search(rf"`{parameter.opts[0]}[ `]", README), parameter.opts


def test_readme_names_no_command_that_is_not_there() -> None:
    named = set(re.findall(r"holdsteady ([a-z]+)", " ".join(re.findall(r"`+[^`]*`+", README))))
    assert named <= set(commands.commands), named


@pytest.mark.parametrize(
    "code",
    [report.DONE, report.FAIL_ON_MET, report.NOT_COMPUTED]
    + [error.exit_code for error in (problems.SettingsError, problems.SiteBusyError, problems.PublishError)],
)
def test_every_exit_code_is_in_readme(code: int) -> None:
    assert re.search(rf"^\| {code} \|", README, re.MULTILINE)


@pytest.mark.parametrize("example", EXAMPLES, ids=["the shortest", "every key"])
def test_examples_of_settings_can_be_used(example: str, tmp_path: Path) -> None:
    (tmp_path / "holdsteady.toml").write_text(example, encoding="utf-8")
    assert load_project(tmp_path).problems == ()


def test_the_logbook_example_can_be_read(tmp_path: Path) -> None:
    (logbook,) = re.findall(r"```csv\n(.*?)```", README, re.DOTALL)
    (tmp_path / "holdsteady.toml").write_text(EXAMPLES[1], encoding="utf-8")
    (tmp_path / "logbook.csv").write_text(logbook, encoding="utf-8")
    project = load_project(tmp_path)
    assert project.problems == ()
    assert len(project.logbook.entries) == 2


def test_links_and_paths_that_the_documents_name_exist() -> None:
    for text in (README, DEVELOPERS):
        for target in re.findall(r"\]\(([^)#]+)\)", text):
            assert (ROOT / target).exists(), target
    for path in re.findall(r"`((?:tests|site-templates|sample-project)/[\w./-]+)`", DEVELOPERS):
        assert (ROOT / path).exists(), path
    for path in re.findall(r"`((?:spc|project|intake|monitor|charts|site)/[\w./]+\.py)`", DEVELOPERS):
        assert (ROOT / "builder/holdsteady" / path).exists(), path


def test_every_dependency_has_its_reason() -> None:
    text = (ROOT / "pyproject.toml").read_text(encoding="utf-8")
    block = text.split("dependencies = [", 1)[1].split("]", 1)[0]
    for name in re.findall(r'"([A-Za-z0-9-]+)', block):
        assert f"| {name} |" in DEVELOPERS, name


def test_ci_runs_the_command_that_readme_gives() -> None:
    command = "python3 tests/run.py"
    assert f"```sh\n{command}\n```" in README
    assert command in (ROOT / ".ci/run").read_text(encoding="utf-8")
