"""Whatever names of columns, cells and files hold, the text loads and says what was meant."""

from __future__ import annotations

import contextlib
import os
import tempfile
import tomllib
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from tests.start.tables import NOW, noise, stamps

from holdsteady import cli
from holdsteady.intake.lines import split_cells
from holdsteady.problems import SettingsError
from holdsteady.start.start import Started, start
from holdsteady.start.tell import told
from holdsteady.start.toml_text import quoted, written

HOSTILE = [
    '"', "'", '"""', "'''", "\\", "\\u12", "#", "]", "[[x]]", "=", "{}", "\x00", "\x1b[2J", "\x7f", "\x85",
    "\u2028", "é", "µm", "漢字", "😀", "\ufeff", "\u202e", " ", "a.b", "a = 1", "-999", "*", "?",
]  # fmt: skip
names = st.lists(st.one_of(st.sampled_from(HOSTILE), st.text(max_size=4)), min_size=1, max_size=4).map(
    "".join
)


@given(st.text())
def test_a_text_reads_back_as_it_was(text: str) -> None:
    assert tomllib.loads(f"x = {quoted(text)}")["x"] == text


@given(st.dictionaries(st.text(), st.text(), max_size=3), st.lists(st.text(), max_size=3))
def test_tables_and_lists_read_back(table: dict[str, str], items: list[str]) -> None:
    text = f"table = {written(table)}\nitems = {written(tuple(items))}"
    assert tomllib.loads(text) == {"table": table, "items": items}


def cell(text: str) -> str:
    return '"' + text.replace('"', '""') + '"'


@settings(max_examples=60, deadline=None)
@given(
    columns=st.lists(names, min_size=2, max_size=4, unique_by=str.strip),
    labels=st.lists(names, min_size=2, max_size=3, unique_by=str.strip),
    file=names,
)
def test_hostile_names_never_make_settings_that_do_not_load(
    columns: list[str], labels: list[str], file: str
) -> None:
    rows = [[*(labels[index % len(labels)] for _ in columns), value] for index, value in enumerate(noise(30))]
    lines = [",".join(map(cell, ["stamp", *columns, "v"]))]
    lines += [",".join(map(cell, [stamp, *row])) for stamp, row in zip(stamps(30), rows, strict=True)]
    name = "".join(character for character in file if character not in "/\0")[:40]
    with tempfile.TemporaryDirectory() as text:
        folder = Path(text) / "a folder"
        folder.mkdir()
        try:
            (folder / f"x{name}.csv").write_bytes("\n".join(lines).encode("utf-8", "replace"))
        except (OSError, UnicodeError):
            return
        made = attempt(folder)
        if made is not None:
            assert made.settings.source


def attempt(folder: Path) -> Started | None:
    """Start, and see that either settings that load were written, or nothing and with a reason."""
    made = None
    with contextlib.suppress(SettingsError):
        made = start(folder, now=NOW, zone="UTC")
    path = folder / "holdsteady.toml"
    assert path.exists() == (made is not None)
    if made is not None:
        assert tomllib.loads(path.read_text(encoding="utf-8"))["source"]
        assert list(told(made.draft))
    return made


GOOD = "stamp,press,v\n" + "".join(
    f"{stamp},{index % 2},{value}\n"
    for index, (stamp, value) in enumerate(zip(stamps(30), noise(30), strict=True))
)


@settings(max_examples=60, deadline=None)
@given(
    at=st.integers(0, len(GOOD)),
    taken=st.integers(0, 40),
    put=st.binary(max_size=30),
    other=st.binary(max_size=200),
)
def test_damaged_files_never_stop_it(at: int, taken: int, put: bytes, other: bytes) -> None:
    with tempfile.TemporaryDirectory() as text:
        folder = Path(text)
        (folder / "a.csv").write_bytes(GOOD.encode()[:at] + put + GOOD.encode()[at + taken :])
        (folder / "b.csv").write_bytes(other)
        attempt(folder)


@pytest.mark.parametrize(
    "name", ['say "hi"', "back\\slash", "#hash", "[[x]]", "tab\there", "µ 漢字 😀", "'''", "a=b"]
)
def test_hostile_names_build(name: str, tmp_path: Path) -> None:
    """What was written also finds its columns again."""
    values = noise(30)
    lines = [",".join(map(cell, ["stamp", name + " press", name]))]
    lines += [
        ",".join(map(cell, [stamp, f"{name}{index % 2}", value]))
        for index, (stamp, value) in enumerate(zip(stamps(30), values, strict=True))
    ]
    assert split_cells(lines[0], ",")[0] == ["stamp", name + " press", name]
    (tmp_path / "a.csv").write_text("\n".join(lines) + "\n", encoding="utf-8")
    made = start(tmp_path, now=NOW, zone="UTC")
    (one,) = made.settings.characteristic
    assert one.value == name
    assert one.each == (name + " press",)
    assert cli.run(["check", str(tmp_path), "--as-of", "2026-03-17"]) == 0


@pytest.mark.skipif(os.name == "nt", reason="such names cannot exist there")
def test_a_file_name_that_is_no_text(tmp_path: Path) -> None:
    name = os.fsencode(tmp_path) + b"/\xff\xfe.csv"
    Path(os.fsdecode(name)).write_text(
        "stamp,v\n" + "".join(f"{s},{v}\n" for s, v in zip(stamps(20), noise(20), strict=True))
    )
    made = start(tmp_path, now=NOW, zone="UTC")
    assert made.settings.source[0].files == ("*.csv",)
