"""One characteristic in, one finding out; one that cannot be computed never takes others down."""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable, Sequence
from dataclasses import replace

import numpy as np

from holdsteady.arrays import Bools, frozen
from holdsteady.intake.readings import Intake, Readings
from holdsteady.monitor.cases import Outside, cases
from holdsteady.monitor.charted import Charted
from holdsteady.monitor.context import Context
from holdsteady.monitor.eras import changes, eras
from holdsteady.monitor.finding import Calculation, Era, Finding, LevelSummary, LimitsInForce, Panel, Points
from holdsteady.monitor.gather import gather, up_to
from holdsteady.monitor.ids import slugs
from holdsteady.monitor.judge import judge
from holdsteady.monitor.kinds import choose
from holdsteady.monitor.limits import Limits, in_force
from holdsteady.monitor.matching import concerns, excluded_points
from holdsteady.monitor.state import flags, limits_doubts, outside_specification, silent_since, state
from holdsteady.project.load import Project
from holdsteady.project.logbook import LogbookEntry
from holdsteady.project.settings import Characteristic, Specification
from holdsteady.spc import doubt
from holdsteady.spc.attributes import overdispersion
from holdsteady.times import to_microseconds


def monitor_all(
    intake: Intake, project: Project, *, as_of: int, progress: Callable[[str, int, int], None] | None = None
) -> tuple[Finding, ...]:
    """Compute every characteristic, in the order of the settings, members of `each` by name.

    `as_of` is microseconds UTC: readings timed up to it, and lines entered up to it, are known.
    """
    settings, context = project.settings, context_of(project, as_of)
    found: list[Finding] = []
    total = sum(max(1, len(intake.readings.get(c.id, ()))) for c in settings.characteristic)
    for characteristic in settings.characteristic:
        known = [up_to(member, as_of) for member in intake.readings.get(characteristic.id, ())]
        members = [member for member in known if member.line.size]
        censored = intake.censored.get(characteristic.id, 0)
        if not members:
            found.append(not_computed(characteristic, *_no_data(characteristic, intake), censored=censored))
        for readings in members:
            found.append(_safely(readings, characteristic, context, censored))
            if progress is not None:
                progress("computing", len(found), total)
    names = slugs([finding.name for finding in found])
    return tuple(
        replace(finding, slug=slug, implausible=intake.implausible.get(finding.settings.id, 0))
        for finding, slug in zip(found, names, strict=True)
    )


def _no_data(settings: Characteristic, intake: Intake) -> tuple[str, str]:
    """Return why a characteristic has no reading, as far as its columns tell, and the remedy."""
    files = {account.file for account in intake.files if account.source == settings.source}
    asked = {settings.value, settings.count, settings.size, *(settings.values or ())}
    reasons = Counter(a.reason for a in intake.set_aside if a.column in asked and a.file in files)
    what = "no file has a usable reading of it"
    if not files:
        return "no file matches the `files` of its source", "Correct `files`, or wait for the first file."
    if reasons:
        commonest, times = reasons.most_common(1)[0]
        return f"{what}; {times} set aside: {commonest}", "Look on the data page at what was set aside."
    if settings.where:
        return what, "Check `where` against the files: no row may pass it."
    return what, "Look on the data page at what its source's files were read as."


def context_of(project: Project, as_of: int) -> Context:
    """Return what all characteristics share, with the logbook and register as they were at `as_of`."""
    site = project.settings.site
    return Context(
        as_of=as_of,
        zone=project.zone,
        watch_from=None if site.watch_from is None else to_microseconds(site.watch_from, project.zone),
        attention=site.attention.microseconds,
        logbook=tuple(entry for entry in project.logbook.entries if entry.entered <= as_of),
        register=tuple(line for line in project.register.lines if line.adopted_at <= as_of),
    )


def _safely(readings: Readings, settings: Characteristic, context: Context, censored: int) -> Finding:
    try:
        with np.errstate(over="raise"):
            return monitor(readings, settings, context, censored=censored)
    except FloatingPointError:
        what = "its readings are too large to compute with"
        remedy = "Set `plausible` bounds, so that what no gauge can read is set aside."
        return not_computed(settings, what, remedy, readings=readings, censored=censored)
    except Exception as error:
        what = f"computing it failed: {str(error) or type(error).__name__}"
        remedy = "Check its settings against its data; if both are right, report this text."
        return not_computed(settings, what, remedy, readings=readings, censored=censored)


