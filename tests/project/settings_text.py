"""A small `holdsteady.toml` to put faults into, and what is said about them."""

from __future__ import annotations

from pathlib import Path

import pytest

from holdsteady.problems import Problem, SettingsError
from holdsteady.project.read_settings import read_settings
from holdsteady.project.settings import Characteristic, Settings

FOLDER = Path("/projects/filters")
HEAD = '[[source]]\nid = "press"\nfiles = ["press/*.csv"]\ntime = "stamp"\n'  # lines 1 to 4
BORE = '[[characteristic]]\nid = "bore"\nsource = "press"\n'  # lines 5 to 7
START = HEAD + BORE + 'value = "bore_mm"\n'  # further keys of bore are on line 9


def read(text: str) -> Settings:
    return read_settings(text, FOLDER)


def bore(more: str) -> Characteristic:
    return read(START + more).characteristic[0]


def problems(text: str) -> list[Problem]:
    with pytest.raises(SettingsError) as caught:
        read(text)
    assert caught.value.exit_code == 2
    return list(caught.value.problems)


def said(text: str) -> list[tuple[str, int | None, str, str]]:
    return [(p.where, p.line, p.what, p.remedy) for p in problems(text)]
