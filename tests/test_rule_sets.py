"""The rules that settings name are the rules that are computed; neither side knows the other."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from holdsteady.arrays import Ints
from holdsteady.monitor.judge import _with_counts
from holdsteady.project.rule_sets import RULE_SETS, ZONE_RULES, read_rules
from holdsteady.project.settings import RuleSetting
from holdsteady.spc.rules import NELSON, RULES, TESTS, WESTERN_ELECTRIC, Rule, find


@pytest.mark.parametrize(("name", "published"), [("western-electric", WESTERN_ELECTRIC), ("nelson", NELSON)])
def test_published_sets_say_the_same_on_both_sides(name: str, published: tuple[Rule, ...]) -> None:
    assert tuple(_with_counts(RULES[s.rule], s) for s in RULE_SETS[name]) == published


def test_every_rule_that_may_be_named_is_computed_with_its_usual_counts() -> None:
    settings, faults = read_rules(list(RULES))
    assert not faults
    assert [_with_counts(RULES[s.rule], s) for s in settings] == list(RULES.values())
    assert [s.rule for s in settings] == list(TESTS)
    for rule in RULES.values():
        said = {"rule": rule.name, "points": rule.points}
        assert read_rules([said | ({"of": rule.of} if rule.of != rule.points else {})])[1] == []
        # One fewer than the fewest that keep a meaning is refused when the settings are read.
        fewest = next(n for n in range(1, 20) if not read_rules([{"rule": rule.name, "points": n}])[1])
        assert fewest > TESTS[rule.name].lead or rule.name == "outside-limits"


def test_zone_rules_are_those_that_only_distances_from_the_centre_decide() -> None:
    """A rule of zones changes with the scale of z; the others do not look at it beyond its sign."""
    rng = np.random.default_rng(7)
    value = rng.normal(size=4_000)
    flat = np.zeros(value.size)

    def met(rule: Rule, scale: float) -> Ints:
        found = find(
            rule,
            value=value,
            z=value * scale,
            lower=flat - 3,
            upper=flat + 3,
            sigma=flat + 1,
            segment=flat.astype(np.int64),
        )
        return found.met

    changed = {name for name, rule in RULES.items() if not np.array_equal(met(rule, 1), met(rule, 3))}
    assert changed == ZONE_RULES


def test_counts_of_ones_own_reach_the_computation() -> None:
    own = RuleSetting(rule="run-one-side", points=7)
    assert _with_counts(RULES["run-one-side"], own) == replace(RULES["run-one-side"], points=7, of=7)
