"""Each rule at its edges; the readings of the rules that the definitions pin."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
import pytest

from holdsteady.spc.rules import RULES, Rule, Stretches, find, refusal


def look(
    name: str,
    z: Sequence[float],
    *,
    points: int | None = None,
    of: int | None = None,
    segment: list[int] | None = None,
    sigma: float = 1.0,
    centre: float = 0.0,
    limits: tuple[float, float] = (-3.0, 3.0),
) -> Stretches:
    """Stretches of a rule over points given in sigmas from the centre."""
    rule = RULES[name]
    own = Rule(name=name, points=points or rule.points, of=of or points or rule.of)
    scaled = np.array(z, dtype=np.float64)
    n = len(z)
    return find(
        own,
        value=centre + sigma * scaled,
        z=scaled,
        lower=np.full(n, centre + sigma * limits[0]),
        upper=np.full(n, centre + sigma * limits[1]),
        sigma=np.full(n, sigma),
        segment=np.array(segment if segment is not None else [0] * n, dtype=np.int64),
    )


def spans(found: Stretches) -> list[tuple[int, int, int, int]]:
    columns = (found.direction, found.first, found.fired, found.last)
    return list(zip(*(column.tolist() for column in columns), strict=True))


def test_on_a_limit_is_inside() -> None:
    assert spans(look("outside-limits", [3.0, -3.0, 3.0 + 1e-10, -3.0 - 1e-10])) == []
    assert spans(look("outside-limits", [3.0 + 1e-8, 0, -3.0 - 1e-8])) == [(1, 0, 0, 0), (-1, 2, 2, 2)]


def test_rounding_at_a_limit_is_not_outside() -> None:
    assert 0.1 + 0.2 > 0.3
    assert spans(look("outside-limits", [0.1 + 0.2], limits=(-0.3, 0.3))) == []


def test_a_missing_limit_is_never_passed() -> None:
    assert spans(look("outside-limits", [-9.0, 9.0], limits=(np.nan, 3.0))) == [(1, 1, 1, 1)]
    assert spans(look("outside-limits", [-9.0, 9.0], limits=(np.nan, np.nan))) == []


def test_neighbours_beyond_a_limit_are_one_stretch_until_they_change_side() -> None:
    found = look("outside-limits", [4, 5, -4, 0, 4])
    assert spans(found) == [(1, 0, 0, 1), (-1, 2, 2, 2), (1, 4, 4, 4)]
    assert found.met.tolist() == [1, 1, -1, 0, 1]


def test_two_of_three() -> None:
    assert spans(look("two-of-three", [2.5, 0, 2.5])) == [(1, 0, 2, 2)]
    assert spans(look("two-of-three", [2.5, -2.5, 2.5])) == [(1, 0, 2, 2)]  # the third may lie anywhere
    assert spans(look("two-of-three", [2.5, 0, 0, 2.5])) == []
    assert spans(look("two-of-three", [2.5, -2.5])) == []  # not the same side
    assert spans(look("two-of-three", [2.0, 2.0, 2.0])) == []  # on the line is inside
    assert spans(look("two-of-three", [3.5, 2.5])) == [(1, 0, 1, 1)]  # beyond the limits counts too


def test_two_points_at_the_start_of_an_era_are_two_of_three() -> None:
    assert spans(look("two-of-three", [2.5, 2.5])) == [(1, 0, 1, 1)]
    assert spans(look("two-of-three", [0, 2.5, 2.5], segment=[0, 1, 1])) == [(1, 1, 2, 2)]


def test_the_newest_point_must_lie_in_the_zone() -> None:
    found = look("two-of-three", [2.5, 2.5, 0, 2.5, 2.5])
    # Two of the last three lie there at the point within as well, but it ends the signal.
    assert found.met.tolist() == [0, 1, 0, 1, 1]
    assert spans(found) == [(1, 0, 1, 1), (1, 1, 3, 4)]


def test_four_of_five() -> None:
    assert spans(look("four-of-five", [-1.5, -1.5, 0, -1.5, -1.5, -1.5])) == [(-1, 0, 4, 5)]
    assert spans(look("four-of-five", [0, 1.5, 1.5, 1.5, 1.5])) == [(1, 1, 4, 4)]
    assert spans(look("four-of-five", [1.5, 1.5, 1.5, 1.5])) == [(1, 0, 3, 3)]
    assert spans(look("four-of-five", [1.5, 1.5, 0, 0, 1.5, 1.5])) == []
    assert spans(look("four-of-five", [1.0] * 9)) == []


def test_run_on_one_side() -> None:
    assert spans(look("run-one-side", [0.1] * 8)) == []
    assert spans(look("run-one-side", [0.1] * 9)) == [(1, 0, 8, 8)]
    assert spans(look("run-one-side", [-1] + [0.1] * 11)) == [(1, 1, 9, 11)]
    assert spans(look("run-one-side", [-0.1] * 8, points=8)) == [(-1, 0, 7, 7)]


def test_on_the_centre_line_breaks_a_run() -> None:
    assert spans(look("run-one-side", [0.1] * 5 + [0.0] + [0.1] * 8)) == []
    assert spans(look("run-one-side", [0.1] * 5 + [1e-10] + [0.1] * 8)) == []  # within the tolerance
    assert spans(look("run-one-side", [0.1] * 5 + [1e-8] + [0.1] * 8)) == [(1, 0, 8, 13)]


def test_trend_is_six_points() -> None:
    assert spans(look("trend", [0, 1, 2, 3, 4])) == []
    assert spans(look("trend", [0, 1, 2, 3, 4, 5])) == [(1, 0, 5, 5)]
    assert spans(look("trend", [9, 0, -1, -2, -3, -4, -5, -4])) == [(-1, 0, 5, 6)]
    assert spans(look("trend", [0, 5, 4, 3, 2, 1, 0, 0])) == [(-1, 1, 6, 6)]


def test_a_tie_breaks_a_trend() -> None:
    assert spans(look("trend", [0, 1, 2, 2, 3, 4, 5])) == []
    assert spans(look("trend", [0, 1, 2, 2 + 1e-10, 3, 4, 5])) == []
    assert spans(look("trend", [0, 1, 2, 2 + 1e-8, 3, 4])) == [(1, 0, 5, 5)]


def test_ties_are_judged_in_sigmas() -> None:
    """Readings of 0.1, 0.2, 0.3 mm around 12 mm: rounding of 1e-15 is no step, one of 1e-8 sigma is."""
    assert spans(look("trend", [0, 1, 2, 2 + 1e-8, 3, 4], sigma=1e-3, centre=12.0)) == [(1, 0, 5, 5)]
    assert spans(look("trend", [0, 1, 2, 2 + 1e-11, 3, 4], sigma=1e-3, centre=12.0)) == []


def test_alternating_is_fourteen_points() -> None:
    up_down = [0, 1] * 7
    assert spans(look("alternating", up_down[:13])) == []
    found = look("alternating", [*up_down, 0, 1, 1, 0])
    assert spans(found) == [(0, 0, 13, 15)]
    assert found.met.tolist() == [0] * 13 + [2, 2, 2, 0, 0]
    assert spans(look("alternating", [5, 4, *up_down])) == [(0, 1, 14, 15)]  # 5, 4, 0 falls twice


def test_a_tie_breaks_alternation() -> None:
    assert spans(look("alternating", [0, 1] * 6 + [1] + [0, 1] * 6)) == []


def test_hugging_includes_the_edge() -> None:
    assert spans(look("hugging", [1.0, -1.0] * 7)) == []
    assert spans(look("hugging", [1.0, -1.0] * 7 + [1.0])) == [(0, 0, 14, 14)]
    assert spans(look("hugging", [0.0] * 14 + [1.0 + 1e-8])) == []


def test_avoiding_the_centre_on_either_side() -> None:
    assert spans(look("avoiding-centre", [1.5, -1.5] * 4)) == [(0, 0, 7, 7)]
    assert spans(look("avoiding-centre", [1.5] * 8)) == [(0, 0, 7, 7)]  # one side alone counts
    assert spans(look("avoiding-centre", [1.5] * 7 + [1.0] + [1.5] * 7)) == []
    assert spans(look("avoiding-centre", [4.0, -5.0] * 4)) == [(0, 0, 7, 7)]


@pytest.mark.parametrize(
    ("name", "z"),
    [
        ("two-of-three", [2.5, 2.5]),
        ("four-of-five", [1.5] * 4),
        ("run-one-side", [1.0] * 9),
        ("trend", list(range(6))),
        ("alternating", [0, 1] * 7),
        ("hugging", [0.0] * 15),
        ("avoiding-centre", [1.5] * 8),
    ],
)
def test_nothing_crosses_a_change_of_segment(name: str, z: list[float]) -> None:
    n = len(z)
    assert len(look(name, z).fired) == 1
    for cut in range(1, n):
        assert spans(look(name, z, segment=[0] * cut + [7] * (n - cut))) == []
    twice = look(name, [*z, *z], segment=[0] * n + [1] * n)
    assert twice.fired.tolist() == [n - 1, 2 * n - 1]
    assert twice.last.tolist() == [n - 1, 2 * n - 1]
    assert twice.first.tolist() == [0, n]


def test_a_segment_that_returns_is_another_segment() -> None:
    assert spans(look("four-of-five", [1.5, 1.5, 0, 1.5, 1.5], segment=[0, 0, 1, 0, 0])) == []


def test_stretches_of_one_point_rules_break_at_a_segment() -> None:
    assert spans(look("outside-limits", [4, 4], segment=[0, 1])) == [(1, 0, 0, 0), (1, 1, 1, 1)]


def test_nothing_to_judge() -> None:
    for name in RULES:
        found = look(name, [])
        assert spans(found) == []
        assert found.met.shape == (0,)
        assert spans(look(name, [0.5])) == []


def test_results_cannot_be_changed() -> None:
    found = look("outside-limits", [4.0])
    with pytest.raises(ValueError, match="read-only"):
        found.met[0] = 0


@pytest.mark.parametrize(
    ("rule", "words"),
    [
        (Rule(name="none-such", points=1, of=1), "none of outside-limits"),
        (Rule(name="two-of-three", points=3, of=2), "cannot be met by 3 of 2"),
        (Rule(name="trend", points=1, of=1), "needs at least 2 points"),
        (Rule(name="alternating", points=2, of=2), "needs at least 3 points"),
        (Rule(name="trend", points=5, of=6), "`of` must equal `points`"),
        (Rule(name="hugging", points=0, of=0), "needs at least 1 point"),
    ],
)
def test_counts_that_make_no_sense(rule: Rule, words: str) -> None:
    assert words in refusal(rule)
    nothing = np.array([])
    with pytest.raises(ValueError, match=words.replace("`", ".")):
        find(
            rule, value=nothing, z=nothing, lower=nothing, upper=nothing, sigma=nothing,
            segment=np.array([], dtype=np.int64),
        )  # fmt: skip


def test_rules_as_they_come_make_sense() -> None:
    assert [refusal(rule) for rule in RULES.values()] == [""] * 8
