"""`tables/`: what the pages show, at full precision, as CSV for people's own scripts.

Columns keep their names and their order; new ones are added at the end. Times are ISO 8601 with the offset
of the site's zone, numbers read back as the same double, yes is 1 and no is 0, several ids are joined by a
blank, and what is missing is empty.
"""

from __future__ import annotations

import json
from collections.abc import Mapping, Sequence
from zoneinfo import ZoneInfo

from holdsteady.intake.readings import Intake
from holdsteady.monitor.finding import Case, Finding, LevelSummary, LimitsInForce, Signal
from holdsteady.project.settings import Specification
from holdsteady.site import columns
from holdsteady.site.points_table import points_table
from holdsteady.times import to_microseconds

CHARACTERISTICS = (
    "characteristic,slug,title,area,chart,unit,state,flags,points,readings,"
    "first_time,last_time,open_cases,cases,signals"
)
SIGNALS = (
    "id,case,characteristic,panel,rule,direction,"
    "first_time,fired_time,last_time,first_order,fired_order,last_order,ongoing"
)
CASES = (
    "case,characteristic,state,direction,first_time,fired_time,last_time,ongoing,signals,answered_by,"
    "likely_start,likely_start_low,likely_start_high,shift,shift_sigma"
)
LIMITS = (
    "characteristic,era,era_from,era_to,in_force_from,panel,kind,centre,sigma,lower,upper,n,points,"
    "baseline_from,baseline_to,excluded,estimator"
)
CAPABILITY = (
    "characteristic,era,n,lower_spec,target,upper_spec,mean,sigma_within,sigma_total,cp,cpk,pp,ppk,cpm,"
    "cpk_low,cpk_high,ppk_low,ppk_high,fraction_outside,outside_observed,outside_high,model,in_control,"
    "resolution,model_parameters"
)
FILES = (
    "file,source,bytes,rows,used,filtered,repeated,corrected,set_aside,encoding,delimiter,decimal,"
    "first_time,last_time"
)
SET_ASIDE = "file,line,column,reason,text"
# Their contents are not computed yet; the columns are promised already.
HEADERS_ALONE = {
    "trust": (
        "characteristic,era,panel,rules,run_length,run_length_low,run_length_high,delay_half_sigma,"
        "delay_one_sigma,delay_two_sigma,points_in_span,expected_cases,seen_cases,expected_low,expected_high"
    ),
    "advice": "characteristic,finding,figure,threshold,suggestion,source",
    "changes": "what,characteristic,id,before,after,why",
    "studies": "study,gauge,quantity,value,low,high,unit,method",
}


def tables(
    findings: Sequence[Finding], intake: Intake, *, zone: ZoneInfo, recent: bool = False
) -> dict[str, bytes]:
    """Return every CSV of `tables/`, path -> content.

    Parameters
    ----------
    findings: in the order of the settings, which is the order of rows.
    intake: the account of files and rows.
    zone: in which times are written.
    recent: `points = "recent"` of the settings: the points' tables hold the baseline and the last 1,000.
    """
    listed = {f"tables/{name}.csv": columns.csv(header) for name, header in HEADERS_ALONE.items()}
    return listed | {
        "tables/characteristics.csv": _characteristics(findings, zone),
        "tables/signals.csv": _signals(findings, zone),
        "tables/cases.csv": _cases(findings, zone),
        "tables/limits.csv": _limits(findings, zone),
        "tables/capability.csv": _capability(findings, zone),
        "tables/files.csv": _files(intake, zone),
        "tables/set-aside.csv": _set_aside(intake),
        **{f"tables/points/{f.slug}.csv": points_table(f, zone=zone, recent=recent) for f in findings},
    }


def build_json(values: Mapping[str, object]) -> bytes:
    """Return `tables/build.json`, the one file in which two builds of the same inputs differ."""
    return json.dumps(values, indent=2, ensure_ascii=True, allow_nan=False).encode("ascii") + b"\n"