def not_computed(
    settings: Characteristic, reason: str, remedy: str, *, readings: Readings | None = None, censored: int = 0
) -> Finding:
    """Return the finding of a characteristic whose data or settings allow no chart."""
    return Finding(
        name=settings.id if readings is None else readings.name,
        slug="",
        title=_title(settings, readings),
        settings=settings,
        chart=settings.chart or "",
        state="not-computed",
        flags=(),
        reason=reason,
        remedy=remedy,
        readings=0 if readings is None else int(readings.line.size),
        censored=censored,
        points=None,
        panels=(),
        eras=(),
        limits=(),
        signals=(),
        cases=(),
        logbook=(),
        specification=settings.specification,
        calculation=(),
        summaries=(),
        overdispersion=None,
        sigma_ratio=None,
        resolution=None,
        silent_since=None,
        common_n=None,
        doubts=(),
    )


def monitor(readings: Readings, settings: Characteristic, context: Context, *, censored: int = 0) -> Finding:
    """Compute one characteristic: points, limits in force, signals, cases, state.

    A logbook line that names nothing but a case is known to concern this characteristic only once its cases
    are known; where such a line excludes points, everything is computed again with it.
    """
    entries = _entries(context.logbook, readings, settings, ())
    finding = _compute(readings, settings, context, entries, censored)
    aliases = [alias for case in finding.cases for alias in case.aliases]
    with_cases = _entries(context.logbook, readings, settings, aliases)
    if len(with_cases) > len(entries):
        finding = _compute(readings, settings, context, with_cases, censored)
    return finding


def _compute(
    readings: Readings,
    settings: Characteristic,
    context: Context,
    entries: tuple[LogbookEntry, ...],
    censored: int,
) -> Finding:
    process_changes = changes(entries) if readings.time is not None else ()
    points = gather(
        readings,
        settings,
        era_starts=np.array([e.when for e in process_changes], dtype=np.int64),
        as_of=context.as_of,
        zone=context.zone,
    )
    kind = choose(settings, points)
    if (fault := kind.fault(points)) is not None:
        return not_computed(settings, *fault, readings=readings, censored=censored)
    excluded, faulty = excluded_points(entries, points.time, points.points)
    real_value = ~faulty & (points.side == 0)
    values = kind.values(points, real_value)
    charted = Charted(
        name=readings.name,
        settings=settings,
        context=context,
        kind=kind,
        points=points,
        values=values,
        eras=eras(process_changes, points.era),
        entries=entries,
        excluded=frozen(excluded),
        real=frozen(~faulty),
        usable=frozen(~excluded & real_value & ~points.open & ~np.isnan(next(iter(values.values())))),
    )
    return _conclude(charted, readings, censored)


def _conclude(charted: Charted, readings: Readings, censored: int) -> Finding:
    """Work out limits, signals, cases and state of a chart, and put it all together."""
    settings, context, points, kind = charted.settings, charted.context, charted.points, charted.kind
    adopted = [
        line
        for line in context.register
        if line.characteristic == charted.name
        and line.chart == kind.name
        and (kind.attribute or (line.sigma is not None and line.sigma > 0))
    ]
    limits = in_force(charted, adopted)
    judged = judge(charted, limits.lines, _baseline_by_panel(charted, limits.in_baseline))
    outside = None
    if not kind.attribute:
        outside = outside_specification(points, settings.specification, context)
    panels = {panel.name: panel for panel in judged.panels}
    found, signals = cases(charted, judged.signals, panels, _per_point(charted, outside))
    resolution = None if kind.attribute else doubt.resolution(points.single[_told(charted)])
    silent = silent_since(settings, None if points.time is None else int(points.time[-1]), context)
    known = points.n[~points.open]
    now = [row for row in limits.rows if row.start_index < points.points <= row.stop_index]
    doubts = limits_doubts(charted, judged.panels[0], now)
    return Finding(
        name=charted.name,
        slug="",
        title=_title(settings, readings),
        settings=settings,
        chart=kind.name,
        state="not-computed" if limits.stuck else state(found, limits.rows, points, silent, context),
        flags=flags(charted, now, outside, doubts, resolution),
        reason=limits.stuck,
        remedy="Give `limits`, or a `baseline` that holds some variation." if limits.stuck else "",
        readings=int(readings.line.size),
        censored=censored,
        points=_points(charted),
        panels=judged.panels,
        eras=charted.eras,
        limits=limits.rows,
        signals=signals,
        cases=found,
        logbook=charted.entries,
        specification=_specification(settings, context),
        calculation=_calculation(limits, charted.eras, now),
        summaries=_summaries(charted, outside),
        overdispersion=_overdispersion(charted, judged.panels[0]),
        sigma_ratio=_sigma_ratio(charted, limits),
        resolution=resolution,
        silent_since=silent,
        common_n=float(known[0]) if known.size and np.ptp(known) == 0 else None,
        doubts=doubts,
        at_limit=int(np.count_nonzero(points.single_side)),
    )


