"""Whatever stands in the file, it is read or its faults are told; nothing else is raised."""

from __future__ import annotations

import contextlib

from hypothesis import given, settings
from hypothesis import strategies as st
from tests.project.settings_text import read

from holdsteady.problems import SettingsError
from holdsteady.project.not_yet import NOT_YET
from holdsteady.project.settings import (
    Baseline,
    Characteristic,
    GivenLimits,
    Site,
    Source,
    Specification,
    Subgroup,
)
from holdsteady.project.tables import known_keys

MODELS = (Site, Source, Characteristic, Baseline, GivenLimits, Specification, Subgroup)
KEYS = sorted(
    {key for model in MODELS for key in known_keys(model)} | {e.key for e in NOT_YET} | {"rule", "of", "odd"}
)
WORDS = [
    "x",
    "",
    "8h",
    "p",
    "c",
    "mean-range",
    "individuals",
    "pooled",
    "nelson",
    "trend",
    "utf-8",
    "UTC",
    "..",
    ",",
    "%Y-%m-%d",
]
atoms = st.one_of(
    st.sampled_from([f'"{word}"' for word in WORDS]),
    st.sampled_from(
        ["0", "5", "-1", "25", "2.5", "nan", "inf", "true", "14:10:00", "2026-03-17", "2026-03-17T14:10:00Z"]
    ),
    st.sampled_from(["0001-01-01", "9999-12-31T23:59:59-12:00"]),
)
pairs = st.sampled_from(KEYS)
values = st.recursive(
    atoms,
    lambda inner: st.one_of(
        st.lists(inner, max_size=3).map(lambda items: f"[{', '.join(items)}]"),
        st.dictionaries(pairs, inner, max_size=3).map(
            lambda table: "{" + ", ".join(f"{key} = {value}" for key, value in table.items()) + "}"
        ),
    ),
    max_leaves=5,
)
tables = st.dictionaries(pairs, values, max_size=6)


def body(table: dict[str, str]) -> str:
    return "".join(f"{key} = {value}\n" for key, value in table.items())


@given(tables, tables, tables, tables, tables)
@settings(max_examples=150, deadline=None)
def test_only_settings_errors_are_raised(
    site: dict[str, str],
    defaults: dict[str, str],
    source: dict[str, str],
    one: dict[str, str],
    two: dict[str, str],
) -> None:
    text = f"[site]\n{body(site)}[defaults]\n{body(defaults)}[[source]]\n{body(source)}"
    text += f"[[characteristic]]\n{body(one)}[[characteristic]]\n{body(two)}"
    with contextlib.suppress(SettingsError):
        read(text)


@given(values, st.sampled_from(["site", "defaults", "source", "characteristic", "study", "odd"]))
@settings(max_examples=50, deadline=None)
def test_tables_of_any_shape(value: str, key: str) -> None:
    with contextlib.suppress(SettingsError):
        read(f"{key} = {value}\n")


@given(st.sampled_from(KEYS), values)
@settings(max_examples=200, deadline=None)
def test_a_single_value_of_any_shape(key: str, value: str) -> None:
    given_keys = {"id": '"bore"', "source": '"press"', "value": '"v"', key: value}
    source = '[[source]]\nid = "press"\nfiles = ["press/*.csv"]\ntime = "stamp"\n'
    with contextlib.suppress(SettingsError):
        read(f"{source}[[characteristic]]\n{body(given_keys)}")