def _time(finding: Finding, index: int | None) -> int | None:
    if index is None or finding.points is None or finding.points.time is None or not _count(finding):
        return None
    return int(finding.points.time[index])


def _count(finding: Finding) -> int:
    return 0 if finding.points is None else len(finding.points.n)


def _characteristics(findings: Sequence[Finding], zone: ZoneInfo) -> bytes:
    return columns.csv(
        CHARACTERISTICS,
        [
            columns.text(f.name for f in findings),
            columns.text(f.slug for f in findings),
            columns.text(f.title for f in findings),
            columns.text(f.settings.area for f in findings),
            columns.text(f.chart for f in findings),
            columns.text(f.settings.unit for f in findings),
            columns.text(f.state for f in findings),
            columns.text(" ".join(f.flags) for f in findings),
            columns.integers([_count(f) for f in findings]),
            columns.integers([f.readings for f in findings]),
            columns.optional_moments([_time(f, 0) for f in findings], zone),
            columns.optional_moments([_time(f, _count(f) - 1) for f in findings], zone),
            columns.integers([sum(c.state == "open" for c in f.cases) for f in findings]),
            columns.integers([len(f.cases) for f in findings]),
            columns.integers([len(f.signals) for f in findings]),
        ],
    )


def _signals(findings: Sequence[Finding], zone: ZoneInfo) -> bytes:
    rows: list[tuple[Finding, Signal]] = [(f, s) for f in findings for s in f.signals]
    return columns.csv(
        SIGNALS,
        [
            columns.text(s.id for _, s in rows),
            columns.text(s.case for _, s in rows),
            columns.text(f.name for f, _ in rows),
            columns.text(s.panel for _, s in rows),
            columns.text(s.rule for _, s in rows),
            columns.text(s.direction for _, s in rows),
            columns.optional_moments([_time(f, s.first_index) for f, s in rows], zone),
            columns.optional_moments([_time(f, s.fired_index) for f, s in rows], zone),
            columns.optional_moments([_time(f, s.last_index) for f, s in rows], zone),
            columns.integers([s.first_index + 1 for _, s in rows]),
            columns.integers([s.fired_index + 1 for _, s in rows]),
            columns.integers([s.last_index + 1 for _, s in rows]),
            columns.flags([s.ongoing for _, s in rows]),
        ],
    )


def _cases(findings: Sequence[Finding], zone: ZoneInfo) -> bytes:
    rows: list[tuple[Finding, Case]] = [(f, c) for f in findings for c in f.cases]
    return columns.csv(
        CASES,
        [
            columns.text(c.id for _, c in rows),
            columns.text(f.name for f, _ in rows),
            columns.text(c.state for _, c in rows),
            columns.text(c.direction for _, c in rows),
            columns.optional_moments([_time(f, c.first_index) for f, c in rows], zone),
            columns.optional_moments([_time(f, c.fired_index) for f, c in rows], zone),
            columns.optional_moments([_time(f, c.last_index) for f, c in rows], zone),
            columns.flags([c.ongoing for _, c in rows]),
            columns.text(" ".join(c.signals) for _, c in rows),
            # The line of the logbook is the name an entry has.
            columns.text(" ".join(str(entry.line) for entry in c.answered_by) for _, c in rows),
            columns.optional_moments([_time(f, c.start_index) for f, c in rows], zone),
            columns.optional_moments([_time(f, c.start_low_index) for f, c in rows], zone),
            columns.optional_moments([_time(f, c.start_high_index) for f, c in rows], zone),
            columns.floats([c.shift for _, c in rows]),
            columns.floats([c.shift_sigma for _, c in rows]),
        ],
    )


