"""Writes the sample's measurement files and its limits register: from the same seed the same bytes.

`python sample-project/make_sample.py [FOLDER]` rewrites every CSV but the logbook, which, like the
settings, was written by hand. Osmire Filterworks is invented, and so is everything it measures.
"""

from __future__ import annotations

import csv
import datetime as dt
import io
import sys
from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass, replace
from pathlib import Path
from zoneinfo import ZoneInfo

import numpy as np

from holdsteady.intake.read import read
from holdsteady.monitor.finding import Finding, LimitsInForce
from holdsteady.monitor.monitor import monitor_all
from holdsteady.project.load import load_project
from holdsteady.project.register import COLUMNS, Register, RegisterLine, next_check, to_cells
from holdsteady.times import to_microseconds

HERE = Path(__file__).resolve().parent
SEED = 2610
FIRST = dt.date(2025, 11, 3)
NOW = dt.datetime.fromisoformat("2026-03-17T14:10")
CLOSED = (dt.date(2025, 12, 24), dt.date(2026, 1, 5))  # over the turn of the year, half-open
NEW_DIE = dt.datetime.fromisoformat("2026-01-12T06:00")
FRIDAY_LATE = dt.datetime.fromisoformat("2026-03-13T14:00")
WORN_INSERT = dt.datetime.fromisoformat("2026-03-16T07:00")

Files = dict[str, str]
Row = tuple[dt.datetime, str]

# A quiet process still signals now and then. These draws were taken again until such signals neither hide
# the story nor crowd the fortnight it happens in: the sample shows fewer of them than chance would.
REDRAWN = {
    "slip room": 3, "press 1": 3, "press 2": 39, "press 3": 14, "green height": 32, "scale A": 4, "kiln 2": 8,
    "burst": 17, "flow A": 3, "flow B": 1, "turbidity": 1, "chlorine": 2,
}  # fmt: skip


def generator(name: str) -> np.random.Generator:
    """A stream of its own for each gauge, so that changing one leaves the others alone."""
    return np.random.default_rng([SEED, REDRAWN.get(name, 0), *name.encode()])


def days(*, saturdays: bool = False) -> list[dt.date]:
    """The days worked, up to and with the last one."""
    span = (FIRST + dt.timedelta(days=k) for k in range((NOW.date() - FIRST).days + 1))
    return [d for d in span if d.weekday() < 5 + saturdays and not CLOSED[0] <= d < CLOSED[1]]


def moments(
    rng: np.random.Generator, clock: Sequence[str], worked: Iterable[dt.date], *, late: int = 6
) -> list[dt.datetime]:
    """Each day's clock times, each up to `late` minutes after the hour it was due."""
    due = [dt.datetime.combine(d, dt.time.fromisoformat(t)) for d in worked for t in clock]
    delay = rng.integers(0, late * 60 + 1, len(due))
    return [
        m for m in (d + dt.timedelta(seconds=int(s)) for d, s in zip(due, delay, strict=True)) if m <= NOW
    ]


def between(moment: dt.datetime, start: str, stop: str) -> bool:
    """Whether a moment lies in [start, stop)."""
    return dt.datetime.fromisoformat(start) <= moment < dt.datetime.fromisoformat(stop)


def filed(rows: Iterable[Row], pattern: str, header: str) -> Files:
    """Share rows out to files, in order, each under its header; `pattern` knows {week}, {month} and {day}."""
    files: dict[str, list[str]] = {}
    for moment, row in rows:
        name = pattern.format(week=week(moment), month=f"{moment:%Y-%m}", day=f"{moment:%Y-%m-%d}")
        files.setdefault(name, [header]).append(row)
    return {path: "\n".join(lines) + "\n" for path, lines in files.items()}


def week(moment: dt.datetime) -> str:
    """The ISO week as planners write it."""
    year, number, _ = moment.isocalendar()
    return f"{year}-W{number:02d}"


def insert(files: Files, path: str, line: int, text: str) -> None:
    """Put a line into a file, so that it stands on the given line."""
    lines = files[path].split("\n")
    files[path] = "\n".join([*lines[: line - 1], text, *lines[line - 1 :]])


