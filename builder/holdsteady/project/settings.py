"""The settings of a project as typed, frozen values; what each key means stands beside it."""

from __future__ import annotations

import datetime as dt
import math
from typing import Annotated, Any, Literal

from pydantic import BaseModel, BeforeValidator, ConfigDict, Field

from holdsteady.project.durations import Duration

ChartName = Literal[
    "individuals",
    "mean-range",
    "mean-sd",
    "median-range",
    "p",
    "np",
    "c",
    "u",
]
RuleName = Literal[
    "outside-limits",
    "two-of-three",
    "four-of-five",
    "run-one-side",
    "trend",
    "alternating",
    "hugging",
    "avoiding-centre",
]
EstimatorName = Literal[
    "mean-range",
    "mean-s",
    "pooled",
    "weighted",
    "mean-moving-range",
    "median-moving-range",
]

# What a union of types allows is said once, in words; else each of its types would report a fault of its own.


def _is_moment(value: object) -> object:
    if isinstance(value, dt.date):  # a date with a time is one too
        if not 1900 <= value.year <= 9998:  # the ends of the calendar have no moment in every zone
            raise ValueError("must lie between the years 1900 and 9998")
        return value
    raise ValueError("must be a date, or a date and time, without quotes, as in 2026-03-01T06:00:00")


def _is_column_or_size(value: object) -> object:
    if isinstance(value, bool) or value == "":
        raise ValueError("must be the name of a column, or a number")
    if isinstance(value, str) or (isinstance(value, int | float) and math.isfinite(value)):
        return value
    raise ValueError("must be the name of a column, or a number")


def _is_time(value: object) -> object:
    if value is None:
        return value
    columns = value if isinstance(value, tuple | list) else (value,)
    if not 1 <= len(columns) <= 2 or any(not isinstance(one, str) or not one for one in columns):
        raise ValueError('must be the name of a column, or two as in ["date", "clock"]')
    if len(set(columns)) < len(columns):
        raise ValueError("names one column twice")
    return columns[0] if len(columns) == 1 else tuple(columns)


def _is_encoding(value: object) -> object:
    try:
        known = value is None or (isinstance(value, str) and "0".encode(value) != b"")
    except (LookupError, ValueError):  # no such name, or one that turns bytes into bytes
        known = False
    if not known:
        raise ValueError("must be an encoding of text, as in 'utf-8', 'cp1252' or 'utf-16-le'")
    return value


def _is_cell(value: object) -> object:
    # Truth values are numbers to the language.
    if isinstance(value, str) or (isinstance(value, int | float) and math.isfinite(value)):
        return value
    raise ValueError("must be text, a number, true or false")


Moment = Annotated[dt.datetime | dt.date, BeforeValidator(_is_moment)]
ColumnOrSize = Annotated[str | float, BeforeValidator(_is_column_or_size)]
Cell = Annotated[str | int | float | bool, BeforeValidator(_is_cell)]
Identifier = Annotated[str, Field(pattern=r"^[A-Za-z0-9_-]+$")]
Column = Annotated[str, Field(min_length=1)]


class Model(BaseModel):
    """Unknown keys are refused, values are frozen."""

    model_config = ConfigDict(extra="forbid", frozen=True, populate_by_name=True, allow_inf_nan=False)


class Site(Model):
    """`[site]`: what the whole publication shares."""

    title: str = "holdsteady"
    output: str = "site"
    timezone: str = "UTC"
    watch_from: Moment | None = None
    attention: Duration = Duration("14d")
    as_of: Moment | None = None
    points: Literal["all", "recent"] = "all"
    language: Literal["en"] = "en"
    footer: str | None = None


class Source(Model):
    """`[[source]]`: a set of files read the same way; what is None is detected per file."""

    id: Identifier
    files: tuple[str, ...] = Field(min_length=1)
    time: Annotated[Column | tuple[Column, Column] | None, BeforeValidator(_is_time)] = None
    delimiter: str | None = None
    decimal: Literal[".", ","] | None = None
    encoding: Annotated[str | None, BeforeValidator(_is_encoding)] = None
    time_format: str | None = None
    missing: tuple[str, ...] = ()
    key: tuple[Column, ...] = ()
    newest: Literal["path", "modified"] = "path"


class Baseline(Model):
    """Which points the limits are estimated from: the era's first `points`, or those timed in [from, to)."""

    points: int = Field(default=25, ge=8)
    from_: Moment | None = Field(default=None, alias="from")
    to: Moment | None = None


class Specification(Model):
    """What is wanted of single pieces, from a day on."""

    lower: float | None = None
    target: float | None = None
    upper: float | None = None
    from_: Moment | None = Field(default=None, alias="from")


class GivenLimits(Model):
    """Centre and sigma of a single reading, set by the user instead of estimated."""

    centre: float
    sigma: float | None = Field(default=None, gt=0)
    from_: Moment | None = Field(default=None, alias="from")


class RuleSetting(Model):
    """One rule with its own counts: `points` needed, out of the last `of` for the zone rules."""

    rule: RuleName
    points: int | None = Field(default=None, ge=1)
    of: int | None = Field(default=None, ge=1)


class Subgroup(Model):
    """How readings are gathered: equal values of a column, a count of rows, or a span of clock time."""

    column: Column | None = None
    size: int | None = Field(default=None, ge=2)
    every: Duration | None = None


class Plausible(Model):
    """Values outside these bounds are set aside."""

    lower: float | None = None
    upper: float | None = None


class Characteristic(Model):
    """`[[characteristic]]`: one measured property, and how it is watched."""

    id: Identifier
    title: str = ""
    area: str = ""
    source: str
    value: Column | None = None
    values: tuple[Column, ...] | None = None
    count: Column | None = None
    size: ColumnOrSize | None = None
    where: dict[str, Cell] = Field(default_factory=dict)
    each: tuple[Column, ...] = ()
    subgroup: Subgroup | None = None
    chart: ChartName | None = None  # None: what the data suggest
    chart_options: dict[str, Any] = Field(default_factory=dict)
    unit: str = ""
    decimals: int | None = Field(default=None, ge=0, le=12)
    specification: tuple[Specification, ...] = ()  # sorted by `from`; the first may have none
    plausible: Plausible | None = None
    baseline: Baseline = Baseline()
    limits: tuple[GivenLimits, ...] = ()  # sorted by `from`
    limits_by: Literal["sigma"] = "sigma"
    width: float = Field(default=3.0, gt=0)
    estimator: EstimatorName | None = None
    censored: Literal["set-aside", "at-limit"] = "set-aside"
    rules: tuple[RuleSetting, ...] | None = None  # None: the chart's default
    cadence: Duration | None = None
    calendar: str | None = None
    gap: Duration | None = None
    gauge: str = ""
    class_: str = Field(default="", alias="class")
    reaction: str = ""
    owner: str = ""
    better: Literal["higher", "lower"] | None = None


class Settings(Model):
    """A whole `holdsteady.toml`, defaults already laid under every characteristic."""

    site: Site = Site()
    source: tuple[Source, ...] = ()
    characteristic: tuple[Characteristic, ...] = ()
