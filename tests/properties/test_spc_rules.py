"""The rules on random series: as the plain loops have it, mirrored, grown, and run together."""

from __future__ import annotations

import math
from dataclasses import replace
from typing import TypedDict, cast

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from tests import naive

from holdsteady.arrays import Floats, Ints
from holdsteady.spc.rules import NELSON, RULES, WESTERN_ELECTRIC, Rule, Stretches, find, refusal

# Coarse values meet limits, zone edges, the centre and each other exactly; 0.1 steps do so but for rounding.
COARSE = st.sampled_from([-3.5, -3.0, -2.5, -2.0, -1.5, -1.0, -0.5, 0.0, 0.5, 1.0, 1.5, 2.0, 2.5, 3.0, 3.5])
TENTHS = st.integers(-34, 34).map(lambda tenths: tenths * 0.1)
FINE = st.floats(-4, 4, allow_nan=False)


class Data(TypedDict):
    """What a rule is given; all (N,)."""

    value: Floats
    z: Floats
    lower: Floats
    upper: Floats
    sigma: Floats
    segment: Ints


def until(data: Data, cut: int) -> Data:
    """The points before `cut`."""
    return cast("Data", {key: cast("Floats", column)[:cut] for key, column in data.items()})


@st.composite
def series(draw: st.DrawFn) -> Data:
    """Points on varying sigma, some without a limit, in segments."""
    # A short alphabet makes long runs, trends and alternations likely.
    alphabet = draw(st.lists(draw(st.sampled_from([COARSE, TENTHS, FINE])), min_size=1, max_size=6))
    z = np.array(draw(st.lists(st.sampled_from(alphabet), min_size=0, max_size=60)))
    n = len(z)
    sigma = np.array(draw(st.lists(st.sampled_from([1.0, 0.25, 3.0]), min_size=n, max_size=n)))
    if draw(st.booleans()):
        sigma = np.full(n, 0.7)
    centre = draw(st.sampled_from([0.0, 12.0]))
    breaks = np.array(
        draw(st.lists(st.sampled_from([0, 0, 0, 0, 0, 0, 1]), min_size=n, max_size=n)), dtype=int
    )
    lower = np.full(n, np.nan) if draw(st.booleans()) else centre - 3 * sigma
    return {
        "value": centre + z * sigma,
        "z": (centre + z * sigma - centre) / sigma,
        "lower": lower,
        "upper": centre + 3 * sigma,
        "sigma": sigma,
        "segment": np.cumsum(breaks, dtype=np.int64),
    }


def rules() -> st.SearchStrategy[Rule]:
    """Customary rules and ones with their own counts."""
    counts = st.tuples(st.sampled_from(list(RULES)), st.integers(1, 6), st.integers(0, 3))
    own = counts.map(lambda c: Rule(name=c[0], points=c[1], of=c[1] + c[2])).filter(lambda r: not refusal(r))
    return st.one_of(st.sampled_from(list(RULES.values())), own)


def listed(found: Stretches) -> list[tuple[int, int, int, int]]:
    columns = (found.direction, found.first, found.fired, found.last)
    return list(zip(*(column.tolist() for column in columns), strict=True))


def points(data: Data) -> list[naive.Point]:
    return [
        naive.Point(
            float(data["value"][i]),
            float(data["z"][i]),
            None if math.isnan(data["lower"][i]) else float(data["lower"][i]),
            float(data["upper"][i]),
            float(data["sigma"][i]),
            int(data["segment"][i]),
        )
        for i in range(len(data["value"]))
    ]


@settings(max_examples=400, deadline=None)
@given(series(), rules())
def test_agrees_with_the_loops(data: Data, rule: Rule) -> None:
    expected = naive.stretches(rule.name, points(data), rule.points, rule.of)
    found = find(rule, **data)
    assert sorted(listed(found)) == sorted(expected)
    assert found.fired.tolist() == sorted(found.fired.tolist())
    met = np.zeros(len(data["value"]), dtype=np.int64)
    for direction, _, fired, last in expected:
        met[fired : last + 1] = direction or 2
    assert found.met.tolist() == met.tolist()


@settings(max_examples=100, deadline=None)
@given(series(), rules())
def test_upside_down_gives_the_same_with_directions_turned(data: Data, rule: Rule) -> None:
    mirrored: Data = {
        "value": -data["value"], "z": -data["z"], "lower": -data["upper"], "upper": -data["lower"],
        "sigma": data["sigma"], "segment": data["segment"],
    }  # fmt: skip
    turned = [(-direction, *rest) for direction, *rest in listed(find(rule, **data))]
    assert sorted(listed(find(rule, **mirrored))) == sorted(turned)