def spoil(files: Files, path: str, line: int, cell: int, text: str | None, mark: str = ",") -> None:
    """Put another text into a cell of a line, or (None) break the line off before it."""
    lines = files[path].split("\n")
    cells = lines[line - 1].split(mark)
    lines[line - 1] = mark.join(cells[:cell] if text is None else [*cells[:cell], text, *cells[cell + 1 :]])
    files[path] = "\n".join(lines)


def slip_room() -> Files:
    """Viscosity, density and sieve residue of each batch: a viscometer's export in the local manner."""
    rng = generator("slip room")
    rows: list[Row] = []
    for number, moment in enumerate(moments(rng, ("06:40", "10:40", "15:10"), days(), late=20), start=4101):
        high = 17.0 if between(moment, "2026-02-02T10:00", "2026-02-06T12:00") else 0.0
        for check, extra in (("mixed", 46.0), ("release", high)):
            viscosity = rng.normal(852 + extra, 9.0)
            density, residue = rng.normal(1.6424, 0.0036), rng.normal(0.187, 0.028)
            at = moment + dt.timedelta(minutes=95 if check == "release" else 0)
            if at <= NOW:
                cells = f"{viscosity:.0f};{density:.3f};{residue:.2f}".replace(".", ",")
                rows.append((at, f"{at:%d.%m.%Y %H:%M};{number};{check};{cells}"))
    rows.sort(key=lambda row: row[0])
    header = (
        "Osmire Filterworks;;;;;\nStation;Slip room;;;;\nInstrument;Rotary 2, spindle 27;;;;\n\n"
        "Date;Batch;Check;Viscosity;Density;Residue\n;;;mPa s;g/cm3;%"
    )
    return filed(rows, "slip room/Slip room {week}.csv", header)


def presses() -> Files:
    """Five bores of one sample every second hour, a file per press and week."""
    files: Files = {}
    for press in (1, 2, 3):
        rng = generator(f"press {press}")
        rows: list[Row] = []
        clock = [f"{hour:02d}:02" for hour in range(6, 22, 2)]
        for number, moment in enumerate(moments(rng, clock, days()), start=1):
            for cavity, bore in enumerate(rng.normal(bore_mean(press, moment), 0.0085, 5), start=1):
                at = moment + dt.timedelta(seconds=14 * (cavity - 1))
                rows.append((at, f"{at:%Y-%m-%d %H:%M:%S},{press},P{press}-{number:04d},{cavity},{bore:.3f}"))
        header = "stamp,press,sample,cavity,bore_mm"
        files |= filed(rows, f"press/Press {press} {{week}}.csv", header)
    return files


def bore_mean(press: int, moment: dt.datetime) -> float:
    """What a press makes in the long run: press 2 got a new die, whose insert then wore."""
    if press != 2:
        return 12.0020 if press == 1 else 12.0000
    if moment < NEW_DIE:
        return 11.9955
    return 12.0010 if moment < WORN_INSERT else 11.9930


def green_height() -> Files:
    """Five heights side by side in one row, separated by tabs."""
    rng = generator("green height")
    rows: list[Row] = []
    for moment in moments(rng, ("07:15", "12:15", "18:15"), days(), late=25):
        mean = 254.055 if between(moment, "2025-12-09T06:00", "2025-12-12T14:00") else 254.01
        heights = "\t".join(f"{h:.2f}" for h in rng.normal(mean, 0.06, 5))
        rows.append((moment, f"{moment:%Y-%m-%dT%H:%M:%S}\t{heights}"))
    return filed(rows, "height gauge/green height {week}.tsv", "time\th1\th2\th3\th4\th5")


def body_weight() -> Files:
    """Five bodies put on the scale one after the other, four times a day and line."""
    files: Files = {}
    for line, mean in (("A", 186.2), ("B", 185.7)):
        rng = generator(f"scale {line}")
        rows: list[Row] = []
        for moment in moments(rng, ("07:00", "10:30", "15:00", "19:30"), days(), late=30):
            for piece, weight in enumerate(rng.normal(mean, 0.9, 5)):
                at = moment + dt.timedelta(seconds=21 * piece)
                rows.append((at, f"{at:%d/%m/%Y %H:%M:%S},{line},{weight:.1f}"))
        files |= filed(rows, f"scales/Line {line} {{week}}.csv", "weighed at,line,weight")
    return files


