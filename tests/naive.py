"""Statistics and rules a second time, as plain loops from their definitions, to check the fast ones by.

Nothing here shares code with the package. Missing values are NaN, missing limits None.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from fractions import Fraction
from itertools import pairwise

TOLERANCE = 1e-9


def mean(values: Sequence[float]) -> float:
    return math.fsum(values) / len(values)


def standard_deviation(values: Sequence[float]) -> float:
    centre = mean(values)
    return math.sqrt(math.fsum((v - centre) ** 2 for v in values) / (len(values) - 1))


def median(values: Sequence[float]) -> float:
    ordered = sorted(values)
    half = len(ordered) // 2
    return ordered[half] if len(ordered) % 2 else (ordered[half - 1] + ordered[half]) / 2


def moving_ranges(values: Sequence[float], segments: Sequence[int]) -> list[float]:
    found = []
    for i, value in enumerate(values):
        if i == 0 or segments[i] != segments[i - 1] or math.isnan(value) or math.isnan(values[i - 1]):
            found.append(math.nan)
        else:
            found.append(abs(value - values[i - 1]))
    return found


def bias_of_s(degrees: float) -> float:
    """c4 for so many degrees of freedom."""
    return math.sqrt(2 / degrees) * math.exp(math.lgamma((degrees + 1) / 2) - math.lgamma(degrees / 2))


def pooled_sigma(groups: Sequence[Sequence[float]]) -> float:
    squares, degrees = 0.0, 0
    for group in groups:
        if len(group) > 1:
            squares += standard_deviation(group) ** 2 * (len(group) - 1)
            degrees += len(group) - 1
    return math.sqrt(squares / degrees) / bias_of_s(degrees)


def mean_s_sigma(groups: Sequence[Sequence[float]]) -> float:
    parts = [standard_deviation(g) / bias_of_s(len(g) - 1) for g in groups if len(g) > 1]
    return mean(parts)


def weighted_s_sigma(groups: Sequence[Sequence[float]]) -> float:
    above, below = 0.0, 0.0
    for group in groups:
        if len(group) > 1:
            c4 = bias_of_s(len(group) - 1)
            above += c4 * standard_deviation(group) / (1 - c4**2)
            below += c4**2 / (1 - c4**2)
    return above / below


def range_sigma(groups: Sequence[Sequence[float]], d2: dict[int, float], d3: dict[int, float]) -> float:
    """From ranges, weighted after Burr; the factors are handed in."""
    above, below = 0.0, 0.0
    for group in groups:
        n = len(group)
        if n > 1:
            above += d2[n] * (max(group) - min(group)) / d3[n] ** 2
            below += d2[n] ** 2 / d3[n] ** 2
    return above / below


def whole(limit: float, size: float) -> float:
    """A limit that is a whole count but for rounding, as that count over the size."""
    count = limit * size
    nearest = round(count)
    return nearest / size if abs(count - nearest) < 1e-9 * max(1.0, abs(count)) else limit


def fraction_limits(centre: float, size: float, width: float) -> tuple[float | None, float | None]:
    own = math.sqrt(centre * (1 - centre) / size)
    lower, upper = whole(centre - width * own, size), whole(centre + width * own, size)
    if own == 0:
        return None, None
    return (lower if lower > 0 else None), (upper if upper < 1 else None)


def rate_limits(centre: float, size: float, width: float) -> tuple[float | None, float | None]:
    own = math.sqrt(centre / size)
    lower, upper = whole(centre - width * own, size), whole(centre + width * own, size)
    if own == 0:
        return None, None
    return (lower if lower > 0 else None), upper


def binomial_side(count: int, size: int, probability: Fraction) -> int:
    """Side of the median by exact sums."""
    chance = [math.comb(size, k) * probability**k * (1 - probability) ** (size - k) for k in range(size + 1)]
    half = Fraction(1, 2)
    if sum(chance[:count], Fraction(0)) >= half:
        return 1
    if sum(chance[count + 1 :], Fraction(0)) >= half:
        return -1
    return 0


def poisson_side(count: int, expected: float) -> int:
    fewer = math.fsum(math.exp(k * math.log(expected) - expected - math.lgamma(k + 1)) for k in range(count))
    here = math.exp(count * math.log(expected) - expected - math.lgamma(count + 1))
    if fewer >= 0.5:
        return 1
    return -1 if 1 - fewer - here >= 0.5 else 0


def likely_start(z: Sequence[float]) -> tuple[int, int, int, float]:
    """First point of the likely new level, its band, the shift."""
    gains = []
    for t in range(len(z)):
        shift = mean(z[t:])
        unchanged = math.fsum(-(v**2) / 2 for v in z[t:])
        changed = math.fsum(-((v - shift) ** 2) / 2 for v in z[t:])
        gains.append(changed - unchanged)
    best = max(gains)
    start = gains.index(best)
    inside = [t for t, gain in enumerate(gains) if gain >= best - 2.5]
    return start, inside[0], inside[-1], mean(z[start:])


class Point:
    """One judged point."""

    def __init__(
        self, value: float, z: float, lower: float | None, upper: float | None, sigma: float, segment: int
    ) -> None:
        self.value, self.z, self.lower, self.upper = value, z, lower, upper
        self.sigma, self.segment = sigma, segment


def window(points: Sequence[Point], i: int, size: int) -> list[int]:
    """The positions of the last `size` points up to i that lie in its unbroken segment."""
    found = [i]
    while len(found) < size and found[0] > 0 and points[found[0] - 1].segment == points[i].segment:
        found.insert(0, found[0] - 1)
    return found


def in_zone(rule: str, point: Point, direction: int) -> bool:
    if rule == "outside-limits":
        if direction > 0:
            return point.upper is not None and point.value - point.upper > TOLERANCE * point.sigma
        return (
            direction < 0 and point.lower is not None and point.lower - point.value > TOLERANCE * point.sigma
        )
    if rule == "hugging":
        return direction == 0 and abs(point.z) - 1 <= TOLERANCE
    if rule == "avoiding-centre":
        return direction == 0 and abs(point.z) - 1 > TOLERANCE
    bound = {"two-of-three": 2, "four-of-five": 1, "run-one-side": 0}[rule]
    return direction != 0 and point.z * direction - bound > TOLERANCE


def met_at(rule: str, points: Sequence[Point], i: int, need: int, of: int, direction: int) -> int | None:
    """The first point that counts when the rule is met at i in this direction, else None."""
    if rule in ("trend", "alternating"):
        seen = window(points, i, need)
        if len(seen) < need:
            return None
        signs = []
        for a, b in pairwise(seen):
            step = points[b].value - points[a].value
            slack = TOLERANCE * max(points[a].sigma, points[b].sigma)
            signs.append(1 if step > slack else -1 if step < -slack else 0)
        if rule == "trend":
            good = direction != 0 and all(s == direction for s in signs)
        else:
            good = direction == 0 and 0 not in signs
            good = good and all(s == -r for r, s in pairwise(signs))
        return seen[0] if good else None
    if not in_zone(rule, points[i], direction):
        return None
    counting = [j for j in window(points, i, of) if in_zone(rule, points[j], direction)]
    return counting[0] if len(counting) >= need else None


def stretches(rule: str, points: Sequence[Point], need: int, of: int) -> list[tuple[int, int, int, int]]:
    """(direction, first, fired, last) of every unbroken stretch, in the order they fire."""
    found: list[tuple[int, int, int, int]] = []
    for direction in (1, -1, 0):
        running: tuple[int, int, int] | None = None
        for i, point in enumerate(points):
            first = met_at(rule, points, i, need, of, direction)
            broken = i > 0 and points[i - 1].segment != point.segment
            if running and (first is None or broken):
                found.append((direction, *running))
                running = None
            if first is not None:
                running = (running[0], running[1], i) if running else (first, i, i)
        if running:
            found.append((direction, *running))
    return sorted(found, key=lambda s: s[2])
