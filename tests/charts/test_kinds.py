"""Every kind's specification is valid, holds no data, and compiles to the same bytes each time."""

from __future__ import annotations

import json
import re
from pathlib import Path
from typing import Any, get_args

import pytest

from holdsteady.charts import kinds, specs
from holdsteady.charts.marks import PALETTE
from holdsteady.places import templates

KINDS = ("individuals", "mean-range", "mean-sd", "median-range", "p", "np", "c", "u")


def compiled(script: bytes) -> dict[str, Any]:
    text = script.decode("ascii")
    assert text.startswith("holdsteady.kinds({")
    read: dict[str, Any] = json.loads(text.removeprefix("holdsteady.kinds(").removesuffix(");\n"))
    return read


@pytest.fixture(scope="module")
def made(tmp_path_factory: pytest.TempPathFactory) -> kinds.KindsScript:
    return kinds.kinds_script(tmp_path_factory.mktemp("kinds"))


def test_the_charts_of_the_first_set_are_there() -> None:
    assert set(specs.KINDS) == set(KINDS)


@pytest.mark.parametrize("kind", KINDS)
@pytest.mark.parametrize("timed", [True, False])
def test_a_specification_names_its_data_and_holds_none(
    made: kinds.KindsScript, kind: str, *, timed: bool
) -> None:
    text = json.dumps(json.loads(made.vega_lite)[kind if timed else f"{kind}/untimed"])
    assert '"values"' not in text
    assert "datasets" not in text
    assert '"url"' not in text
    assert '"$schema": "https://vega.github.io/schema/vega-lite/v6' in text


@pytest.mark.parametrize("kind", KINDS)
def test_each_panel_has_its_data_sets_and_the_axis_is_of_its_kind(made: kinds.KindsScript, kind: str) -> None:
    read = compiled(made.script)
    for name, scale in ((kind, "utc"), (f"{kind}/untimed", "linear")):
        vega = read["vega"][read["kinds"][name]]
        panels = ("location", "spread") if kind in KINDS[:4] else ("single",)
        parts = ("points", "bands", "edges", "centres", "starts")
        named = {f"{panel}_{part}" for panel in panels for part in parts}
        assert {data["name"] for data in vega["data"] if "source" not in data} == named | {
            "spans", "ticks", "words", "brackets", "reading",
        }  # fmt: skip
        assert {s["type"] for s in vega["scales"] if s["name"] == "x"} == {scale}
        assert len(vega["axes"]) == 1
        assert {f"c_{name}" for name in PALETTE} <= {signal["name"] for signal in vega["signals"]}


def test_marks_are_kept_from_assistive_technology_which_has_the_tables(made: kinds.KindsScript) -> None:
    read = compiled(made.script)
    for vega in read["vega"].values():
        assert all(mark["aria"] is False for mark in vega["marks"] if mark["type"] != "group")


def test_the_source_lies_beside_it(made: kinds.KindsScript) -> None:
    source = json.loads(made.vega_lite)
    assert set(source) == {*KINDS, *(f"{kind}/untimed" for kind in KINDS)}
    assert source["mean-range"] == specs.specification("mean-range", timed=True)


def test_compiling_again_without_a_cache_gives_the_same_bytes(made: kinds.KindsScript) -> None:
    specs._validated.cache_clear()
    assert kinds.kinds_script(None) == made


def test_a_cache_is_used_and_a_broken_one_is_as_if_it_were_not_there(
    made: kinds.KindsScript, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def unexpected() -> kinds.KindsScript:
        raise AssertionError

    kinds.kinds_script(tmp_path)
    (file,) = tmp_path.iterdir()
    with monkeypatch.context() as patch:
        patch.setattr(kinds, "_compile", unexpected)
        assert kinds.kinds_script(tmp_path) == made
    for damage in (b"", b"{", b'{"script": "x", "vega_lite": "y", "check": "z"}', b"\xff\xfe"):
        file.write_bytes(damage)
        with monkeypatch.context() as patch:
            patch.setattr(kinds, "_compile", lambda: made)
            assert kinds.kinds_script(tmp_path) == made


def test_a_cache_that_cannot_be_written_does_no_harm(
    made: kinds.KindsScript, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(kinds, "_compile", lambda: made)
    (tmp_path / "file").write_text("in the way")
    assert kinds.kinds_script(tmp_path / "file") == made


def test_every_chart_the_settings_know_has_a_kind() -> None:
    from holdsteady.project import settings  # noqa: PLC0415

    assert set(get_args(settings.ChartName)) <= set(specs.KINDS)


def test_a_chart_elsewhere_has_the_colours_of_the_pages() -> None:
    css = (templates() / "css" / "site.css").read_text(encoding="utf-8")
    light = re.search(r":root \{([^}]*)\}", css)
    assert light is not None
    page = dict(re.findall(r"--([a-z-]+): (#[0-9a-f]{6});", light[1]))
    assert {name: page[name] for name in PALETTE} == PALETTE
