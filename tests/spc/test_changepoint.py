"""The likely start: exact cases, and how often its band holds the truth."""

from __future__ import annotations

import numpy as np
import pytest

from holdsteady.spc.changepoint import likely_start


def test_a_clear_step() -> None:
    step = likely_start(np.array([0.0] * 10 + [3.0] * 5))
    assert (step.start, step.shift) == (10, 3.0)
    # Log-likelihood gain (N - t) * mean**2 / 2 by hand: t = 10: 22.5; t = 11: 18; t = 9: 15**2 / 12 = 18.75.
    assert (step.low, step.high) == (10, 10)


def test_the_band_is_two_and_a_half_below_the_maximum() -> None:
    # By hand: gains at t = 0..3 are 9/8, 9/6, 9/4, 4/2; all within 2.5 of 9/4.
    step = likely_start(np.array([0.0, 0.0, 1.0, 2.0]))
    assert (step.start, step.low, step.high, step.shift) == (2, 0, 3, 1.5)


def test_downwards_and_from_the_first_point() -> None:
    step = likely_start(np.full(6, -2.0))
    assert (step.start, step.shift) == (0, -2.0)
    assert likely_start(np.array([1.0])).start == 0
    with pytest.raises(ValueError, match="at least one point"):
        likely_start(np.array([]))


def test_how_often_the_band_holds_the_true_start() -> None:
    """A step of 1.5 sigma, 12 points after it; the rate is measured here, not published."""
    rng = np.random.default_rng(1998)
    held, exact = 0, 0
    for _ in range(2000):
        z = rng.normal(size=42)
        z[30:] += 1.5
        step = likely_start(z)
        held += step.low <= 30 <= step.high
        exact += step.start == 30
    assert 0.9 < held / 2000 < 1.0
    assert exact / 2000 > 0.35
