"""Factors of the normal distribution and medians of counts, integrated and summed by hand.

d2, d3: expectation and standard deviation of the range of n standard normal values (Tippett 1925).
c4: expectation of their standard deviation (closed form, any textbook).
The median's standard deviation: from the (joint) density of the middle order statistics (David & Nagaraja,
Order Statistics, 2003, chapter 2; from memory).
All are integrals of smooth functions over [-9, 9], done by Gauss-Legendre quadrature.
"""

from __future__ import annotations

import math
from functools import cache

import numpy as np
from scipy.special import ndtr

_END = 9.0
_NODES, _WEIGHTS = np.polynomial.legendre.leggauss(160)


def _density(x: float) -> float:
    return math.exp(-x * x / 2) / math.sqrt(2 * math.pi)


def _line(low: float, high: float) -> list[tuple[float, float]]:
    half = (high - low) / 2
    return [(low + half * (1 + float(t)), half * float(w)) for t, w in zip(_NODES, _WEIGHTS, strict=True)]


@cache
def d2(n: int) -> float:
    total = 0.0
    for x, weight in _line(-_END, _END):
        below = float(ndtr(x))
        total += weight * (1 - below**n - float(ndtr(-x)) ** n)
    return total


@cache
def d3(n: int) -> float:
    # E(R^2) is twice the integral, over x < y, of P(least < x and y < greatest).
    square = 0.0
    for x, outer in _line(-_END, _END):
        for y, inner in _line(x, _END):
            below, above = float(ndtr(x)), float(ndtr(-y))
            middle = float(ndtr(y)) - below
            square += 2 * outer * inner * (1 - (1 - above) ** n - (1 - below) ** n + middle**n)
    return math.sqrt(square - d2(n) ** 2)


def c4(n: int) -> float:
    return math.sqrt(2 / (n - 1)) * math.exp(math.lgamma(n / 2) - math.lgamma((n - 1) / 2))


@cache
def median_error(n: int) -> float:
    """Return the standard deviation of the median of n standard normal values."""
    k = (n + 1) // 2
    total = 0.0
    if n % 2:
        share = math.factorial(n) / math.factorial(k - 1) ** 2
        for x, weight in _line(-_END, _END):
            total += weight * x * x * share * (float(ndtr(x)) * float(ndtr(-x))) ** (k - 1) * _density(x)
        return math.sqrt(total)
    share = math.factorial(n) / math.factorial(k - 1) ** 2
    for x, outer in _line(-_END, _END):
        for y, inner in _line(x, _END):
            joint = share * (float(ndtr(x)) * float(ndtr(-y))) ** (k - 1) * _density(x) * _density(y)
            total += outer * inner * joint * ((x + y) / 2) ** 2
    return math.sqrt(total)


def median_moving_range() -> float:
    """Return the median of |x - y| of two standard normal values, 0.9539 in print."""
    low, high = 0.0, 3.0
    for _ in range(200):
        middle = (low + high) / 2
        if math.erf(middle / 2) < 0.5:
            low = middle
        else:
            high = middle
    return low


@cache
def binomial_medians(n: int, p: float) -> tuple[int, int]:
    """Return the lowest and the highest median; they differ where exactly one half lies below."""
    below = 0.0
    for k in range(n + 1):
        below += math.comb(n, k) * p**k * (1 - p) ** (n - k)
        if below > 0.5 - 1e-12:
            return k, k + 1 if below < 0.5 + 1e-12 else k
    return n, n


@cache
def poisson_medians(mean: float) -> tuple[int, int]:
    term, below, k = math.exp(-mean), math.exp(-mean), 0
    while below < 0.5 - 1e-12:
        k += 1
        term *= mean / k
        below += term
    return k, k + 1 if below < 0.5 + 1e-12 else k
