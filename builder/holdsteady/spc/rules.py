"""The eight rules; what each means is said at its function, how they are read in `find`.

References
----------
Western Electric Co. (1956), Statistical Quality Control Handbook (the four zone rules, run of 8).
Nelson, L. S. (1984), The Shewhart control chart - tests for special causes, Journal of Quality Technology
16(4), 237-239 (eight tests, run of 9).
Champ, C. W. & Woodall, W. H. (1987), Exact results for Shewhart control charts with supplementary runs
rules, Technometrics 29(4), 393-399 (run lengths).
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from types import MappingProxyType

import numpy as np

from holdsteady.arrays import Bools, Floats, Ints, frozen

TOLERANCE = 1e-9  # in sigmas, in every comparison


@dataclass(frozen=True, slots=True, kw_only=True)
class Rule:
    """A rule with its counts: met by `points` of the last `of` points."""

    name: str
    points: int
    of: int


@dataclass(frozen=True, slots=True, kw_only=True)
class Stretches:
    """Unbroken stretches over which a rule is met in one direction, S of them, sorted by `fired`.

    Indices are 0-based positions in the arrays handed in; `direction` is +1 high, -1 low, 0 none.
    `met` is (N,) int64: +1, -1 where met high, low; 2 where met without a direction; 0 where not met.
    """

    direction: Ints
    first: Ints
    fired: Ints
    last: Ints
    met: Ints


@dataclass(frozen=True, slots=True, kw_only=True)
class Series:
    """The judged points as a rule sees them; all (N,)."""

    value: Floats
    z: Floats
    lower: Floats
    upper: Floats
    sigma: Floats
    starts: Ints  # where a new segment begins, 0 left out
    side: Ints | None


Counting = tuple[tuple[int, Bools], ...]
"""For each direction (+1, -1, 0), which points count towards the rule."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Test:
    """How a rule reads the points, and its customary counts.

    `lead` is how many points a counting one needs before it: a trend of six points is five rising steps.
    `consecutive` rules have no `of` of their own.
    """

    counting: Callable[[Series], Counting]
    default: Rule
    lead: int = 0
    consecutive: bool = False


def _outside_limits(series: Series) -> Counting:
    """Strictly beyond a limit; a limit that is missing is never passed."""
    slack = TOLERANCE * np.fmax(series.sigma, 0.0)
    return (1, series.value > series.upper + slack), (-1, series.value < series.lower - slack)


def _beyond(sigmas: float) -> Callable[[Series], Counting]:
    """Strictly further from the centre than so many sigmas, on one side; beyond the limits counts too."""

    def counting(series: Series) -> Counting:
        bound = sigmas + TOLERANCE
        return (1, series.z > bound), (-1, series.z < -bound)

    return counting


def _one_side(series: Series) -> Counting:
    """Strictly on one side of the centre, or of the median where the caller says on which side a point is."""
    if series.side is not None:
        return (1, series.side > 0), (-1, series.side < 0)
    return _beyond(0.0)(series)


def _steps(series: Series) -> tuple[Bools, Bools]:
    """Whether each point lies above, below the one before in its segment; neither at a tie."""
    step = np.diff(series.value)
    slack = TOLERANCE * np.fmax(np.fmax(series.sigma[1:], series.sigma[:-1]), 0.0)
    up, down = np.zeros((2, len(series.value)), dtype=np.bool_)
    np.greater(step, slack, out=up[1:])
    np.less(step, -slack, out=down[1:])
    up[series.starts] = False
    down[series.starts] = False
    return up, down


def _trend(series: Series) -> Counting:
    """Steadily rising (high) or falling (low)."""
    up, down = _steps(series)
    return (1, up), (-1, down)


def _alternating(series: Series) -> Counting:
    """Up and down in turn."""
    up, down = _steps(series)
    turn = np.zeros_like(up)
    turn[1:] = (up[1:] & down[:-1]) | (down[1:] & up[:-1])
    return ((0, turn),)


def _hugging(series: Series) -> Counting:
    """Within one sigma of the centre, the zone's edge included."""
    return ((0, np.abs(series.z) <= 1.0 + TOLERANCE),)


def _avoiding_centre(series: Series) -> Counting:
    """Strictly beyond one sigma, on either side, whether or not both sides appear."""
    return ((0, np.abs(series.z) > 1.0 + TOLERANCE),)


def _rule(name: str, points: int, of: int | None = None) -> Rule:
    return Rule(name=name, points=points, of=of or points)


TESTS: Mapping[str, Test] = MappingProxyType(
    {
        test.default.name: test
        for test in (
            Test(counting=_outside_limits, default=_rule("outside-limits", 1)),
            Test(counting=_beyond(2.0), default=_rule("two-of-three", 2, 3)),
            Test(counting=_beyond(1.0), default=_rule("four-of-five", 4, 5)),
            Test(counting=_one_side, default=_rule("run-one-side", 9)),
            Test(counting=_trend, default=_rule("trend", 6), lead=1, consecutive=True),
            Test(counting=_alternating, default=_rule("alternating", 14), lead=2, consecutive=True),
            Test(counting=_hugging, default=_rule("hugging", 15)),
            Test(counting=_avoiding_centre, default=_rule("avoiding-centre", 8)),
        )
    }
)