@settings(max_examples=100, deadline=None)
@given(series(), rules(), st.integers(0, 60))
def test_later_points_never_change_when_a_stretch_began(data: Data, rule: Rule, cut: int) -> None:
    before = listed(find(rule, **until(data, cut)))
    after = listed(find(rule, **data))
    known = {(direction, first, fired): last for direction, first, fired, last in after}
    for direction, first, fired, last in before:
        assert known[direction, first, fired] >= last
        if last < min(cut, len(data["value"])) - 1:
            assert known[direction, first, fired] == last
    assert [s[:3] for s in after if s[2] < cut] == [s[:3] for s in before]


@settings(max_examples=60, deadline=None)
@given(series(), series(), rules())
def test_series_one_behind_the_other_do_not_touch(left: Data, right: Data, rule: Rule) -> None:
    n = len(left["value"])
    both: Data = {
        "value": np.concatenate([left["value"], right["value"]]),
        "z": np.concatenate([left["z"], right["z"]]),
        "lower": np.concatenate([left["lower"], right["lower"]]),
        "upper": np.concatenate([left["upper"], right["upper"]]),
        "sigma": np.concatenate([left["sigma"], right["sigma"]]),
        "segment": np.concatenate([left["segment"], right["segment"] + 1000]),
    }
    apart = listed(find(rule, **left)) + [
        (d, first + n, fired + n, last + n) for d, first, fired, last in listed(find(rule, **right))
    ]
    assert sorted(listed(find(rule, **both))) == sorted(apart)


@settings(max_examples=100, deadline=None)
@given(st.lists(st.sampled_from([-1, 0, 1]), max_size=40), st.integers(1, 9))
def test_given_sides_override_the_centre_line(sides: list[int], run: int) -> None:
    side = np.array(sides, dtype=np.int64)
    n = len(side)
    as_z = [naive.Point(float(s), float(s), None, None, 1.0, 0) for s in sides]
    nothing = np.full(n, np.nan)
    found = find(
        Rule(name="run-one-side", points=run, of=run), value=np.ones(n), z=np.ones(n), lower=nothing,
        upper=nothing, sigma=np.ones(n), segment=np.zeros(n, dtype=np.int64), side=side,
    )  # fmt: skip
    assert listed(found) == naive.stretches("run-one-side", as_z, run, run)


@pytest.mark.parametrize("rule", RULES.values(), ids=lambda rule: rule.name)
def test_loops_and_arrays_agree_on_a_long_series(rule: Rule) -> None:
    rng = np.random.default_rng(20)
    z = np.round(rng.normal(size=3000), 1) + np.repeat(rng.choice([0.0, 0.0, 0.8, -1.5], size=100), 30)
    data: Data = {
        "value": z, "z": z, "lower": np.full(3000, -3.0), "upper": np.full(3000, 3.0), "sigma": np.ones(3000),
        "segment": np.arange(3000, dtype=np.int64) // 700,
    }  # fmt: skip
    own = (
        replace(rule, points=5, of=5) if rule.name in ("alternating", "avoiding-centre", "hugging") else rule
    )
    found = listed(find(own, **data))
    assert len(found) > 3
    assert sorted(found) == sorted(naive.stretches(own.name, points(data), own.points, own.of))


def test_published_sets() -> None:
    names = [(rule.name, rule.points, rule.of) for rule in WESTERN_ELECTRIC]
    # Western Electric Statistical Quality Control Handbook, 1956 (from memory).
    assert names == [
        ("outside-limits", 1, 1), ("two-of-three", 2, 3), ("four-of-five", 4, 5), ("run-one-side", 8, 8),
    ]  # fmt: skip
    # Nelson, J. Quality Technology 16(4), 1984, tests 1 to 8 (from memory).
    assert [(rule.name, rule.points, rule.of) for rule in NELSON] == [
        ("outside-limits", 1, 1), ("run-one-side", 9, 9), ("trend", 6, 6), ("alternating", 14, 14),
        ("two-of-three", 2, 3), ("four-of-five", 4, 5), ("hugging", 15, 15), ("avoiding-centre", 8, 8),
    ]  # fmt: skip
