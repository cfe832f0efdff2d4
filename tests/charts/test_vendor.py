"""The scripts of others are the pinned ones, with their licences, and the check notices a change."""

from __future__ import annotations

import importlib.util
import shutil
from pathlib import Path
from types import ModuleType

import pytest

VENDOR = Path(__file__).parents[2] / "site-templates" / "vendor"


@pytest.fixture(scope="module")
def refresh() -> ModuleType:
    spec = importlib.util.spec_from_file_location("refresh", VENDOR / "refresh.py")
    assert spec is not None
    assert spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    return module


def test_files_are_as_their_digests_say(refresh: ModuleType) -> None:
    assert refresh.differences() == []
    named = {line.split("  ")[1] for line in (VENDOR / "sha256.txt").read_text().splitlines()}
    assert named == {"vega.min.js", "vega-interpreter.js", "LICENSE-vega.txt"}


def test_a_changed_file_is_noticed(refresh: ModuleType, tmp_path: Path) -> None:
    for name in ("vega-interpreter.js", "LICENSE-vega.txt", "sha256.txt"):
        shutil.copy(VENDOR / name, tmp_path)
    (tmp_path / "LICENSE-vega.txt").write_text("none")
    assert refresh.differences(tmp_path) == ["LICENSE-vega.txt", "vega.min.js"]


def test_versions_are_the_pinned_ones(refresh: ModuleType) -> None:
    script = (VENDOR / "vega.min.js").read_text(encoding="utf-8")
    assert f't.version="{refresh.VEGA.split("@")[1]}"' in script
    assert refresh.INTERPRETER in (VENDOR / "vega-interpreter.js").read_text(encoding="utf-8")


def test_licences_name_what_is_bundled() -> None:
    text = (VENDOR / "LICENSE-vega.txt").read_text(encoding="utf-8")
    for name in (
        "vega",
        "d3-scale",
        "topojson-client",
        "delaunator",
        "University of Washington",
        "Mike Bostock",
    ):
        assert name in text


def test_a_package_without_a_licence_is_refused(refresh: ModuleType, tmp_path: Path) -> None:
    for name, text in {"vega": "one", "@scope/inner": "two", "@types/estree": "", ".bin": ""}.items():
        (tmp_path / name).mkdir(parents=True)
        if text:
            (tmp_path / name / "LICENSE").write_text(text)
    (tmp_path / ".package-lock.json").write_text("{}")
    assert refresh.licences(tmp_path).startswith("vega\n\none\n")
    assert "inner\n\ntwo\n" in refresh.licences(tmp_path)
    (tmp_path / "new").mkdir()
    with pytest.raises(SystemExit, match="new has no licence text"):
        refresh.licences(tmp_path)


def test_the_wrapping_refuses_a_module_it_does_not_know(refresh: ModuleType) -> None:
    with pytest.raises(SystemExit):
        refresh.as_classic("import { other } from 'elsewhere';\nexport default other;\n")
