"""Moments as microseconds since 1970-01-01 UTC, and what a clock on the wall showed then."""

from __future__ import annotations

import datetime as dt
from zoneinfo import ZoneInfo

import numpy as np
import numpy.typing as npt

from holdsteady.arrays import Ints

SECOND = 1_000_000
HOUR = 3_600 * SECOND
DAY = 24 * HOUR
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
    starts = np.array([_offset(int(day) * DAY, zone) for day in days])
    ends = np.array([_offset((int(day) + 1) * DAY, zone) for day in days])
    # A day is constant when the offset is the same at both its ends; the others are looked at closely.
    result = starts[day_of]
    for index in np.flatnonzero((starts != ends)[day_of]):
        result[index] = _offset(int(buckets[index]) * _QUARTER_HOUR, zone)
    return result[inverse.reshape(-1)]


def wall(microseconds: Ints, zone: ZoneInfo) -> Ints:
    """Return what the plant's clock showed, as microseconds counted as if it were UTC, (N,)."""
    return microseconds + offsets(microseconds, zone)


def iso(microseconds: Ints, zone: ZoneInfo) -> list[str]:
    """Return ISO 8601 texts with offset; with a fraction only where one of the moments has one."""
    local, suffixes, suffix_of = iso_parts(microseconds, zone)
    texts = np.datetime_as_string(local).tolist()
    return [text + suffixes[code] for text, code in zip(texts, suffix_of.tolist(), strict=True)]


def iso_parts(microseconds: Ints, zone: ZoneInfo) -> tuple[npt.NDArray[np.datetime64], list[str], Ints]:
    """Return what ISO 8601 texts are put together from, for those who write many at once.

    Local moments (N,), to the second where none has a fraction; the distinct offsets, as in '+01:00'; and
    which of these each moment has (N,).
    """
    distinct, code = np.unique(offsets(microseconds, zone), return_inverse=True)
    code = code.reshape(-1)
    unit = "us" if np.any(microseconds % SECOND) else "s"
    local = (microseconds + distinct[code]).astype("datetime64[us]").astype(f"datetime64[{unit}]")
    return local, [_suffix(int(shift)) for shift in distinct], code


def _offset(microseconds: int, zone: ZoneInfo) -> int:
    delta = to_datetime(microseconds, zone).utcoffset()
    assert delta is not None
    return delta // dt.timedelta(microseconds=1)


def _suffix(shift: int) -> str:
    minutes = abs(shift) // (60 * SECOND)
    return f"{'-' if shift < 0 else '+'}{minutes // 60:02d}:{minutes % 60:02d}"
