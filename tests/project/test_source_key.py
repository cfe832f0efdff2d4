"""How a source says which rows are one reading."""

from __future__ import annotations

import pytest
from tests.project.settings_text import BORE, HEAD, read, said

END = BORE + 'value = "bore_mm"\n'


def test_key_and_newest() -> None:
    source = read(HEAD + 'key = ["stamp", "serial no"]\nnewest = "modified"\n' + END).source[0]
    assert (source.key, source.newest) == (("stamp", "serial no"), "modified")
    source = read(HEAD + END).source[0]
    assert (source.key, source.newest) == ((), "path")


@pytest.mark.parametrize(
    ("keys", "where", "line", "what", "remedy"),
    [
        ("key = []", "key", 5, "must hold at least one item", "Name something, or leave the key out."),
        (
            "key = ['stamp', 'serial', 'stamp']",
            "key.3",
            5,
            "names column 'stamp' twice",
            "Name each column once.",
        ),
        (
            "newest = 'path'",
            "newest",
            5,
            "goes with `key`, which is not given",
            "Add `key`, the columns that tell one reading from another, or take `newest` out.",
        ),
        (
            "key = ['serial']\nnewest = 'modifed'",
            "newest",
            6,
            "must be 'path' or 'modified', not 'modifed'",
            "Did you mean 'modified'?",
        ),
    ],
)
def test_faults(keys: str, where: str, line: int, what: str, remedy: str) -> None:
    assert said(f"{HEAD}{keys}\n{END}") == [(f"source.press.{where}", line, what, remedy)]


@pytest.mark.parametrize("keys", ["key = 'serial'", "key = ['']", "key = [3]", "key = [['a']]", "key = true"])
def test_what_is_no_list_of_columns(keys: str) -> None:
    assert [line for _, line, _, _ in said(f"{HEAD}{keys}\n{END}")] == [5]


def test_a_key_that_is_wrong_is_reported_once() -> None:
    assert len(said(f"{HEAD}key = []\nnewest = 'path'\n{END}")) == 1
