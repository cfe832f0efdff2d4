"""Which points set the limits, and which limits are in force at each point.

A point is judged by what was in force at its own time: given limits, else the latest adopted ones, else
provisional ones. Nothing adopted later changes how an earlier point was judged. Panels have a line each.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace

import numpy as np

from holdsteady.arrays import Bools, Floats, Ints, frozen
from holdsteady.monitor.charted import Charted
from holdsteady.monitor.finding import TOO_FEW, Era, LimitsInForce, LimitsKind
from holdsteady.project.register import RegisterLine
from holdsteady.spc.result import Estimate, Lines
from holdsteady.times import to_microseconds

FEWEST = 8  # points in an era, before there are any limits
_NOISE = 1e-14  # of the level: a sigma this small is how numbers are written, no variation
_KEPT = "kept from the era before"
_LINES = ("centre", "lower", "upper", "sigma")


@dataclass(frozen=True, slots=True, kw_only=True)
class Baseline:
    """The points that a set of limits was estimated from. Times are None without a time column."""

    points: int | None
    first: int | None
    last: int | None
    excluded: int | None


@dataclass(frozen=True, slots=True, kw_only=True)
class Source:
    """One set of limits of one panel: its parameters, where they come from, and from when they hold."""

    kind: LimitsKind
    from_time: int | None  # None: from the era's first point
    centre: float
    sigma: float | None  # of a single reading; None for counts
    width: float
    estimator: str
    baseline: Baseline
    note: str = ""
    line: RegisterLine | None = None  # of an adopted set

    @property
    def kept(self) -> bool:
        """Whether no point of the era itself has set these limits."""
        return self.note == _KEPT


@dataclass(frozen=True, slots=True, kw_only=True)
class Limits:
    """The rows to show, the lines at each point, and what they were estimated from, by era."""

    rows: tuple[LimitsInForce, ...]
    lines: Mapping[str, Lines]
    in_baseline: Bools
    estimates: Mapping[int, Estimate]
    stuck: str  # why the newest era will have no limits, though its baseline is full; else ""


@dataclass(frozen=True, slots=True, kw_only=True)
class _Learnt:
    """What an era's own first points tell."""

    use: Bools  # (N,) the points
    baseline: Baseline
    estimate: Estimate | None
    enough: bool  # points, for limits
    full: bool  # no further point will be added


@dataclass(frozen=True, slots=True, kw_only=True)
class _Span:
    """A source in force over points [start, stop)."""

    source: Source
    start: int
    stop: int


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
    """Work out the limits of every era and panel, and lay them along the points."""
    points, kind = charted.points, charted.kind
    in_baseline = np.zeros(points.points, dtype=np.bool_)
    rows: list[LimitsInForce] = []
    estimates: dict[int, Estimate] = {}
    lines = {panel: _no_lines(points.points) for panel in kind.panels}
    last: dict[str, Source | None] = dict.fromkeys(kind.panels)
    first_panel, stuck = next(iter(kind.panels)), ""
    for era in charted.eras:
        learnt = _learn(charted, era)
        if learnt.estimate is not None:
            estimates[era.number] = learnt.estimate
        for panel in kind.panels:
            mine = [line for line in adopted if line.panel == panel and line.era_from == era.from_time]
            sources = _sources(charted, era, learnt, mine, last[panel])
            spans = _spans(era, sources, points.time)
            start = spans[0].start if spans else era.stop_index
            if panel == first_panel:
                in_baseline |= _shown_baseline(charted, era, learnt, spans)
                if start > era.start_index:
                    rows.append(_row_without_limits(charted, era, learnt, start))
                    _lay_centre(lines[panel], rows[-1])
                stuck = rows[-1].note if start == era.stop_index and learnt.enough and learnt.full else ""
            for span in spans:
                rows.append(_row(charted, era, panel, span))
                _lay(charted, lines[panel], panel, span)
            last[panel] = _at_the_end(era, spans) or last[panel]
    return Limits(
        rows=tuple(rows),
        lines={panel: _freeze(each) for panel, each in lines.items()},
        in_baseline=frozen(in_baseline),
        estimates=estimates,
        stuck=stuck,
    )


