"""What intake hands on: the readings of each characteristic, and an account of every row.

Times are microseconds since 1970-01-01 UTC. Files are paths below the project folder, with "/".
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from holdsteady.arrays import Floats, Ints
from holdsteady.problems import Problem


@dataclass(frozen=True, slots=True, kw_only=True)
class Readings:
    """All usable readings of one characteristic (one member of `each`), in order.

    Order is time, then file path, then line. R readings, k values in each.

    Attributes
    ----------
    family: the id in the settings, `bore`.
    name: the id of this member, `bore[press=2]`; equals `family` without `each`.
    each: column -> value of this member, in the order of the settings.
    time: (R,) microseconds UTC, or None where the source has no time column.
    values: (R, k) float64; one column for `value` and `count`, k for `values`. NaN only for an
        empty cell among several `values`; a row whose cells are all empty is no reading.
    size: (R,) float64 for `count` with `size`, else None.
    subgroup: (R,) the text of the `subgroup.column` cell, else None (object array of str).
    file: (R,) index into `files`.
    files: the paths, sorted.
    line: (R,) physical line, from 1, on which the row begins.
    """

    family: str
    name: str
    each: Mapping[str, str]
    time: Ints | None
    values: Floats
    size: Floats | None
    subgroup: tuple[str, ...] | None
    file: Ints
    files: tuple[str, ...]
    line: Ints


@dataclass(frozen=True, slots=True, kw_only=True)
class FileAccount:
    """One file: what was detected and what became of its rows; the five outcomes add up to `rows`."""

    file: str
    source: str
    bytes: int
    rows: int
    used: int
    filtered: int
    repeated: int
    corrected: int
    set_aside: int
    encoding: str
    delimiter: str  # the character, or "tab"; "" where nothing was read
    decimal: str
    time_format: str
    first_time: int | None
    last_time: int | None


@dataclass(frozen=True, slots=True, kw_only=True)
class SetAside:
    """A row, a cell or a whole file (`line` None) that could not be used."""

    file: str
    line: int | None
    column: str
    reason: str
    text: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Intake:
    """Everything read in one build.

    `readings` maps a characteristic's id to its members, sorted by name; an id whose data were
    not found maps to an empty tuple. `censored` and `implausible` count cells by characteristic id.
    """

    readings: Mapping[str, tuple[Readings, ...]]
    files: tuple[FileAccount, ...]
    set_aside: tuple[SetAside, ...]
    problems: tuple[Problem, ...]
    censored: Mapping[str, int]
