"""Factors of the normal distribution, computed from their definitions for any sample size.

Nothing is typed in from a table: published tables are rounded to three decimals, and limits made with them
differ from the exact ones in the fourth digit.

References
----------
Tippett, L. H. C. (1925), On the extreme individuals and the range of samples taken from a normal population,
Biometrika 17, 364-387 (d2, d3).
Patnaik, P. B. (1950), The use of mean range as an estimator of variance in statistical tests,
Biometrika 37, 78-87 (effective degrees of freedom).
David, H. A. & Nagaraja, H. N. (2003), Order Statistics, 3rd ed., sections 2.1 to 2.3 (range and median).
"""

from __future__ import annotations

import math
from collections.abc import Callable
from functools import cache
from typing import Any, overload

import numpy as np
import numpy.typing as npt
from scipy.special import gammaln, ndtr, ndtri

from holdsteady.arrays import Floats, Ints

Sizes = Floats | Ints

MEDIAN_MOVING_RANGE = float(math.sqrt(2.0) * ndtri(0.75))
"""Median of the absolute difference of two independent standard normal values, about 0.9539."""


@overload
def d2(n: int) -> float: ...
@overload
def d2(n: Sizes) -> Floats: ...
def d2(n: int | Sizes) -> float | Floats:
    """Return the mean range of `n` independent standard normal values.

    Parameters
    ----------
    n : int or (N,) whole numbers, at least 2

    Returns
    -------
    float or (N,) float64

    Raises
    ------
    ValueError
        A size is below 2 or not whole.
    """
    return _by_size(lambda size: _range_moments(size)[0], n, smallest=2)


@overload
def d3(n: int) -> float: ...
@overload
def d3(n: Sizes) -> Floats: ...
def d3(n: int | Sizes) -> float | Floats:
    """Return the standard deviation of the range of `n` independent standard normal values.

    Parameters and errors as for `d2`.
    """
    return _by_size(lambda size: _range_moments(size)[1], n, smallest=2)


@overload
def c4(n: float) -> float: ...
@overload
def c4(n: Sizes) -> Floats: ...
def c4(n: float | Sizes) -> float | Floats:
    """Return the mean of the sample standard deviation of `n` independent standard normal values.

    With v = n - 1 degrees of freedom, sqrt(2 / v) * gamma((v + 1) / 2) / gamma(v / 2); `n` need not be whole,
    so that c4(v + 1) serves a pooled estimate.

    Raises
    ------
    ValueError
        `n` is not above 1.
    """
    degrees = np.asarray(n, dtype=np.float64) - 1.0
    if not (degrees > 0).all():
        raise ValueError(f"c4 needs n above 1, got {np.min(degrees) + 1.0:g}")
    exact = np.sqrt(2.0 / degrees) * np.exp(gammaln((degrees + 1.0) / 2.0) - gammaln(degrees / 2.0))
    # Differences of log-gammas lose digits when large; the asymptotic series is exact to 1e-16 there.
    inverse = 1.0 / degrees
    series = 1.0 + inverse * (-1 / 4 + inverse * (1 / 32 + inverse * (5 / 128 - inverse * 21 / 2048)))
    value: Floats = np.where(degrees > 1000.0, series, exact)
    return float(value) if np.ndim(n) == 0 else value


@overload
def median_error(n: int) -> float: ...
@overload
def median_error(n: Sizes) -> Floats: ...
def median_error(n: int | Sizes) -> float | Floats:
    """Return the standard deviation of the median of `n` independent standard normal values.

    For even `n` the median is the mean of the two middle values. `n` is at least 1, else as for `d2`.
    """
    return _by_size(_median_error, n, smallest=1)


def degrees_of_freedom(relative_variance: float) -> float:
    """Return the degrees of freedom of a standard deviation with the same relative variance.

    Patnaik's (1950) way: an unbiased estimate of sigma with variance `relative_variance` * sigma**2 is
    treated as a scaled chi variable, whose relative variance is 1 / c4(v + 1)**2 - 1. The value need not
    be whole.
    """
    degrees = 0.5 / relative_variance
    for _ in range(60):
        now = 1.0 / c4(degrees + 1.0) ** 2 - 1.0
        # The relative variance is nearly proportional to 1 / v, so this converges in a few rounds.
        ratio = now / relative_variance
        degrees *= ratio
        if abs(ratio - 1.0) < 1e-12:
            break
    return degrees