def press_stops() -> Files:
    """Stops of the press hall in each shift, in the one file the foremen keep."""
    rng = generator("press stops")
    rows: list[Row] = []
    for moment in moments(rng, ("14:00", "22:00"), days(), late=0):
        damp = between(moment, "2026-03-04T14:00", "2026-03-05T22:00")
        rows.append((moment, f"{moment:%Y-%m-%d %H:%M},{rng.poisson(15 if damp else 5.2)}"))
    return filed(rows, "press hall/stops per shift.csv", "shift end,stops")


def kilns() -> Files:
    """Peak temperature of each firing, and the shrinkage of three to six rings fired along with it."""
    files: Files = {}
    rings: list[Row] = []
    for kiln, mean in ((1, 1148.6), (2, 1149.4), (3, 1147.9)):
        rng = generator(f"kiln {kiln}")
        rows: list[Row] = []
        for number, moment in enumerate(
            moments(rng, (f"0{kiln + 5}:20",), days(saturdays=True), late=40), start=1
        ):
            if kiln == 3 and between(moment, "2026-02-09T00:00", "2026-02-23T00:00"):
                continue
            trial = rng.random() < 0.03
            peak = rng.normal(mean + (25 if trial else 0), 2.1) + (6.4 if (kiln, number) == (2, 17) else 0)
            firing = f"K{kiln}-{number:03d}"
            programme = "trial" if trial else "standard"
            rows.append((moment, f"{moment:%Y-%m-%d %H:%M},{kiln},{firing},{programme},{peak:.1f}"))
            if kiln == 1 and not trial:
                wrong = 0.45 if number == 11 else 0.0
                cooled = f"{moment + dt.timedelta(hours=5):%Y-%m-%d %H:%M}"
                shrinkages = rng.normal(11.42 + wrong, 0.11, rng.integers(3, 7))
                rings += [(moment, f"{cooled},{firing},{shrinkage:.2f}") for shrinkage in shrinkages]
        files |= filed(
            rows, f"kilns/Kiln {kiln} firings {{month}}.csv", "opened,kiln,firing,programme,peak_c"
        )
    return files | filed(rings, "kilns/rings/shrinkage {month}.csv", "measured,firing,shrinkage_pct")


def kiln_exit() -> Files:
    """A laser behind the kilns that measures what comes by, a file a day."""
    rng = generator("kiln exit")
    rows: list[Row] = []
    for day in days():
        for start in (6, 8, 12, 16, 20):
            first = dt.datetime.combine(day, dt.time(start, 10))
            ticks = np.sort(rng.integers(0, 6000, rng.integers(3, 6)))
            for tick, length in zip(ticks, rng.normal(250.04, 0.118, ticks.size), strict=True):
                at = first + dt.timedelta(seconds=int(tick))
                if at <= NOW:
                    rows.append((at, f"{at:%Y-%m-%dT%H:%M:%S},{length:.2f}"))
    return filed(rows, "kiln exit/{day}.csv", "t,length_mm")


def inspection() -> Files:
    """Final inspection by shift and lot, and cracks among 120 bodies of each shift."""
    rng = generator("inspection")
    lots: list[Row] = []
    for number, moment in enumerate(moments(rng, ("13:40", "21:40"), days(), late=15), start=301):
        inspected = int(rng.integers(380, 620))
        pinholes = rng.binomial(
            inspected, 0.062 if between(moment, "2026-03-10T06:00", "2026-03-10T22:00") else 0.021
        )
        flaws = rng.poisson(0.088 * inspected)
        lots.append((moment, f"{moment:%Y-%m-%d %H:%M},L{number},{inspected},{pinholes},{flaws}"))
    files = filed(
        lots,
        "inspection/final inspection {month}.csv",
        "shift end,lot,inspected,pinhole rejects,glaze flaws",
    )
    rng = generator("cracks")
    shifts = moments(rng, ("13:50", "21:50"), days(), late=10)
    cracks: list[Row] = [(m, f"{m:%Y-%m-%d %H:%M},{rng.binomial(120, 0.05)}") for m in shifts]
    files |= filed(cracks, "inspection/cracks {month}.csv", "shift end,cracked")
    return files


