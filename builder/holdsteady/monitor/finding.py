"""What is known of one characteristic: the frozen result that pages and tables are made from.

N points, indexed from 0; `order` counts from 1. Times are microseconds since 1970-01-01 UTC, or None
throughout where the source has no time column. Indices into points are called `*_index`.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Literal

from holdsteady.arrays import Bools, Floats, Ints, Sides
from holdsteady.project.logbook import LogbookEntry
from holdsteady.project.settings import Characteristic, Specification
from holdsteady.spc.rules import Rule

State = Literal["not-computed", "signalling", "silent", "gathering", "answered", "steady"]
CaseState = Literal["withdrawn", "answered", "baseline", "historical", "open", "ended"]
Direction = Literal["high", "low", "none"]
LimitsKind = Literal["provisional", "adopted", "given"]
TOO_FEW = "too few points"


@dataclass(frozen=True, slots=True, kw_only=True)
class Points:
    """The plotted points of a characteristic, shared by its panels."""

    time: Ints | None  # (N,) time of the point's last reading
    label: tuple[str, ...]  # (N,) text of the subgroup column, or "" each
    n: Floats  # (N,) readings in the point; the size for p, np, u; 1 for c
    file: Ints  # (N,) index into `files`, of the point's last reading
    files: tuple[str, ...]
    line: Ints  # (N,)
    era: Ints  # (N,) from 1
    segment: Ints  # (N,) unbroken stretch: changes at an era's start and after a pause longer than `gap`
    excluded: Bools  # (N,) taken out of estimation by the logbook
    faulty: Bools  # (N,) a measurement fault: shown, not judged
    open: Bools  # (N,) the newest subgroup, incomplete: shown, not judged
    side: Sides  # (N,) -1 drawn at a limit that a reading lies below, 1 above; 0 real: others set no limits


@dataclass(frozen=True, slots=True, kw_only=True)
class Panel:
    """One plotted statistic with its limits, point by point; NaN where there is none."""

    name: str  # location, spread, single
    statistic: str  # value, mean, median, range, s, moving-range, fraction, count, rate
    value: Floats
    centre: Floats
    lower: Floats
    upper: Floats
    sigma: Floats  # of the plotted statistic
    z: Floats  # (value - centre) / sigma, computed once here
    in_baseline: Bools
    judged: Bools
    rules: tuple[Rule, ...]
    met: Mapping[str, Ints]  # rule name -> (N,): +1 high, -1 low, 2 without direction, 0 not met
    refused_rules: Mapping[str, str]  # rule name -> why it is not applied here


@dataclass(frozen=True, slots=True, kw_only=True)
class Signal:
    """One rule met, on one panel, in one direction, over one unbroken stretch."""

    id: str
    case: str
    panel: str
    rule: str
    direction: Direction
    first_index: int
    fired_index: int
    last_index: int
    ongoing: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class Case:
    """All signals that one disturbance would explain."""

    id: str
    aliases: tuple[str, ...]  # the `c-` form of every member's id
    state: CaseState
    direction: Direction
    panel: str  # of the earliest-fired signal
    first_index: int
    fired_index: int
    last_index: int
    ongoing: bool
    signals: tuple[str, ...]
    answered_by: tuple[LogbookEntry, ...]
    start_index: int | None  # the likely start: maximum-likelihood step on z of the case's panel
    start_low_index: int | None
    start_high_index: int | None
    shift: float | None  # in units of the plotted statistic
    shift_sigma: float | None  # in sigmas of the plotted statistic
    outside_specification: int | None  # readings outside within the case's span; None without a specification
    readings: int  # readings within the case's span
    good_way: bool  # points the way `better` names
    gross: bool  # a point of it lies beyond 5 sigma


@dataclass(frozen=True, slots=True, kw_only=True)
class Era:
    """A span of history under one process; `entry` is the process change that began it."""

    number: int
    start_index: int
    stop_index: int  # half-open
    from_time: int | None  # None for the first
    entry: LogbookEntry | None
    action: Literal["learn", "keep-sigma", "keep-limits"]


@dataclass(frozen=True, slots=True, kw_only=True)
class LimitsInForce:
    """One set of limits of one panel, in force over points [start_index, stop_index)."""

    era: int
    panel: str
    kind: LimitsKind
    start_index: int
    stop_index: int
    at_index: int | None  # its newest complete point, to quote where limits vary; None before any
    limited: bool  # whether there are limits, and not a centre alone
    in_force_from: int | None
    centre: float | None
    sigma: float | None  # of a single reading; None for attribute charts
    lower: float | None  # None also where it varies from point to point
    upper: float | None
    varies: bool
    n: float | None  # common subgroup size
    points: int | None
    baseline_from: int | None
    baseline_to: int | None
    excluded: int | None
    estimator: str
    note: str  # "" or why something is missing: TOO_FEW, "no variation in the baseline"
    reason: str  # of an adopted set
    by: str
    adopted_at: int | None


@dataclass(frozen=True, slots=True, kw_only=True)
class Calculation:
    """How limits are calculated from the baseline of the latest era, with this characteristic's own numbers.

    `in_force` says whether these are the limits in force; else others were given, adopted or kept, and this
    is what a new estimate from `points` points would be. `figures` are (symbol or name, value, unit-bearing)
    in the order they are used; `source` cites the method.
    """

    method: str
    in_force: bool
    points: int
    figures: tuple[tuple[str, float, bool], ...]
    source: str


@dataclass(frozen=True, slots=True, kw_only=True)
class LevelSummary:
    """Readings of one era taken together, whatever the state (n - 1 for the standard deviation).

    `n`, `mean` and `sigma_total` leave out the `censored` ones; `outside_observed` has those that are known
    to lie outside.
    """

    era: int
    n: int
    mean: float | None
    sigma_total: float | None
    outside_observed: int | None
    censored: int = 0


@dataclass(frozen=True, slots=True, kw_only=True)
class Finding:
    """Everything known of one characteristic in one build."""

    name: str  # bore[press=2]
    slug: str
    title: str  # with the members of `each`: "Bore diameter, press 2"
    settings: Characteristic
    chart: str
    state: State
    flags: tuple[str, ...]
    reason: str  # why it is not computed, else ""
    remedy: str
    readings: int
    censored: int  # cells set aside because they name a limit alone, of all members of `each` together
    points: Points | None
    panels: tuple[Panel, ...]
    eras: tuple[Era, ...]
    limits: tuple[LimitsInForce, ...]
    signals: tuple[Signal, ...]
    cases: tuple[Case, ...]
    logbook: tuple[LogbookEntry, ...]  # lines that concern this characteristic
    specification: tuple[Specification, ...]
    calculation: tuple[Calculation, ...]
    summaries: tuple[LevelSummary, ...]
    overdispersion: float | None  # sigma_z on p and u charts
    sigma_ratio: float | None  # overall s / sigma from moving ranges, on individuals charts
    resolution: float | None  # smallest step of the readings
    silent_since: int | None
    common_n: float | None
    doubts: tuple[str, ...]  # what differs since the limits came into force: level, spread, autocorrelation
    at_limit: int = 0  # readings drawn at a limit they lie beyond
    implausible: int = 0  # cells set aside as not plausible, of all members of `each` together

    @property
    def limits_now(self) -> tuple[LimitsInForce, ...]:
        """The limits in force at the newest point, a row for each panel that has any."""
        newest = 0 if self.points is None else len(self.points.n)
        return tuple(row for row in self.limits if row.start_index < newest <= row.stop_index)

    @property
    def limits_waiting(self) -> tuple[LimitsInForce, ...]:
        """The limits that no point has reached yet."""
        newest = 0 if self.points is None else len(self.points.n)
        return tuple(row for row in self.limits if row.start_index == row.stop_index == newest)