def _entries(
    logbook: Sequence[LogbookEntry], readings: Readings, settings: Characteristic, cases: Sequence[str]
) -> tuple[LogbookEntry, ...]:
    """Return the logbook lines that concern a characteristic, by moment."""
    mine = [
        entry
        for entry in logbook
        if concerns(entry, name=readings.name, family=readings.family, gauge=settings.gauge, cases=cases)
        # Without times a line meets no point; a case it can still name.
        and (readings.time is not None or entry.kind == "note" or entry.case in cases)
    ]
    return tuple(sorted(mine, key=lambda entry: (entry.when, entry.line)))


def _title(settings: Characteristic, readings: Readings | None) -> str:
    title = settings.title or settings.id
    if readings is None or not readings.each:
        return title
    return ", ".join([title, *(f"{column} {value}".strip() for column, value in readings.each.items())])


def _points(charted: Charted) -> Points:
    points = charted.points
    return Points(
        time=points.time,
        label=points.label,
        n=points.n,
        file=points.file,
        files=points.files,
        line=points.line,
        era=points.era,
        segment=points.segment,
        excluded=charted.excluded,
        faulty=frozen(~charted.real),
        open=points.open,
        side=points.side,
    )


def _baseline_by_panel(charted: Charted, in_baseline: Bools) -> dict[str, Bools]:
    """Return which points of each panel belong to the baseline: a moving range does when both its ends do."""
    by_panel = {}
    for panel, value in charted.values.items():
        mask = in_baseline & ~np.isnan(value)
        if charted.kind.panels[panel] == "moving-range":
            mask &= np.concatenate(([False], in_baseline[:-1]))
        by_panel[panel] = frozen(mask)
    return by_panel


def _per_point(charted: Charted, outside: Bools | None) -> Outside:
    points = charted.points
    kept = charted.real[points.point_of]
    readings = np.bincount(points.point_of[kept], minlength=points.points)
    if outside is None:
        return Outside(by_point=None, readings=readings)
    by_point = np.bincount(points.point_of[kept & outside], minlength=points.points)
    return Outside(by_point=by_point, readings=readings)


def _specification(settings: Characteristic, context: Context) -> tuple[Specification, ...]:
    """Return what was wanted until now; what is yet to come does not count."""
    return tuple(
        wanted
        for wanted in settings.specification
        if wanted.from_ is None or to_microseconds(wanted.from_, context.zone) <= context.as_of
    )


def _told(charted: Charted) -> Bools:
    """Return which single readings are real values (V,): no measurement fault, not drawn at a limit."""
    points = charted.points
    told: Bools = charted.real[points.point_of] & (points.single_side == 0)
    return told


def _calculation(
    limits: Limits, spans: Sequence[Era], now: Sequence[LimitsInForce]
) -> tuple[Calculation, ...]:
    """Return how limits come about from the newest era's baseline, and whether those are in force."""
    estimate = limits.estimates.get(spans[-1].number)
    if estimate is None:
        return ()
    own = [row.limited and row.kind == "provisional" and "kept" not in row.note for row in now]
    calculation = Calculation(
        method=estimate.estimator,
        in_force=bool(own) and all(own),
        points=estimate.points,
        figures=estimate.figures,
        source=estimate.source,
    )
    return (calculation,)


def _summaries(charted: Charted, outside: Bools | None) -> tuple[LevelSummary, ...]:
    """Return the single readings of each era taken together; nothing for counts."""
    points = charted.points
    if charted.kind.attribute:
        return ()
    kept = charted.real[points.point_of]
    found = []
    for era in charted.eras:
        here = kept & (points.point_of >= era.start_index) & (points.point_of < era.stop_index)
        told = here & (points.single_side == 0)
        single = points.single[told]
        found.append(
            LevelSummary(
                era=era.number,
                n=int(single.size),
                mean=float(single.mean()) if single.size else None,
                sigma_total=float(single.std(ddof=1)) if single.size > 1 else None,
                outside_observed=None if outside is None else int(outside[here].sum()),
                censored=int(here.sum() - told.sum()),
            )
        )
    return tuple(found)


def _overdispersion(charted: Charted, panel: Panel) -> float | None:
    """Return sigma_z of the newest era: of its baseline, or of all its points where limits were given."""
    if charted.kind.name not in ("p", "u"):
        return None
    points = charted.points
    mine = charted.usable & ~np.isnan(panel.z) & (points.era == points.era[-1])
    baseline = mine & panel.in_baseline
    return overdispersion(panel.z, baseline if np.any(baseline) else mine, points.segment)


def _sigma_ratio(charted: Charted, limits: Limits) -> float | None:
    """Return the overall s against the sigma from moving ranges: above 1 drift, below 1 alternation."""
    estimate = limits.estimates.get(charted.eras[-1].number)
    if charted.kind.name != "individuals" or estimate is None:
        return None
    if not estimate.sigma or estimate.overall_sigma is None:
        return None
    return estimate.overall_sigma / estimate.sigma