def _limits(findings: Sequence[Finding], zone: ZoneInfo) -> bytes:
    rows: list[tuple[Finding, LimitsInForce]] = [(f, row) for f in findings for row in f.limits]
    spans = [_era_span(f, row.era) for f, row in rows]
    return columns.csv(
        LIMITS,
        [
            columns.text(f.name for f, _ in rows),
            columns.integers([row.era for _, row in rows]),
            columns.optional_moments([start for start, _ in spans], zone),
            columns.optional_moments([stop for _, stop in spans], zone),
            columns.optional_moments([row.in_force_from for _, row in rows], zone),
            columns.text(row.panel for _, row in rows),
            columns.text(row.kind for _, row in rows),
            columns.floats([row.centre for _, row in rows]),
            columns.floats([row.sigma for _, row in rows]),
            columns.floats([row.lower for _, row in rows]),
            columns.floats([row.upper for _, row in rows]),
            columns.floats([row.n for _, row in rows]),
            columns.integers([row.points for _, row in rows]),
            columns.optional_moments([row.baseline_from for _, row in rows], zone),
            columns.optional_moments([row.baseline_to for _, row in rows], zone),
            columns.integers([row.excluded for _, row in rows]),
            columns.text(row.estimator for _, row in rows),
        ],
    )


def _era_span(finding: Finding, number: int) -> tuple[int | None, int | None]:
    """Return when an era began and the next one did; None for the first's beginning, the last's end."""
    starts = {era.number: era.from_time for era in finding.eras}
    return starts.get(number), starts.get(number + 1)


def _capability(findings: Sequence[Finding], zone: ZoneInfo) -> bytes:
    """Return what is known of every era; the indices stay empty, because none is claimed yet."""
    rows: list[tuple[Finding, LevelSummary]] = [(f, s) for f in findings for s in f.summaries]
    wanted = [_specification(f, s.era, zone) for f, s in rows]
    nothing = columns.empty(len(rows))
    known = {
        "characteristic": columns.text(f.name for f, _ in rows),
        "era": columns.integers([s.era for _, s in rows]),
        "n": columns.integers([s.n for _, s in rows]),
        "lower_spec": columns.floats([w.lower for w in wanted]),
        "target": columns.floats([w.target for w in wanted]),
        "upper_spec": columns.floats([w.upper for w in wanted]),
        "mean": columns.floats([s.mean for _, s in rows]),
        "sigma_total": columns.floats([s.sigma_total for _, s in rows]),
        "outside_observed": columns.integers([s.outside_observed for _, s in rows]),
        "resolution": columns.floats([f.resolution for f, _ in rows]),
    }
    return columns.csv(CAPABILITY, [known.get(name, nothing) for name in CAPABILITY.split(",")])


def _specification(finding: Finding, era: int, zone: ZoneInfo) -> Specification:
    """Return the specification that held at the end of an era."""
    stop = next((e.stop_index for e in finding.eras if e.number == era), 0)
    end = _time(finding, stop - 1) if stop else None
    held = [
        s
        for s in finding.specification
        if s.from_ is None or end is None or to_microseconds(s.from_, zone) <= end
    ]
    return held[-1] if held else Specification()


def _files(intake: Intake, zone: ZoneInfo) -> bytes:
    files = intake.files
    return columns.csv(
        FILES,
        [
            columns.text(f.file for f in files),
            columns.text(f.source for f in files),
            columns.integers([f.bytes for f in files]),
            columns.integers([f.rows for f in files]),
            columns.integers([f.used for f in files]),
            columns.integers([f.filtered for f in files]),
            columns.integers([f.repeated for f in files]),
            columns.integers([f.corrected for f in files]),
            columns.integers([f.set_aside for f in files]),
            columns.text(f.encoding for f in files),
            columns.text(f.delimiter for f in files),
            columns.text(f.decimal for f in files),
            columns.optional_moments([f.first_time for f in files], zone),
            columns.optional_moments([f.last_time for f in files], zone),
        ],
    )


def _set_aside(intake: Intake) -> bytes:
    rows = intake.set_aside
    return columns.csv(
        SET_ASIDE,
        [
            columns.text(r.file for r in rows),
            columns.integers([r.line for r in rows]),
            columns.text(r.column for r in rows),
            columns.text(r.reason for r in rows),
            columns.text(r.text for r in rows),
        ],
    )
