"""Text to moments: which formats are known, and a strict vectorised reading of them.

Every digit, separator and day of the calendar is checked, so that the 31st of February is refused
instead of becoming the 3rd of March. One reading serves clean and damaged files alike.
"""

from __future__ import annotations

import functools
import re
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from enum import IntEnum

import numpy as np
import numpy.typing as npt
import pyarrow as pa
import pyarrow.compute as pc

from holdsteady.arrays import Bools, Ints
from holdsteady.intake.columns import bytes_of
from holdsteady.times import DAY, SECOND

Part = Callable[[str], Ints]
NO_TIME = np.iinfo(np.int64).min
_LONGEST = 48
_MOST_SHAPES = 64
_ZERO = 48


class Family(IntEnum):
    """Formats of time that may not be mixed within a file; variants of ISO 8601 are one."""

    NONE = 0
    ISO = 1
    DOTTED = 2
    DOTTED_SHORT = 3
    SLASHED = 4
    SLASHED_SHORT = 5
    DASHED = 6
    SECONDS = 7
    MILLISECONDS = 8
    GIVEN = 9


AMBIGUOUS = (Family.SLASHED, Family.SLASHED_SHORT, Family.DASHED)
_LABELS = {
    Family.NONE: "",
    Family.ISO: "ISO 8601",
    Family.DOTTED: "day.month.year",
    Family.DOTTED_SHORT: "day.month.year, two digits",
    Family.SECONDS: "seconds since 1970",
    Family.MILLISECONDS: "milliseconds since 1970",
}


def label(family: Family, *, day_first: bool | None) -> str:
    """Return the words for a format."""
    if family not in AMBIGUOUS:
        return _LABELS[family]
    mark = "-" if family is Family.DASHED else "/"
    order = {True: f"day{mark}month", False: f"month{mark}day", None: f"day{mark}month or month{mark}day"}
    return f"{order[day_first]}{mark}year" + (", two digits" if family is Family.SLASHED_SHORT else "")


@dataclass(frozen=True, slots=True, kw_only=True)
class Stamps:
    """Cells read as moments, each (N,), before the source has shown which way round its days are.

    `first` is in microseconds: UTC where `zoned`, else what the clock on the wall showed; for `a/b/yyyy`
    it takes a as the day and `second` takes b as the day. `NO_TIME` where a reading is impossible.
    """

    first: Ints
    second: Ints
    zoned: Bools
    family: npt.NDArray[np.uint8]

    def main_family(self) -> Family:
        """Return the format that most cells have."""
        counts = np.bincount(self.family, minlength=len(Family))
        counts[Family.NONE] = 0
        return Family(int(np.argmax(counts))) if counts.any() else Family.NONE

    def proof(self) -> tuple[bool, bool]:
        """Whether a part above 12 proves that days come first, and whether one proves that months do."""
        if self.main_family() not in AMBIGUOUS:
            return False, False
        unsure = np.isin(self.family, AMBIGUOUS)
        day_only = unsure & (self.second == NO_TIME) & (self.first != NO_TIME)
        month_only = unsure & (self.first == NO_TIME) & (self.second != NO_TIME)
        return bool(day_only.any()), bool(month_only.any())

    def resolved(self, family: Family, *, day_first: bool | None) -> Ints:
        """Return the microseconds of the cells in the file's format, `NO_TIME` for the others."""
        chosen = self.first
        if family in AMBIGUOUS:
            if day_first is None:
                return np.full(self.first.size, NO_TIME)
            chosen = self.first if day_first else self.second
        return np.where(self.family == family, chosen, NO_TIME)


def parse(cells: pa.StringArray, given: str | None = None) -> Stamps:
    """Read text cells as moments; `given` is the format the settings prescribe, in `strptime` codes."""
    if given is not None:
        return _parse_given(cells, given)
    count = len(cells)
    stamps = Stamps(
        first=np.full(count, NO_TIME),
        second=np.full(count, NO_TIME),
        zoned=np.zeros(count, dtype=np.bool_),
        family=np.zeros(count, dtype=np.uint8),
    )
    starts, data = bytes_of(cells)
    lengths = np.diff(starts)
    for length in np.unique(lengths).tolist():
        if 0 < length <= _LONGEST:
            rows = np.flatnonzero(lengths == length)
            if rows.size == count:
                matrix = data[starts[0] : starts[-1]].reshape(count, length)
            else:
                matrix = data[starts[rows][:, None] + np.arange(length)]
            _parse_width(matrix, rows, stamps)
    return stamps