def bench() -> Files:
    """Burst pressure and flow of finished cartridges."""
    rng = generator("burst")
    rows: list[Row] = []
    for number, moment in enumerate(
        moments(rng, ("06:30", "10:30", "14:30", "18:30"), days(), late=20), start=1
    ):
        spread = 1.15 if moment >= FRIDAY_LATE else 0.55
        for piece, pressure in enumerate(rng.normal(12.4, spread, 5)):
            at = moment + dt.timedelta(seconds=48 * piece)
            rows.append((at, f"{at:%Y-%m-%d %H:%M:%S},B{number:04d},{pressure:.2f}"))
    files = filed(rows, "test bench/burst {week}.csv", "stamp,set,burst_bar")
    for line, mean in (("A", 418.0), ("B", 421.5)):
        rng = generator(f"flow {line}")
        flows: list[Row] = []
        for moment in moments(rng, ("09:00", "17:00"), days(), late=30):
            cells = ",".join(f"{flow:.1f}" for flow in rng.normal(mean, 6.5, 4))
            flows.append((moment, f"{moment:%Y-%m-%d %H:%M:%S},{line},{cells}"))
        files |= filed(flows, f"test bench/flow line {line} {{month}}.csv", "stamp,line,f1,f2,f3,f4")
    return files


def laboratory() -> Files:
    """Turbidity behind the filter twice a day; chlorine retention, whose meter went away for repair."""
    rng = generator("turbidity")
    rows: list[Row] = []
    for moment in moments(rng, ("08:30", "16:30"), days(), late=45):
        lamp = between(moment, "2026-03-05T06:00", "2026-03-07T00:00")
        rows.append((moment, f"{moment:%Y-%m-%d %H:%M},{rng.normal(0.36 if lamp else 0.182, 0.024):.3f}"))
    files = filed(rows, "laboratory/turbidity {month}.csv", "sampled,ntu")
    rng = generator("chlorine")
    tuesdays = [d for d in days() if d.weekday() in (1, 3) and d < dt.date(2026, 2, 25)]
    chlorine: list[Row] = [
        (m, f"{m:%Y-%m-%d %H:%M},{rng.normal(94.6, 0.8):.1f}")
        for m in moments(rng, ("11:00",), tuesdays, late=60)
    ]
    return files | filed(chlorine, "laboratory/chlorine retention.csv", "sampled,retention_pct")


def cap_torque() -> Files:
    """The new capping station, running for less than a week."""
    rng = generator("cap torque")
    rows: list[Row] = []
    for number, moment in enumerate(
        moments(rng, ("11:20",), [d for d in days() if d >= dt.date(2026, 3, 12)]), start=1
    ):
        for piece, torque in enumerate(rng.normal(1.84, 0.07, 5)):
            at = moment + dt.timedelta(seconds=33 * piece)
            rows.append((at, f"{at:%Y-%m-%d %H:%M:%S},T{number:02d},{torque:.2f}"))
    return filed(rows, "capping/torque {month}.csv", "stamp,sample,torque_nm")


STATIONS = (
    slip_room, presses, green_height, body_weight, press_stops, kilns, kiln_exit, inspection, bench,
    laboratory, cap_torque,
)  # fmt: skip


def mishaps(files: Files) -> None:
    """What gauges, loggers and people leave behind in files, here and there."""
    spoil(files, "slip room/Slip room 2025-W49.csv", 12, 3, "-999", ";")
    spoil(files, "slip room/Slip room 2026-W03.csv", 20, 5, "ERR", ";")
    insert(files, "slip room/Slip room 2026-W09.csv", 15, "30.02.2026 08:15;4431;release;851;1,640;0,19")
    insert(files, "slip room/Slip room 2026-W10.csv", 37, "Signed off: shift leader;;;;;")
    spoil(files, "press/Press 1 2025-W47.csv", 58, 4, "ERR")
    spoil(files, "press/Press 3 2026-W06.csv", 131, 3, None)
    insert(files, "press/Press 1 2026-W08.csv", 82, "stamp,press,sample,cavity,bore_mm")
    spoil(files, "height gauge/green height 2026-W05.tsv", 9, 5, "", "\t")
    spoil(files, "scales/Line B 2026-W04.csv", 44, 2, "186.0 g")
    spoil(files, "inspection/final inspection 2025-12.csv", 14, 3, "-1")
    insert(files, "test bench/burst 2026-W02.csv", 31, "*** bench restarted ***")
    for month, line in (("2025-11", 20), ("2026-01", 9), ("2026-02", 31)):
        spoil(files, f"laboratory/turbidity {month}.csv", line, 1, "<0.05")


