"""What a column holds: measured, counted, a label."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np
import pytest
from tests.start.tables import noise, stamps, table_of

from holdsteady.start.guess_columns import Roles, guess_roles


def roles_of(columns: Mapping[str, Any], files: list[int] | None = None) -> Roles:
    return guess_roles(table_of(columns, files=files), ("stamp",))


def test_measured_against_labels() -> None:
    found = roles_of({"stamp": stamps(40), "lot": ["A", "B"] * 20, "bore": noise(40), "note": [""] * 40})
    assert found.measured == ("bore",)
    assert found.labels == ("lot",)


@pytest.mark.parametrize(
    ("name", "cells"),
    [
        ("press", [1, 2, 3] * 20),  # by its name
        ("machine no", [101, 205] * 30),
        ("batch", [4101 + index // 2 for index in range(60)]),  # running
        ("x", [1, 2, 3, 4, 5] * 12),  # going round
        ("serial", [7, 3, 9] * 20),  # few, and its name
    ],
)
def test_numbers_that_name_something_are_labels(name: str, cells: list[int]) -> None:
    found = roles_of({name: cells, "bore": noise(60)})
    assert found.labels == (name,)
    assert found.measured == ("bore",)


def test_the_same_throughout_each_file_is_a_label() -> None:
    found = roles_of({"x": [7] * 20 + [9] * 20, "bore": noise(40)}, [0] * 20 + [1] * 20)
    assert found.labels == ("x",)


def test_whole_numbers_that_vary_are_measured() -> None:
    found = roles_of({"hardness": noise(60, mean=845, sigma=12, decimals=0)})
    assert found.measured == ("hardness",)
    assert found.counted == ()


def counts(mean: float, n: int = 60) -> list[int]:
    return [int(value) for value in np.random.default_rng(3).poisson(mean, n)]


def test_a_count_with_its_size_and_its_chart() -> None:
    size = [500 + index % 7 for index in range(60)]
    found = roles_of(
        {"lot": [f"L{i}" for i in range(60)], "inspected": size, "rejects": counts(9), "flaws": counts(40)}
    )
    rejects, flaws = found.counted
    assert (rejects.name, rejects.size, rejects.chart) == ("rejects", "inspected", None)
    assert (flaws.name, flaws.size, flaws.chart) == ("flaws", "inspected", "u")
    assert found.measured == ()


def test_one_size_is_np_and_more_than_the_size_is_u() -> None:
    found = roles_of({"tested": [120] * 60, "failed": counts(6)})
    assert [(one.size, one.chart) for one in found.counted] == [("tested", "np")]
    found = roles_of({"tested": [5] * 30 + [6] * 30, "failed": counts(9)})
    assert [(one.size, one.chart) for one in found.counted] == [("tested", "u")]


def test_a_count_alone() -> None:
    (one,) = roles_of({"stops": counts(4)}).counted
    assert (one.size, one.chart, one.confidence) == (None, None, "likely")
    (unnamed,) = roles_of({"x": counts(4)}).counted
    assert unnamed.confidence == "guess"


def test_a_few_counts_that_cannot_be_change_nothing() -> None:
    (one,) = roles_of(
        {"rejects": [*counts(9, 99), -1], "inspected": [500 + index % 3 for index in range(100)]}
    ).counted
    assert (one.name, one.size) == ("rejects", "inspected")


def test_columns_of_one_kind_are_one_subgroup_a_row() -> None:
    found = roles_of(
        {f"h{index}": noise(40, seed=index) for index in (1, 2, 3)} | {"mass_g": noise(40, mean=80)}
    )
    assert [one.names for one in found.wide] == [("h1", "h2", "h3")]
    assert found.measured == ("mass_g",)


def test_columns_of_different_levels_have_a_chart_each() -> None:
    found = roles_of({"zone1": noise(40, mean=100), "zone2": noise(40, mean=200)})
    assert found.wide == ()
    assert found.measured == ("zone1", "zone2")
    assert any("a chart each" in note for note in found.notes)


def test_constants_and_texts_with_units_are_said() -> None:
    found = roles_of({"lsl": ["11.95"] * 20, "weight": [f"{x} g" for x in noise(20)], "bore": noise(20)})
    assert found.measured == ("bore",)
    assert any("always 11.95" in note for note in found.notes)
    assert any("text behind" in note for note in found.notes)


def test_missing_codes_units_and_decimals() -> None:
    bore = ["mm", *noise(40), "-999", "n/a", "", "ERR", "<0.05"]
    facts = table_of({"stamp": ["", *stamps(45)], "bore": bore}).facts["bore"]
    assert facts.numeric
    assert facts.unit == "mm"
    assert facts.missing == {"-999": 1, "n/a": 1}
    assert facts.decimals == 3
    assert facts.censored == 1
    assert facts.with_text == "ERR"
    assert np.nanmax(facts.values) < 13


@pytest.mark.parametrize("code", ["999", "-99", "9999.9"])
def test_nines_among_such_values_are_values(code: str) -> None:
    near = noise(40, mean=float(code), sigma=20, decimals=1)
    assert table_of({"x": [*near, code]}).facts["x"].missing == {}


def test_decimal_commas() -> None:
    facts = table_of({"x": ["1,5", "2,25", "1.234,5"]}, delimiter=";").facts["x"]
    assert facts.numbers.tolist() == [1.5, 2.25, 1234.5]
    assert facts.decimals == 2