def together(parts: Sequence[Stamps]) -> Stamps:
    """Return the stamps of all parts, one after the other."""
    empty = np.zeros(0, dtype=np.int64)
    return Stamps(
        first=np.concatenate([empty, *(part.first for part in parts)]),
        second=np.concatenate([empty, *(part.second for part in parts)]),
        zoned=np.concatenate([empty.astype(np.bool_), *(part.zoned for part in parts)]),
        family=np.concatenate([empty.astype(np.uint8), *(part.family for part in parts)]),
    )


def one_column(columns: Sequence[pa.StringArray]) -> pa.StringArray:
    """Return date and clock as one text, "" where either is empty; a single column is as it was.

    A date that carries the midnight of its own, as spreadsheets write it, is taken without.
    """
    if len(columns) == 1:
        return columns[0]
    date, clock = (pc.utf8_trim_whitespace(column) for column in columns)
    date = pc.replace_substring_regex(date, r"[ T]0?0:00(?::00(?:[.,]0+)?)?$", "")
    both = pc.and_(pc.not_equal(date, ""), pc.not_equal(clock, ""))
    return pc.if_else(both, pc.binary_join_element_wise(date, clock, " "), "")


def _parse_width(matrix: npt.NDArray[np.uint8], rows: Ints, stamps: Stamps) -> None:
    digit = (matrix - _ZERO) < 10  # uint8 wraps, so that bytes below "0" are large
    shapes = np.where(digit, np.uint8(_ZERO), matrix)
    left = np.arange(rows.size)
    for _ in range(_MOST_SHAPES):
        if left.size == 0:
            return
        pattern = shapes[left[0]]
        same = (shapes[left] == pattern).all(axis=1)
        now, left = left[same], left[~same]
        shape = pattern.tobytes().decode("ascii", "replace")
        _parse_shape(shape, matrix if now.size == rows.size else matrix[now], rows[now], stamps)


_CLOCK = (
    r"(?P<hour>0{1,2}):(?P<minute>00)(?::(?P<second>00)(?:[.,](?P<fraction>0{1,9}))?)?"
    r"(?:\ ?(?P<half>[AaPp])\.?[Mm]\.?)?"
)
_ZONE = r"(?:\ ?(?P<zone>[Zz]|(?P<sign>[+-])(?P<zone_hour>00)(?::?(?P<zone_minute>00))?))?"
_YEAR_FIRST = (
    r"(?P<year>0000)(?P<mark>[-/.])(?P<month>0{1,2})(?P=mark)(?P<day>0{1,2})"
    rf"(?:(?:[Tt]|\ +)(?:{_CLOCK}|(?P<only_hour>00)){_ZONE})?"
)
_COMPACT = (
    r"(?P<year>0000)(?P<month>00)(?P<day>00)"
    rf"(?:[Tt]?(?P<hour>00)(?P<minute>00)(?:(?P<second>00)(?:[.,](?P<fraction>0{{1,9}}))?)?{_ZONE})?"
)
_YEAR_LAST = (
    r"(?P<day>0{1,2})(?P<mark>[./-])(?P<month>0{1,2})(?P=mark)(?P<year>0000|00)"
    rf"(?:(?:[Tt]|,?\ +){_CLOCK}{_ZONE})?"
)
_FORMS = tuple(re.compile(form, re.VERBOSE) for form in (_YEAR_FIRST, _COMPACT, _YEAR_LAST))


def _parse_shape(shape: str, matrix: npt.NDArray[np.uint8], rows: Ints, stamps: Stamps) -> None:
    bare = shape.strip(" ")
    shift = len(shape) - len(shape.lstrip(" "))
    if bare in ("0" * 10, "0" * 13):
        seconds = len(bare) == 10
        stamps.first[rows] = _number(matrix, shift, shift + len(bare)) * (SECOND if seconds else 1_000)
        stamps.zoned[rows] = True
        stamps.family[rows] = Family.SECONDS if seconds else Family.MILLISECONDS
        return
    for form in _FORMS:
        match = form.fullmatch(bare)
        if match is not None:
            _fill(match, matrix[:, shift:], rows, stamps)
            return


