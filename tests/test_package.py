"""What is shipped: the wheel, run away from the checkout, with the libraries it asks for and no others."""

from __future__ import annotations

import configparser
import os
import shutil
import subprocess
import sys
import tomllib
import zipfile
from importlib import metadata
from pathlib import Path

import pytest
from packaging.requirements import Requirement
from packaging.utils import canonicalize_name

from holdsteady import __version__

ROOT = Path(__file__).resolve().parent.parent


@pytest.fixture(scope="module")
def wheel(tmp_path_factory: pytest.TempPathFactory) -> Path:
    folder = tmp_path_factory.mktemp("wheel")
    subprocess.run(
        [sys.executable, "-m", "build", "--wheel", "--no-isolation", "--outdir", str(folder), str(ROOT)],
        check=True,
        capture_output=True,
    )
    (built,) = folder.glob("*.whl")
    return built


@pytest.fixture(scope="module")
def installed(wheel: Path, tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Return a folder that holds the unpacked wheel and links to the libraries it needs, no others."""
    folder = tmp_path_factory.mktemp("installed")
    with zipfile.ZipFile(wheel) as archive:
        archive.extractall(folder)
    for name in needed(requirements()):
        distribution = metadata.distribution(name)
        for top in {file.parts[0] for file in distribution.files or []} - {"..", "__pycache__"}:
            if not (folder / top).exists():
                (folder / top).symlink_to(str(distribution.locate_file(top)))
    return folder


def requirements() -> list[Requirement]:
    project = tomllib.loads((ROOT / "pyproject.toml").read_text())["project"]
    return [Requirement(text) for text in project["dependencies"]]


def needed(wanted: list[Requirement]) -> set[str]:
    """Return the names of all distributions that these requirements bring with them."""
    found: set[str] = set()
    waiting = list(wanted)
    while waiting:
        requirement = waiting.pop()
        name = canonicalize_name(requirement.name)
        if name in found or (requirement.marker and not requirement.marker.evaluate({"extra": ""})):
            continue
        found.add(name)
        waiting += [Requirement(text) for text in metadata.requires(name) or []]
    return found


def run(installed: Path, cwd: Path, *arguments: str) -> subprocess.CompletedProcess[str]:
    # -S keeps this environment's own libraries out, so that only those linked are there.
    return subprocess.run(
        [sys.executable, "-S", *arguments],
        cwd=cwd,
        env={"PYTHONPATH": str(installed), "PATH": os.environ["PATH"], "PYTHONDONTWRITEBYTECODE": "1"},
        capture_output=True,
        text=True,
        check=False,
        timeout=300,
    )


def test_the_wheel_holds_the_package_templates_and_sample_and_nothing_else(wheel: Path) -> None:
    with zipfile.ZipFile(wheel) as archive:
        names = archive.namelist()
    tops = {name.split("/")[0] for name in names}
    assert tops == {"holdsteady", f"holdsteady-{__version__}.dist-info"}
    for name in ("py.typed", "cli.py", "site_templates/layout.html", "sample_project/holdsteady.toml"):
        assert f"holdsteady/{name}" in names
    assert any(name.startswith("holdsteady/site_templates/vendor/LICENSE") for name in names)
    for unwanted in ("/sample_project/site/", "/.holdsteady/", "__pycache__", "/tests/", "/refresh.py"):
        assert not [name for name in names if unwanted in f"/{name}"], unwanted


def test_the_command_is_declared(wheel: Path) -> None:
    with zipfile.ZipFile(wheel) as archive:
        text = archive.read(f"holdsteady-{__version__}.dist-info/entry_points.txt").decode()
    points = configparser.ConfigParser()
    points.read_string(text)
    assert dict(points["console_scripts"]) == {"holdsteady": "holdsteady.cli:main"}


def test_test_libraries_are_not_at_hand(installed: Path, tmp_path: Path) -> None:
    for library in ("pytest", "hypothesis", "hatchling"):
        assert run(installed, tmp_path, "-c", f"import {library}").returncode != 0


def test_it_says_its_version(installed: Path, tmp_path: Path) -> None:
    done = run(installed, tmp_path, "-m", "holdsteady", "--version")
    assert (done.stdout, done.returncode) == (f"holdsteady {__version__}\n", 0), done.stderr


def test_it_builds_the_sample_that_it_brings(installed: Path, tmp_path: Path) -> None:
    where = run(
        installed,
        tmp_path,
        "-c",
        "from holdsteady.places import *; print(sample_project(), templates(), sep='\\n')",
    )
    sample, templates = map(Path, where.stdout.split("\n")[:2])
    assert sample.is_relative_to(installed)
    assert templates.is_relative_to(installed)
    shutil.copytree(sample, tmp_path / "sample")
    done = run(installed, tmp_path, "-m", "holdsteady", "build", "sample")
    assert done.returncode == 0, done.stderr
    index = tmp_path / "sample" / "site" / "index.html"
    assert done.stdout.splitlines()[-1] == f"Open {index}"
    assert index.read_bytes()
    assert list((tmp_path / "sample/site/characteristic").glob("*.html"))
