"""The size that the values of a column are known to have, from what the settings say about them."""

from __future__ import annotations

import statistics

from holdsteady.intake.demand import Demand
from holdsteady.project.settings import Characteristic


def scale_of(column: str, demand: Demand) -> float | None:
    """Return the middle size of all bounds, targets and centres that belong to a column; None without any."""
    known = [
        abs(value)
        for ask in demand.asks
        if column in ask.values
        for value in _said_of(ask.characteristic)
        if value
    ]
    return statistics.median(known) if known else None


def _said_of(one: Characteristic) -> list[float | None]:
    said: list[float | None] = [limits.centre for limits in one.limits]
    for wanted in one.specification:
        said += [wanted.lower, wanted.target, wanted.upper]
    if one.plausible is not None:
        said += [one.plausible.lower, one.plausible.upper]
    return said