def _fill(match: re.Match[str], matrix: npt.NDArray[np.uint8], rows: Ints, stamps: Stamps) -> None:
    def part(name: str) -> Ints:
        start, end = match.span(name) if name in match.re.groupindex else (-1, -1)
        return np.zeros(rows.size, dtype=np.int64) if start < 0 else _number(matrix, start, end)

    family = _family(match)
    year = part("year")
    if match.end("year") - match.start("year") == 2:
        year = year + np.where(year >= 69, 1900, 2000)
    clock = _clock(match, matrix, part)
    zone = _zone(match, matrix, part)
    first = _moment(year, part("month"), part("day"), clock)
    second = _moment(year, part("day"), part("month"), clock) if family in AMBIGUOUS else first
    stamps.first[rows] = np.where(first == NO_TIME, NO_TIME, first - zone)
    stamps.second[rows] = np.where(second == NO_TIME, NO_TIME, second - zone)
    stamps.zoned[rows] = "zone" in match.re.groupindex and match["zone"] is not None
    stamps.family[rows] = np.where((first == NO_TIME) & (second == NO_TIME), Family.NONE, family)


def _family(match: re.Match[str]) -> Family:
    if match.start("year") == 0:
        return Family.ISO
    short = match.end("year") - match.start("year") == 2
    families = {
        ".": (Family.DOTTED, Family.DOTTED_SHORT),
        "/": (Family.SLASHED, Family.SLASHED_SHORT),
        "-": (Family.DASHED, Family.NONE),
    }
    return families[match["mark"]][short]


def _number(matrix: npt.NDArray[np.uint8], start: int, end: int) -> Ints:
    result = np.zeros(matrix.shape[0], dtype=np.int64)
    for column in range(start, end):
        result *= 10
        result += matrix[:, column] - np.uint8(_ZERO)
    return result


def _clock(match: re.Match[str], matrix: npt.NDArray[np.uint8], part: Part) -> Ints:
    hour, minute, second = part("hour") + part("only_hour"), part("minute"), part("second")
    fine = (minute < 60) & (second < 60)
    if "half" in match.re.groupindex and match["half"] is not None:
        fine &= (hour >= 1) & (hour <= 12)
        afternoon = (matrix[:, match.start("half")] | 32) == ord("p")
        hour = hour % 12 + np.where(afternoon, 12, 0)
    fine &= hour < 24
    fraction = part("fraction")
    if "fraction" in match.re.groupindex and match["fraction"] is not None:
        digits = len(match["fraction"])
        fraction = fraction * 10 ** (6 - digits) if digits <= 6 else fraction // 10 ** (digits - 6)
    micros = ((hour * 60 + minute) * 60 + second) * SECOND + fraction
    return np.where(fine, micros, NO_TIME)


def _zone(match: re.Match[str], matrix: npt.NDArray[np.uint8], part: Part) -> Ints:
    if "sign" not in match.re.groupindex or match["sign"] is None:
        return np.zeros(matrix.shape[0], dtype=np.int64)
    shift = (part("zone_hour") * 60 + part("zone_minute")) * 60 * SECOND
    return np.where(matrix[:, match.start("sign")] == ord("-"), -shift, shift)


@functools.cache
def _month_starts() -> Ints:
    months = np.arange(0, 10_000 * 12 + 1) - 1970 * 12
    return months.astype("datetime64[M]").astype("datetime64[D]").astype(np.int64)


def _moment(year: Ints, month: Ints, day: Ints, clock: Ints) -> Ints:
    starts = _month_starts()
    index = year * 12 + np.clip(month, 1, 12) - 1
    length = starts[index + 1] - starts[index]
    fine = (month >= 1) & (month <= 12) & (day >= 1) & (day <= length) & (clock != NO_TIME) & (year >= 1)
    return np.where(fine, (starts[index] + day - 1) * DAY + np.where(fine, clock, 0), NO_TIME)


def _parse_given(cells: pa.StringArray, given: str) -> Stamps:
    import pandas as pd  # noqa: PLC0415  only formats of the user's own need it

    trimmed = pc.utf8_trim_whitespace(cells)
    encoded = trimmed.dictionary_encode()
    texts = pd.Series(encoded.dictionary.to_pylist(), dtype=object)
    zoned = "%z" in given
    moments = pd.to_datetime(texts, format=given, errors="coerce", utc=True, exact=True)
    naive = moments.dt.tz_localize(None).to_numpy().astype("datetime64[us]")
    micros = np.where(np.isnat(naive), NO_TIME, naive.astype(np.int64))
    first = micros[np.from_dlpack(encoded.indices)] if len(cells) else np.zeros(0, dtype=np.int64)
    return Stamps(
        first=first,
        second=first,
        zoned=np.full(first.size, zoned),
        family=np.where(first == NO_TIME, Family.NONE, Family.GIVEN).astype(np.uint8),
    )
