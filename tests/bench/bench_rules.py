"""How long all eight rules take over a million points: `python tests/bench/bench_rules.py`.

Ratios to one plain pass over the points (counting those beyond 2 sigma), best of five.
"""

from __future__ import annotations

import sys
import time
from collections.abc import Callable

import numpy as np

from holdsteady.spc.rules import RULES, find

POINTS = 1_000_000


def best_of(repeats: int, work: Callable[[], object]) -> float:
    """Seconds of the quickest of several runs."""
    seconds = []
    for _ in range(repeats):
        start = time.perf_counter()
        work()
        seconds.append(time.perf_counter() - start)
    return min(seconds)


def main() -> None:
    """Print a line for each rule and one for all."""
    rng = np.random.default_rng(1)
    z = rng.normal(size=POINTS)
    one, limit = np.ones(POINTS), np.full(POINTS, 3.0)
    plain = best_of(5, lambda: np.count_nonzero(z > 2.0))
    sys.stdout.write(f"{'one pass':20s}{plain * 1e3:8.2f} ms\n")
    for length in (POINTS, 5000):
        segment = np.arange(POINTS, dtype=np.int64) // length
        total = 0.0
        sys.stdout.write(f"segments of {length} points\n")
        for rule in RULES.values():
            seconds = best_of(
                5,
                lambda rule=rule, segment=segment: find(  # type: ignore[misc]
                    rule, value=z, z=z, lower=-limit, upper=limit, sigma=one, segment=segment
                ),
            )
            total += seconds
            sys.stdout.write(f"  {rule.name:18s}{seconds * 1e3:8.2f} ms {seconds / plain:6.1f}\n")
        sys.stdout.write(f"  {'all eight':18s}{total * 1e3:8.2f} ms {total / plain:6.1f}\n")


if __name__ == "__main__":
    main()