def _by_size(function: Callable[[int], float], n: int | Sizes, *, smallest: int) -> float | Floats:
    """Evaluate a cached function of one size once for each distinct size."""
    if isinstance(n, int):
        _check_sizes(np.array([n]), smallest)
        return function(n)
    sizes = np.asarray(n)
    if sizes.size == 0:
        return np.empty(sizes.shape)
    _check_sizes(sizes, smallest)
    if sizes.min() == sizes.max():
        return np.full(sizes.shape, function(int(sizes.flat[0])))
    distinct, place = np.unique(sizes, return_inverse=True)
    return np.array([function(int(size)) for size in distinct])[place]


def _check_sizes(sizes: npt.NDArray[np.number[Any]], smallest: int) -> None:
    if not ((sizes >= smallest) & (sizes == np.floor(sizes))).all():
        raise ValueError(f"a size must be a whole number of at least {smallest}")


@cache
def _legendre(nodes: int) -> tuple[Floats, Floats]:
    """Gauss-Legendre nodes and weights on [0, 1]."""
    place, weight = np.polynomial.legendre.leggauss(nodes)
    return (place + 1.0) / 2.0, weight / 2.0


@cache
def _range_moments(n: int) -> tuple[float, float]:
    """Mean and standard deviation of the range, from its distribution function.

    P(R <= w) = n * integral of phi(x) * (Phi(x + w) - Phi(x))**(n - 1) dx. The inner integral runs over the
    whole line, where the trapezoidal rule converges exponentially; the outer ones, of 1 - P and 2 w (1 - P),
    run over a half-line and use Gauss-Legendre nodes.
    """
    top = 2.0 * math.sqrt(2.0 * math.log(n)) + 11.0
    place, weight = _legendre(160)
    width = top * place
    step = 0.03
    x = np.arange(-10.0, 10.0 + step, step)
    density = np.exp(-0.5 * x * x) / math.sqrt(2.0 * math.pi)
    # Phi(x + w) - Phi(x) in the tail where both are small, so that no digits cancel.
    inside = ndtr(-x)[np.newaxis, :] - ndtr(-(x[np.newaxis, :] + width[:, np.newaxis]))
    below = n * step * (inside ** (n - 1) @ density)
    above = 1.0 - below
    mean = top * float(weight @ above)
    square = top * float(weight @ (2.0 * width * above))
    return mean, math.sqrt(square - mean * mean)


@cache
def _median_error(n: int) -> float:
    """Integrate the density of the median, normalised numerically, for its standard deviation."""
    if n <= 2:
        return 1.0 / math.sqrt(n)
    place, weight = _legendre(120)
    reach = _reach(n)
    middle = reach * place
    if n % 2:
        density = np.exp(_log_density(middle) + (n // 2) * np.log(4.0 * ndtr(middle) * ndtr(-middle)))
    else:
        # Half the distance between the two middle values; both densities are cut where they fall below 1e-25.
        half = reach * place[:, np.newaxis]
        logs = (
            _log_density(middle - half)
            + _log_density(middle + half)
            + (n // 2 - 1) * np.log(4.0 * ndtr(middle - half) * ndtr(-middle - half))
        )
        density = weight @ np.exp(logs)
    return reach * math.sqrt(float(weight @ (place * place * density)) / float(weight @ density))


def _log_density(x: Floats) -> Floats:
    return -0.5 * x * x


def _reach(n: int) -> float:
    """Where the density of the median of n values has fallen below 1e-25 of its peak."""
    reach = 11.0
    while reach > 1e-6:
        smaller = reach * 0.9
        fall = -0.5 * smaller**2 + ((n - 1) // 2) * math.log(4.0 * ndtr(smaller) * ndtr(-smaller))
        if fall > -58.0:
            break
        reach = smaller
    return reach
