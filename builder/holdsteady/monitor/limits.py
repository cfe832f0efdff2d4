"""Which points set the limits, and which limits are in force at each point.

A point is judged by what was in force at its own time: given limits, else the latest adopted ones, else
provisional ones. Nothing adopted later changes how an earlier point was judged.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace

import numpy as np

from holdsteady.arrays import Bools, Floats, Ints, frozen
from holdsteady.monitor.charted import Charted
from holdsteady.monitor.finding import Era, LimitsInForce, LimitsKind
from holdsteady.monitor.kinds import ChartKind
from holdsteady.project.register import RegisterLine
from holdsteady.spc.result import Estimate, Lines
from holdsteady.times import to_microseconds

FEWEST = 8  # points in an era, before there are any limits


@dataclass(frozen=True, slots=True, kw_only=True)
class Source:
    """One set of parameters of an era: where they come from and from when they hold."""

    kind: LimitsKind
    from_time: int | None  # None: from the era's first point
    parameters: Mapping[str, tuple[float, float | None]]  # panel -> centre, sigma of a single reading
    estimate: Estimate | None
    estimator: str
    note: str
    lines: Mapping[str, RegisterLine]  # of an adopted set


@dataclass(frozen=True, slots=True, kw_only=True)
class Limits:
    """The rows to show, the lines at each point, and what they were estimated from, by era."""

    rows: tuple[LimitsInForce, ...]
    lines: Mapping[str, Lines]
    in_baseline: Bools
    estimates: Mapping[int, Estimate]  # by era


def baseline_points(charted: Charted, era: Era) -> Bools:
    """Return (N,) the points of an era that its limits are estimated from.

    The first `points` usable ones, never the latest; a span { from, to } holds for the era it begins in.
    """
    here = slice(era.start_index, era.stop_index)
    inside = np.zeros(charted.points.points, dtype=np.bool_)
    inside[here] = charted.usable[here]
    baseline, time, zone = charted.settings.baseline, charted.points.time, charted.context.zone
    if baseline.from_ is not None and baseline.to is not None and time is not None:
        start = to_microseconds(baseline.from_, zone)
        span = (time >= start) & (time < to_microseconds(baseline.to, zone))
        covers = np.flatnonzero(span)
        if covers.size and era.start_index <= covers[0] < era.stop_index:
            return inside & span
    return inside & (np.cumsum(inside) <= baseline.points)


def in_force(charted: Charted, adopted: Sequence[RegisterLine]) -> Limits:
    """Work out the limits of every era, and lay them along the points."""
    points, kind = charted.points, charted.kind
    in_baseline = np.zeros(points.points, dtype=np.bool_)
    rows: list[LimitsInForce] = []
    estimates: dict[int, Estimate] = {}
    lines = {panel: _no_lines(points.points) for panel in kind.panels}
    last: Source | None = None
    for era in charted.eras:
        use = baseline_points(charted, era)
        facts = _facts(charted, era, use)
        if np.any(use):
            estimates[era.number] = kind.estimate(points, charted.values, use, charted.settings)
        sources = _sources(charted, era, estimates.get(era.number) if facts.enough else None, adopted, last)
        spans = _spans(era, sources, points.time)
        start = spans[0].start if spans else era.stop_index
        if start > era.start_index:
            rows.append(_median_row(charted, era, facts, start, estimates.get(era.number)))
            if rows[-1].centre is not None:
                lines[rows[-1].panel].centre[era.start_index : start] = rows[-1].centre
        for span in spans:
            for panel in span.source.parameters:
                rows.append(_row(charted, era, panel, span, facts))
                _lay(charted, lines[panel], panel, span)
        in_baseline |= _shown_baseline(charted, era, use, [span.source for span in spans])
        last = sources[-1] if sources else None
    return Limits(
        rows=tuple(rows),
        lines={panel: _freeze(each) for panel, each in lines.items()},
        in_baseline=frozen(in_baseline),
        estimates=estimates,
    )


def _sources(
    charted: Charted,
    era: Era,
    estimate: Estimate | None,
    adopted: Sequence[RegisterLine],
    last: Source | None,
) -> list[Source]:
    """Return the sets that hold in an era in the order of their rank: a later one covers an earlier one."""
    kind = charted.kind
    sources: list[Source] = []
    if era.action == "keep-limits" and last is not None:
        sources.append(replace(last, from_time=None, note="kept from the era before"))
    elif estimate is not None:
        sources += _provisional(era, kind, estimate, last)
    mine = [line for line in adopted if line.era_from == era.from_time]
    for moment in sorted({line.in_force_from for line in mine}):
        latest = {line.panel: line for line in mine if line.in_force_from == moment}
        sources.append(
            Source(
                kind="adopted",
                from_time=moment,
                parameters={
                    panel: (latest[panel].centre, latest[panel].sigma)
                    for panel in kind.panels
                    if panel in latest
                },
                estimate=None,
                estimator=next(iter(latest.values())).estimator,
                note="",
                lines=latest,
            )
        )
    sources += [
        Source(
            kind="given",
            from_time=None if given.from_ is None else to_microseconds(given.from_, charted.context.zone),
            parameters=dict.fromkeys(kind.panels, (given.centre, given.sigma)),
            estimate=None,
            estimator="given",
            note="",
            lines={},
        )
        for given in charted.settings.limits
    ]
    return sources


def _provisional(era: Era, kind: ChartKind, estimate: Estimate, last: Source | None) -> list[Source]:
    sigma, estimator = estimate.sigma, estimate.estimator
    note = estimate.finding
    if era.action == "keep-sigma" and last is not None:
        sigma = next(iter(last.parameters.values()))[1]
        estimator, note = last.estimator, "sigma kept from the era before"
    if not kind.attribute and not sigma:
        return []
    if kind.attribute and estimate.finding:
        return []
    return [
        Source(
            kind="provisional",
            from_time=None,
            parameters=dict.fromkeys(kind.panels, (estimate.centre, sigma)),
            estimate=estimate,
            estimator=estimator,
            note=note,
            lines={},
        )
    ]


@dataclass(frozen=True, slots=True, kw_only=True)
class _Span:
    """A source in force over points [start, stop)."""

    source: Source
    start: int
    stop: int


def _spans(era: Era, sources: Sequence[Source], time: Ints | None) -> list[_Span]:
    """Return the points over which each source is in force, in the order of the points.

    Sources come in the order of their rank, so that one laid later covers one laid earlier; an adopted set
    that no point has reached yet is kept with an empty span, so that it can be seen.
    """
    holder = np.full(era.stop_index - era.start_index, -1, dtype=np.int64)
    waiting = []
    for index, source in enumerate(sources):
        start = 0
        if source.from_time is not None:
            if time is None:
                continue
            here = time[era.start_index : era.stop_index]
            start = int(np.searchsorted(here, source.from_time, side="left"))
        holder[start:] = index
        if start == holder.size:
            waiting.append(_Span(source=source, start=era.stop_index, stop=era.stop_index))
    starts = np.concatenate(([0], np.flatnonzero(np.diff(holder)) + 1)).tolist()
    stops = [*starts[1:], holder.size]
    spans = [
        _Span(source=sources[holder[a]], start=era.start_index + a, stop=era.start_index + b)
        for a, b in zip(starts, stops, strict=True)
        if holder[a] >= 0
    ]
    return spans + waiting


@dataclass(frozen=True, slots=True, kw_only=True)
class _Facts:
    """What the baseline of an era consists of."""

    points: int
    first: int | None
    last: int | None
    excluded: int
    enough: bool


def _facts(charted: Charted, era: Era, use: Bools) -> _Facts:
    where = np.flatnonzero(use)
    if where.size == 0:
        return _Facts(points=0, first=None, last=None, excluded=0, enough=False)
    points = charted.points
    before = slice(era.start_index, where[-1] + 1)
    return _Facts(
        points=where.size,
        first=None if points.time is None else int(points.time[where[0]]),
        last=None if points.time is None else int(points.time[where[-1]]),
        excluded=int(np.sum(charted.excluded[before])),
        enough=where.size >= FEWEST,
    )


def _shown_baseline(charted: Charted, era: Era, use: Bools, sources: Sequence[Source]) -> Bools:
    """Return the points that set an era's limits: those of the latest adopted set, else the first ones.

    Given limits are set by no point.
    """
    if sources and all(source.kind == "given" for source in sources):
        return np.zeros_like(use)
    adopted = [line for source in sources if source.kind == "adopted" for line in source.lines.values()]
    time = charted.points.time
    if not adopted or time is None:
        return use
    latest = max(adopted, key=lambda line: line.in_force_from)
    if latest.baseline_from is None or latest.baseline_to is None:
        return use
    here = slice(era.start_index, era.stop_index)
    inside = np.zeros_like(use)
    inside[here] = (time[here] >= latest.baseline_from) & (time[here] <= latest.baseline_to)
    return inside & charted.usable


def _row(charted: Charted, era: Era, panel: str, span: _Span, facts: _Facts) -> LimitsInForce:
    source, points = span.source, charted.points
    centre, sigma = source.parameters[panel]
    n = points.n[span.start : span.stop] if span.stop > span.start else points.n[-1:]
    lines = charted.kind.lines(panel, centre, sigma, n, charted.settings)
    line = source.lines.get(panel)
    learnt = source.kind == "provisional"
    first = None if points.time is None or span.stop == span.start else int(points.time[span.start])
    return LimitsInForce(
        era=era.number,
        panel=panel,
        kind=source.kind,
        start_index=span.start,
        stop_index=span.stop,
        in_force_from=source.from_time if source.from_time is not None else (era.from_time or first),
        centre=_common(lines.centre),
        sigma=None if charted.kind.attribute else sigma,
        lower=_common(lines.lower),
        upper=_common(lines.upper),
        varies=not (_same(lines.lower) and _same(lines.upper)),
        n=float(n[0]) if np.ptp(n) == 0 else None,
        points=line.points if line else (facts.points if learnt else None),
        baseline_from=line.baseline_from if line else (facts.first if learnt else None),
        baseline_to=line.baseline_to if line else (facts.last if learnt else None),
        excluded=line.excluded if line else (facts.excluded if learnt else None),
        estimator=line.estimator if line else source.estimator,
        note=source.note,
        reason=line.reason if line else "",
        by=line.by if line else "",
        adopted_at=line.adopted_at if line else None,
    )


def _median_row(
    charted: Charted, era: Era, facts: _Facts, stop: int, estimate: Estimate | None
) -> LimitsInForce:
    """Return the row of an era that has no limits yet: the median of its points alone."""
    panel = next(iter(charted.kind.panels))
    here = slice(era.start_index, era.stop_index)
    known = charted.values[panel][here][charted.usable[here]]
    note = "too few points"
    if facts.enough:
        note = (estimate.finding if estimate else "") or "no variation in the baseline"
    return LimitsInForce(
        era=era.number,
        panel=panel,
        kind="provisional",
        start_index=era.start_index,
        stop_index=stop,
        in_force_from=era.from_time or facts.first,
        centre=float(np.median(known)) if known.size else None,
        sigma=None,
        lower=None,
        upper=None,
        varies=False,
        n=None,
        points=facts.points,
        baseline_from=facts.first,
        baseline_to=facts.last,
        excluded=facts.excluded,
        estimator="median",
        note=note,
        reason="",
        by="",
        adopted_at=None,
    )


def _lay(charted: Charted, lines: Lines, panel: str, span: _Span) -> None:
    """Write a set's lines over the points it is in force at."""
    if span.stop == span.start:
        return
    centre, sigma = span.source.parameters[panel]
    n = charted.points.n[span.start : span.stop]
    drawn = charted.kind.lines(panel, centre, sigma, n, charted.settings)
    for name in ("centre", "lower", "upper", "sigma"):
        getattr(lines, name)[span.start : span.stop] = getattr(drawn, name)


def _no_lines(points: int) -> Lines:
    return Lines(**{name: np.full(points, np.nan) for name in ("centre", "lower", "upper", "sigma")})


def _freeze(lines: Lines) -> Lines:
    for name in ("centre", "lower", "upper", "sigma"):
        frozen(getattr(lines, name))
    return lines


def _same(line: Floats) -> bool:
    return bool(np.all(np.isnan(line)) or (not np.any(np.isnan(line)) and np.ptp(line) == 0))


def _common(line: Floats) -> float | None:
    return float(line[0]) if _same(line) and not np.isnan(line[0]) else None
