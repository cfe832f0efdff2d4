"""Where a static picture's horizontal axis is labelled, and with what."""

from __future__ import annotations

import datetime as dt
from typing import Final

from holdsteady.times import DAY, SECOND

_MONTHS: Final = ("Jan", "Feb", "Mar", "Apr", "May", "Jun", "Jul", "Aug", "Sep", "Oct", "Nov", "Dec")
_MINUTE: Final = 60 * SECOND
_HOUR: Final = 60 * _MINUTE
_STEPS: Final = (
    *(n * SECOND for n in (1, 5, 15)),
    *(n * _MINUTE for n in (1, 5, 15)),
    *(n * _HOUR for n in (1, 3, 6, 12)),
    *(n * DAY for n in (1, 2, 7, 14)),
)
_MONTH_STEPS: Final = (1, 2, 3, 6, 12, 24, 60, 120)
_MONDAY: Final = 4 * DAY  # 1970-01-05, from which weeks are counted
_EPOCH: Final = dt.datetime(1970, 1, 1)  # noqa: DTZ001  the wall clock's own, without a zone


def order_ticks(count: int, most: int) -> list[tuple[float, str]]:
    """Return at most so many round orders from 1 to `count`, with their texts."""
    step = next(s * 10**power for power in range(12) for s in (1, 2, 5) if count / (s * 10**power) <= most)
    orders = list(range(step, count + 1, step)) or [count]
    return [(float(n), str(n)) for n in orders]


def time_ticks(first: int, last: int, most: int) -> list[tuple[float, str]]:
    """Return about so many moments of the wall clock in [first, last] (microseconds), with their texts."""
    if last <= first:
        return [(float(first), _said(first, DAY))]
    step = next((s for s in _STEPS if (last - first) / s <= most), None)
    if step is None:
        return _month_ticks(first, last, most)
    origin = _MONDAY if step >= 7 * DAY else 0
    start = origin - (origin - first) // step * step
    return [
        (float(moment), _said(moment, step)) for moment in range(start, last + 1, step) if moment >= first
    ]


def _month_ticks(first: int, last: int, most: int) -> list[tuple[float, str]]:
    begin, end = _at(first), _at(last)
    months = (end.year - begin.year) * 12 + end.month - begin.month + 1
    step = next((s for s in _MONTH_STEPS if months / s <= most), 240)
    counted = range((begin.year * 12 + begin.month - 1) // step * step, end.year * 12 + end.month, step)
    starts = [dt.datetime(n // 12, n % 12 + 1, 1) for n in counted]  # noqa: DTZ001
    ticks = [((at - _EPOCH) // dt.timedelta(microseconds=1), at) for at in starts]
    return [
        (float(m), str(at.year) if at.month == 1 else _MONTHS[at.month - 1])
        for m, at in ticks
        if first <= m <= last
    ]


def _said(moment: int, step: int) -> str:
    at = _at(moment)
    if step >= DAY or (at.hour, at.minute, at.second) == (0, 0, 0):
        return f"{at.day} {_MONTHS[at.month - 1]}"
    return f"{at:%H:%M:%S}" if step < _MINUTE else f"{at:%H:%M}"


def _at(moment: int) -> dt.datetime:
    return _EPOCH + dt.timedelta(microseconds=moment)