def measurements() -> Files:
    """Every measurement file: its path below the project folder and its text, line ends as in the file."""
    files = {path: text for station in STATIONS for path, text in station().items()}
    mishaps(files)
    for path, text in files.items():
        if path.startswith("slip room/"):
            files[path] = text.replace("\n", "\r\n")
        if path.startswith("height gauge/"):
            files[path] = "\ufeff" + text
    return files


@dataclass(frozen=True, slots=True, kw_only=True)
class Adoption:
    """One sitting in which limits were adopted: of which characteristics and which era."""

    moment: dt.datetime
    names: Callable[[str], bool]
    era: int
    reason: str
    by: str = "A. R."


ADOPTIONS = (
    Adoption(
        moment=dt.datetime.fromisoformat("2026-01-05T09:30"),
        names=lambda name: name not in {"cap-torque", "chlorine"},
        era=1,
        reason="First limits, from November and December",
    ),
    Adoption(
        moment=dt.datetime.fromisoformat("2026-01-21T08:15"),
        names=lambda name: name == "bore[press=2]",
        era=2,
        reason="New die on press 2 since 12 January",
    ),
)


def adopted(findings: Sequence[Finding], zone: ZoneInfo) -> str:
    """The register that follows from findings made without one, each line chained to the one before."""
    table = io.StringIO()
    writer = csv.writer(table, lineterminator="\n")
    writer.writerow(COLUMNS)
    check = ""
    for adoption in ADOPTIONS:
        for finding in findings:
            for limits in finding.limits if adoption.names(finding.name) else ():
                if limits.era == adoption.era and limits.kind == "provisional":
                    cells = to_cells(register_line(finding, limits, adoption, zone), zone)
                    check = next_check(check, cells)
                    writer.writerow([*cells, check])
    return table.getvalue()


def register_line(
    finding: Finding, limits: LimitsInForce, adoption: Adoption, zone: ZoneInfo
) -> RegisterLine:
    """One line: what was provisional, in force from the sitting on."""
    panel = next(panel for panel in finding.panels if panel.name == limits.panel)
    moment = to_microseconds(adoption.moment, zone)
    # Where the size varies a panel has no one centre line; its mean over the baseline stands for it.
    centre = limits.centre or float(panel.centre[panel.in_baseline].mean())
    return RegisterLine(
        line=0,
        characteristic=finding.name,
        chart=finding.chart,
        panel=limits.panel,
        era_from=finding.eras[limits.era - 1].from_time,
        in_force_from=moment,
        centre=stable(centre),
        sigma=None if limits.sigma is None else stable(limits.sigma),
        parameters={},
        width=finding.settings.width,
        rules=" ".join(rule.name for rule in panel.rules),
        n=limits.n,
        points=limits.points,
        baseline_from=limits.baseline_from,
        baseline_to=limits.baseline_to,
        excluded=limits.excluded,
        estimator=limits.estimator,
        reason=adoption.reason,
        by=adoption.by,
        adopted_at=moment,
        version="0.1.0",
        check="",
    )


def stable(number: float) -> float:
    """Twelve digits: the last ones of a sum depend on the machine, and the register's bytes should not."""
    return float(f"{number:.12g}")


def main(folder: Path) -> None:
    """Write the measurement files, then adopt limits from them by the settings and logbook of the folder."""
    for path, text in measurements().items():
        target = folder / path
        target.parent.mkdir(parents=True, exist_ok=True)
        target.write_bytes(text.encode())
    project = replace(load_project(folder), register=Register())
    as_of = to_microseconds(NOW, project.zone)
    intake = read(folder, project.settings, as_of=as_of, zone=project.zone)
    findings = monitor_all(intake, project, as_of=as_of)
    (folder / "limits.csv").write_bytes(adopted(findings, project.zone).encode())


if __name__ == "__main__":
    main(Path(sys.argv[1]) if len(sys.argv) > 1 else HERE)