def _learn(charted: Charted, era: Era) -> _Learnt:
    use = baseline_points(charted, era)
    where = np.flatnonzero(use)
    if where.size == 0:
        nothing = Baseline(points=0, first=None, last=None, excluded=0)
        return _Learnt(use=use, baseline=nothing, estimate=None, enough=False, full=False)
    time = charted.points.time
    return _Learnt(
        use=use,
        baseline=Baseline(
            points=where.size,
            first=None if time is None else int(time[where[0]]),
            last=None if time is None else int(time[where[-1]]),
            excluded=int(np.sum(charted.excluded[era.start_index : where[-1] + 1])),
        ),
        estimate=charted.kind.estimate(charted.points, charted.values, use, charted.settings),
        enough=where.size >= FEWEST,
        full=where.size >= charted.settings.baseline.points,
    )


def _sources(
    charted: Charted, era: Era, learnt: _Learnt, adopted: Sequence[RegisterLine], last: Source | None
) -> list[Source]:
    """Return the sets that hold in an era in the order of their rank: a later one covers an earlier one.

    `last` is what was in force last before the era. Adopted sets rank by when they were adopted, so
    that the latest one in force at a point is the one that counts.
    """
    sources: list[Source] = []
    if era.action == "keep-limits" and last is not None:
        sources.append(replace(last, from_time=None, note=_KEPT))
    elif learnt.estimate is not None and learnt.enough:
        sources += _provisional(charted, era, learnt, last)
    sources += [_adopted(line) for line in sorted(adopted, key=lambda line: (line.adopted_at, line.line))]
    sources += [
        Source(
            kind="given",
            from_time=None if given.from_ is None else to_microseconds(given.from_, charted.context.zone),
            centre=given.centre,
            sigma=given.sigma,
            width=charted.settings.width,
            estimator="given",
            baseline=Baseline(points=None, first=None, last=None, excluded=None),
        )
        for given in charted.settings.limits
    ]
    return sources


def _provisional(charted: Charted, era: Era, learnt: _Learnt, last: Source | None) -> list[Source]:
    """Return the limits that the era's own points give; none where they allow none."""
    estimate = learnt.estimate
    assert estimate is not None
    sigma, estimator, note = estimate.sigma, estimate.estimator, estimate.finding
    if charted.kind.attribute:
        if estimate.finding:
            return []
    elif era.action == "keep-sigma" and last is not None:
        sigma, estimator, note = last.sigma, last.estimator, "sigma kept from the era before"
    elif not sigma or sigma < _NOISE * abs(estimate.centre):
        return []
    return [
        Source(
            kind="provisional",
            from_time=None,
            centre=estimate.centre,
            sigma=sigma,
            width=charted.settings.width,
            estimator=estimator,
            baseline=learnt.baseline,
            note=note,
        )
    ]


def _adopted(line: RegisterLine) -> Source:
    return Source(
        kind="adopted",
        from_time=line.in_force_from,
        centre=line.centre,
        sigma=line.sigma,
        width=line.width,
        estimator=line.estimator,
        baseline=Baseline(
            points=line.points, first=line.baseline_from, last=line.baseline_to, excluded=line.excluded
        ),
        line=line,
    )


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


def _at_the_end(era: Era, spans: Sequence[_Span]) -> Source | None:
    """Return the source in force at the last point of an era."""
    return next((span.source for span in spans if span.start < span.stop == era.stop_index), None)


def _shown_baseline(charted: Charted, era: Era, learnt: _Learnt, spans: Sequence[_Span]) -> Bools:
    """Return the points that set an era's limits: those of the latest adopted set, else the first ones.

    Given limits are set by no point, and kept ones by none of this era.
    """
    sources = [span.source for span in spans]
    if sources and all(source.kind == "given" or source.kept for source in sources):
        return np.zeros_like(learnt.use)
    shown = learnt.use.copy()
    time = charted.points.time
    lines = [source.line for source in sources if source.line is not None and not source.kept]
    if lines and time is not None:
        latest = max(lines, key=lambda line: (line.adopted_at, line.line))
        if latest.baseline_from is not None and latest.baseline_to is not None:
            here = slice(era.start_index, era.stop_index)
            shown[:] = False
            shown[here] = (time[here] >= latest.baseline_from) & (time[here] <= latest.baseline_to)
            shown &= charted.usable
    for span in spans:
        if span.source.kind == "given":
            shown[span.start : span.stop] = False
    return shown


