"""What intake hands on: the readings of each characteristic, and an account of every row.

Times are microseconds since 1970-01-01 UTC. Files are paths below the project folder, with "/".
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Final, Literal

from holdsteady.arrays import Floats, Ints, Sides
from holdsteady.problems import Problem

MOST_NAMES: Final = 100  # of a header


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
    side: (R, k) -1 where the value is a limit that the reading is known to lie below (`<0.05`), 1 where
        above, 0 elsewhere; None where nothing is censored. Only with `censored = "at-limit"`.
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
    side: Sides | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class ExampleCell:
    """A cell as it is written, and what it was read as; `role` says what its column is asked for."""

    column: str
    text: str
    role: Literal["time", "number", "label"]
    time: int | None = None
    number: float | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Example:
    """The first row of a file that could be used: the cells that are asked for, in the file's order."""

    line: int
    cells: tuple[ExampleCell, ...]


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
    header: tuple[str, ...] = ()  # the names as read, at most `MOST_NAMES`
    columns: int = 0  # how many there are
    example: Example | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class SetAside:
    """A row, a cell or a whole file (`line` None) that could not be used."""

    file: str
    line: int | None
    column: str
    reason: str
    text: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Correction:
    """A row that another one with the same key, in a newer file or further down, replaces."""

    file: str
    line: int
    by_file: str
    by_line: int


@dataclass(frozen=True, slots=True, kw_only=True)
class Intake:
    """Everything read in one build.

    `readings` maps a characteristic's id to its members, sorted by name; an id whose data were
    not found maps to an empty tuple. `censored` and `implausible` count, by characteristic id, the cells
    that were set aside for it. `corrections` lists corrected rows, of each source the first 1,000 by file
    and line.
    """

    readings: Mapping[str, tuple[Readings, ...]]
    files: tuple[FileAccount, ...]
    set_aside: tuple[SetAside, ...]
    problems: tuple[Problem, ...]
    censored: Mapping[str, int]
    implausible: Mapping[str, int] = field(default_factory=dict)
    corrections: tuple[Correction, ...] = ()
