"""Moments as microseconds since 1970-01-01 UTC, and what a clock on the wall showed then."""

from __future__ import annotations

import datetime as dt
from zoneinfo import ZoneInfo

import numpy as np
import numpy.typing as npt

from holdsteady.arrays import Ints

SECOND = 1_000_000
DAY = 86_400 * SECOND
_EPOCH = dt.datetime(1970, 1, 1, tzinfo=dt.UTC)
_QUARTER_HOUR = 900 * SECOND  # no zone changes its offset within one


def to_microseconds(moment: dt.datetime | dt.date, zone: ZoneInfo) -> int:
    """Microseconds UTC of a moment; one without a zone is local, a bare date is its first instant."""
    if not isinstance(moment, dt.datetime):
        moment = dt.datetime(moment.year, moment.month, moment.day)  # noqa: DTZ001  local, set below
    if moment.tzinfo is None:
        moment = moment.replace(tzinfo=zone)
    return (moment.astimezone(dt.UTC) - _EPOCH) // dt.timedelta(microseconds=1)


def to_datetime(microseconds: int, zone: ZoneInfo) -> dt.datetime:
    """Return the moment as an aware datetime in a zone."""
    return (_EPOCH + dt.timedelta(microseconds=microseconds)).astimezone(zone)


def offsets(microseconds: Ints, zone: ZoneInfo) -> Ints:
    """Return the zone's offset from UTC at each moment, in microseconds, (N,)."""
    buckets, inverse = np.unique(microseconds // _QUARTER_HOUR, return_inverse=True)
    if buckets.size == 0:
        return np.zeros(0, dtype=np.int64)
    days, day_of = np.unique(buckets // 96, return_inverse=True)
    edges = np.array([_offset(int(day) * DAY, zone) for day in np.append(days, days[-1] + 1)])
    # A day is constant when the offset is the same at both its ends; the others are looked at closely.
    ends = np.array([_offset((int(day) + 1) * DAY, zone) for day in days])
    result = edges[:-1][day_of]
    for index in np.flatnonzero((edges[:-1] != ends)[day_of]):
        result[index] = _offset(int(buckets[index]) * _QUARTER_HOUR, zone)
    return result[inverse.reshape(-1)]


def wall(microseconds: Ints, zone: ZoneInfo) -> Ints:
    """Return what the plant's clock showed, as microseconds counted as if it were UTC, (N,)."""
    return microseconds + offsets(microseconds, zone)


def iso(microseconds: Ints, zone: ZoneInfo) -> list[str]:
    """Return ISO 8601 texts with offset; with a fraction only where one of the moments has one."""
    shift = offsets(microseconds, zone)
    local: npt.NDArray[np.datetime64] = (microseconds + shift).astype("datetime64[us]")
    whole = not np.any(microseconds % SECOND)
    texts = np.datetime_as_string(local, unit="s" if whole else "us").tolist()
    suffix = {int(s): _suffix(int(s)) for s in np.unique(shift)}
    return [text + suffix[s] for text, s in zip(texts, shift.tolist(), strict=True)]


def _offset(microseconds: int, zone: ZoneInfo) -> int:
    delta = to_datetime(microseconds, zone).utcoffset()
    assert delta is not None
    return delta // dt.timedelta(microseconds=1)


def _suffix(shift: int) -> str:
    minutes = abs(shift) // (60 * SECOND)
    return f"{'-' if shift < 0 else '+'}{minutes // 60:02d}:{minutes % 60:02d}"