def _row(charted: Charted, era: Era, panel: str, span: _Span) -> LimitsInForce:
    source, points = span.source, charted.points
    complete = span.start + np.flatnonzero(~points.open[span.start : span.stop])
    n = points.n[complete] if complete.size else points.n[~points.open][-1:]
    if not n.size:
        n = points.n
    lines = _drawn(charted, panel, source, n)
    first = None if points.time is None or span.stop == span.start else int(points.time[span.start])
    return LimitsInForce(
        era=era.number,
        panel=panel,
        kind=source.kind,
        start_index=span.start,
        stop_index=span.stop,
        at_index=int(complete[-1]) if complete.size else None,
        limited=True,
        in_force_from=source.from_time if source.from_time is not None else (era.from_time or first),
        centre=_common(lines.centre),
        sigma=None if charted.kind.attribute else source.sigma,
        lower=_common(lines.lower),
        upper=_common(lines.upper),
        varies=not (_same(lines.lower) and _same(lines.upper)),
        n=float(n[0]) if np.ptp(n) == 0 else None,
        points=source.baseline.points,
        baseline_from=source.baseline.first,
        baseline_to=source.baseline.last,
        excluded=source.baseline.excluded,
        estimator=source.estimator,
        note=source.note,
        reason="" if source.line is None else source.line.reason,
        by="" if source.line is None else source.line.by,
        adopted_at=None if source.line is None else source.line.adopted_at,
    )


def _row_without_limits(charted: Charted, era: Era, learnt: _Learnt, stop: int) -> LimitsInForce:
    """Return the row of points that have no limits yet: a centre alone.

    It is the median of the era's points, or the baseline's own centre where that is full but does not vary.
    """
    panel = next(iter(charted.kind.panels))
    here = slice(era.start_index, era.stop_index)
    known = charted.values[panel][here][charted.usable[here]]
    centre = float(np.median(known)) if known.size else None
    estimator, note = "median", TOO_FEW
    if learnt.enough and learnt.estimate is not None:
        centre, estimator = learnt.estimate.centre, learnt.estimate.estimator
        note = learnt.estimate.finding or "no variation in the baseline"
    return LimitsInForce(
        era=era.number,
        panel=panel,
        kind="provisional",
        start_index=era.start_index,
        stop_index=stop,
        at_index=None,
        limited=False,
        in_force_from=era.from_time or learnt.baseline.first,
        centre=centre,
        sigma=None,
        lower=None,
        upper=None,
        varies=False,
        n=None,
        points=learnt.baseline.points,
        baseline_from=learnt.baseline.first,
        baseline_to=learnt.baseline.last,
        excluded=learnt.baseline.excluded,
        estimator=estimator,
        note=note,
        reason="",
        by="",
        adopted_at=None,
    )


def _drawn(charted: Charted, panel: str, source: Source, n: Floats) -> Lines:
    options = charted.settings.chart_options
    return charted.kind.lines(panel, source.centre, source.sigma, n, width=source.width, options=options)


def _lay(charted: Charted, lines: Lines, panel: str, span: _Span) -> None:
    """Write a set's lines over the points it is in force at."""
    if span.stop == span.start:
        return
    drawn = _drawn(charted, panel, span.source, charted.points.n[span.start : span.stop])
    for name in _LINES:
        getattr(lines, name)[span.start : span.stop] = getattr(drawn, name)


def _lay_centre(lines: Lines, row: LimitsInForce) -> None:
    if row.centre is not None:
        lines.centre[row.start_index : row.stop_index] = row.centre


def _no_lines(points: int) -> Lines:
    return Lines(**{name: np.full(points, np.nan) for name in _LINES})


def _freeze(lines: Lines) -> Lines:
    for name in _LINES:
        frozen(getattr(lines, name))
    return lines


def _same(line: Floats) -> bool:
    return bool(np.all(np.isnan(line)) or (not np.any(np.isnan(line)) and np.ptp(line) == 0))


def _common(line: Floats) -> float | None:
    return float(line[0]) if _same(line) and not np.isnan(line[0]) else None
