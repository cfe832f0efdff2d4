"""Simulated run lengths against exact ones: an outside check of how the rules are read.

Zero-state mean run lengths and their standard deviations after Champ & Woodall (1987) and exact Markov
chains, see reference/spc/rules_arl.csv. Four standard errors.
"""

from __future__ import annotations

import math

import numpy as np
import pytest
from tests.spc import reference

from holdsteady.arrays import Floats
from holdsteady.spc.rules import NELSON, RULES, WESTERN_ELECTRIC, Rule, find

EXACT = {(row["rule_set"], float(row["shift"])): row for row in reference.rows("rules_arl")}
LIMITS, TWO, FOUR, RUN_OF_8 = WESTERN_ELECTRIC


def run_lengths(rules: tuple[Rule, ...], shift: float, *, runs: int, longest: int, seed: int) -> Floats:
    """Points up to and with the first signal of any rule, each run from a cleared start."""
    rng = np.random.default_rng(seed)
    z = rng.normal(shift, size=runs * longest)
    one = np.ones(len(z))
    segment = np.repeat(np.arange(runs, dtype=np.int64), longest)
    earliest = np.full(runs, longest, dtype=np.int64)
    for rule in rules:
        found = find(rule, value=z, z=z, lower=-3 * one, upper=3 * one, sigma=one, segment=segment)
        np.minimum.at(earliest, found.fired // longest, found.fired % longest)
    assert (earliest < longest).all(), "a run without a signal would bias the mean"
    return (earliest + 1).astype(np.float64)


@pytest.mark.parametrize(
    ("rule_set", "rules", "shift", "runs"),
    [
        ("rules 1", (LIMITS,), 1.4, 20_000),
        ("rules 12", (LIMITS, TWO), 1.2, 20_000),
        ("rules 13", (LIMITS, FOUR), 1.2, 20_000),
        ("rules 14", (LIMITS, RUN_OF_8), 1.2, 20_000),
        ("rules 1234", WESTERN_ELECTRIC, 0.0, 2_500),
        ("rules 1234", WESTERN_ELECTRIC, 1.4, 30_000),
        ("N2", (RULES["run-one-side"],), 0.0, 400),
        ("N3-6pts", (RULES["trend"],), 0.0, 400),
        ("N4-15pts", (Rule(name="alternating", points=15, of=15),), 0.0, 250),
        ("N5", (TWO,), 0.0, 400),
        ("N6", (FOUR,), 0.0, 600),
        ("N7", (RULES["hugging"],), 0.0, 250),
        ("N1-8 (3:6pts,8:any)", NELSON, 0.0, 2_500),
    ],
)  # fmt: skip
def test_run_lengths(rule_set: str, rules: tuple[Rule, ...], shift: float, runs: int) -> None:
    row = EXACT[rule_set, shift]
    expected, deviation = float(row["arl_exact"] or row["sim_arl"]), float(row["sdrl"] or row["arl_exact"])
    longest = int(14 * expected) + 20
    lengths = run_lengths(rules, shift, runs=runs, longest=longest, seed=1987)
    assert lengths.mean() == pytest.approx(expected, abs=4 * deviation / math.sqrt(runs))


@pytest.mark.parametrize(("run", "chance"), [(3, 0.3173105078629141), (4, 0.3173105078629141)])
def test_short_runs_avoiding_the_centre(run: int, chance: float) -> None:
    """Mean wait for k successes in a row: (1 - p**k) / ((1 - p) p**k) (Feller 1968, XIII.7)."""
    expected = (1 - chance**run) / ((1 - chance) * chance**run)
    rule = Rule(name="avoiding-centre", points=run, of=run)
    lengths = run_lengths((rule,), 0.0, runs=3000, longest=int(14 * expected), seed=5)
    assert lengths.mean() == pytest.approx(expected, abs=4 * expected / math.sqrt(3000))