RULES: Mapping[str, Rule] = MappingProxyType({name: test.default for name, test in TESTS.items()})
"""Every rule with its customary counts."""

WESTERN_ELECTRIC = (
    RULES["outside-limits"],
    RULES["two-of-three"],
    RULES["four-of-five"],
    _rule("run-one-side", 8),
)
"""The four zone rules of the 1956 handbook."""

NELSON = tuple(
    RULES[name]
    for name in (
        "outside-limits", "run-one-side", "trend", "alternating",
        "two-of-three", "four-of-five", "hugging", "avoiding-centre",
    )
)  # fmt: skip
"""The eight tests of Nelson 1984, in his order."""


def refusal(rule: Rule) -> str:
    """Return why a rule's name or counts make no sense, or an empty string."""
    test = TESTS.get(rule.name)
    if test is None:
        return f"{rule.name!r} is none of {', '.join(TESTS)}"
    if rule.points <= test.lead:
        return f"{rule.name} needs at least {test.lead + 1} points"
    if test.consecutive and rule.of != rule.points:
        return f"{rule.name} counts consecutive points: `of` must equal `points`"
    if rule.of < rule.points:
        return f"{rule.name} cannot be met by {rule.points} of {rule.of} points"
    return ""


def find(  # noqa: PLR0913  a rule looks at one panel whole
    rule: Rule,
    *,
    value: Floats,
    z: Floats,
    lower: Floats,
    upper: Floats,
    sigma: Floats,
    segment: Ints,
    side: Ints | None = None,
) -> Stretches:
    """Find the stretches over which a rule is met.

    A rule is met at a point that itself counts when `points` of the last `of` points, or of as many as
    the segment has had, count. `first` is the earliest counting point among those when the rule is first
    met, for `trend` and `alternating` the point the steps begin at; `fired` is where it is first met;
    `last` the last point up to which it is met without a break. On a limit is inside, on the centre line
    breaks a run, a tie breaks trend and alternation, all within 1e-9 sigma.

    Parameters
    ----------
    rule : which rule, with its counts
    value, z, lower, upper, sigma : (N,) the judged points in order, none missing; NaN where there is no limit
    segment : (N,) no stretch crosses a change
    side : (N,) +1, -1, 0: overrides the sign of z for `run-one-side` (attribute charts)

    Raises
    ------
    ValueError
        The rule's name or counts make no sense; see `refusal`.
    """
    reason = refusal(rule)
    if reason:
        raise ValueError(reason)
    starts = np.flatnonzero(segment[1:] != segment[:-1]) + 1
    series = Series(value=value, z=z, lower=lower, upper=upper, sigma=sigma, starts=starts, side=side)
    test = TESTS[rule.name]
    met = np.zeros(len(value), dtype=np.int64)
    found: list[tuple[int, Ints, Ints, Ints]] = []
    for direction, counts in test.counting(series):
        hits, first, fired, last = _stretches(counts, rule.points - test.lead, rule.of - test.lead, starts)
        met[hits] = direction or 2
        found.append((direction, first - test.lead, fired, last))
    fired = np.concatenate([entry[2] for entry in found])
    order = np.argsort(fired, kind="stable")
    return Stretches(
        direction=frozen(np.concatenate([np.full(len(e[2]), e[0], dtype=np.int64) for e in found])[order]),
        first=frozen(np.concatenate([entry[1] for entry in found])[order]),
        fired=frozen(fired[order]),
        last=frozen(np.concatenate([entry[3] for entry in found])[order]),
        met=frozen(met),
    )


def _stretches(counts: Bools, points: int, of: int, starts: Ints) -> tuple[Ints, Ints, Ints, Ints]:
    """Where `points` of the last `of` count, and first, fired and last of each unbroken stretch of that.

    Works on the positions of the counting points alone: the rule is met at one when the (points - 1)-th
    counting point before it lies fewer than `of` back in the same segment.
    """
    places = np.flatnonzero(counts)
    earlier = places[: max(len(places) - points + 1, 0)]
    newest = places[points - 1 :]
    near = newest - earlier < of
    earlier, hits = earlier[near], newest[near]
    if len(starts) and points > 1:
        together = np.searchsorted(starts, earlier, side="right") == np.searchsorted(
            starts, hits, side="right"
        )
        hits = hits[together]
    begins = np.ones(len(hits), dtype=np.bool_)
    begins[1:] = np.diff(hits) > 1
    if len(starts) and len(hits):
        ordinal = np.searchsorted(starts, hits, side="right")
        begins[1:] |= ordinal[1:] != ordinal[:-1]
    opening = np.flatnonzero(begins)
    fired = hits[opening]
    last = hits[np.append(opening[1:], len(hits)) - 1] if len(hits) else fired
    return hits, _first_counting(places, fired, of, starts), fired, last


def _first_counting(places: Ints, fired: Ints, of: int, starts: Ints) -> Ints:
    """Find the earliest counting point among the last `of` of the segment, up to each fired one."""
    window = fired - of + 1
    if len(starts):
        since = np.searchsorted(starts, fired, side="right") - 1
        window = np.maximum(window, np.where(since >= 0, starts[np.maximum(since, 0)], 0))
    first: Ints = places[np.searchsorted(places, window)]
    return first
