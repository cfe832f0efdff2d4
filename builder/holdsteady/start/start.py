"""The use case: a folder of CSV files in, a commented `holdsteady.toml` in it."""

from __future__ import annotations

import contextlib
import datetime as dt
import os
from dataclasses import dataclass
from pathlib import Path
from zoneinfo import ZoneInfo

from holdsteady.intake.times_text import NO_TIME
from holdsteady.manifest import NAME as MANIFEST
from holdsteady.problems import Problem, SettingsError, Severity
from holdsteady.project.faults import SETTINGS_FILE
from holdsteady.project.read_settings import known_zone, read_settings
from holdsteady.project.settings import Settings, Site
from holdsteady.start import words
from holdsteady.start.compose import compose
from holdsteady.start.draft import Draft, SiteDraft
from holdsteady.start.sources import Found, find_sources
from holdsteady.start.survey import Progress, Survey, look_through
from holdsteady.start.toml_text import toml_text
from holdsteady.times import to_datetime, to_microseconds

_OUTPUTS = ("site", "holdsteady-site")
_LONG_AGO = dt.timedelta(days=14)
_ZONE_FILES = (Path("/etc/localtime"), Path("/etc/timezone"))


@dataclass(frozen=True, slots=True, kw_only=True)
class Started:
    """What was written where, and what it says."""

    path: Path
    draft: Draft
    settings: Settings


def start(
    folder: Path, *, now: dt.datetime | None = None, zone: str | None = None, progress: Progress | None = None
) -> Started:
    """Look through a folder and write its first settings.

    Parameters
    ----------
    folder: where measurement files lie, at any depth.
    now: the moment that nothing can be later than; left out: the clock.
    zone: name of the plant's time zone; left out: the system's, where it tells one.
    progress: told how far the looking is.

    Raises
    ------
    SettingsError: the folder is none, has settings already, or holds nothing that could be charted;
        nothing was written.
    """
    _refuse(folder)
    name, why = (zone, "as asked for") if zone is not None else system_zone()
    plant = known_zone(name) or ZoneInfo("UTC")
    moment = now or dt.datetime.now(plant)
    survey = look_through(folder, Site(output=_output(folder)), progress)
    found = find_sources(survey, to_microseconds(moment, plant), plant, progress)
    draft = _drafted(survey, found, moment=moment.astimezone(plant), zone=name, zone_why=why)
    text = toml_text(draft)
    settings = _loaded(text, folder)
    path = folder / SETTINGS_FILE
    _write(path, text)
    return Started(path=path, draft=draft, settings=settings)


def system_zone() -> tuple[str, str]:
    """Return the name of the system's time zone and where it was found; UTC where nothing tells one."""
    candidates = [os.environ.get("TZ", "").lstrip(":")]
    with contextlib.suppress(OSError):
        candidates.append(str(_ZONE_FILES[0].resolve()).rpartition("zoneinfo/")[2])
    with contextlib.suppress(OSError, UnicodeDecodeError):
        candidates.append(_ZONE_FILES[1].read_text(encoding="utf-8").strip())
    for name in candidates:
        if name and not name.startswith("/") and known_zone(name) is not None:
            return name, "this computer's; name the plant's where it is another"
    return "UTC", 'not known; name the plant\'s, as in "Europe/Lisbon"'


def _refuse(folder: Path) -> None:
    if not folder.is_dir():
        what, remedy = "is no folder", "Name the folder that holds the measurement files."
        raise SettingsError(_problem(str(folder), what, remedy))
    path = folder / SETTINGS_FILE
    if path.exists() or path.is_symlink():
        remedy = f"Build with it: `holdsteady build {folder}`; to start anew, move it away first."
        raise SettingsError(_problem(str(path), "is there already, and nothing is overwritten", remedy))


def _output(folder: Path) -> str:
    """Return a name for the published folder that nobody else's folder has."""
    for name in _OUTPUTS:
        place = folder / name
        if not place.exists() or (place / MANIFEST).exists():
            return name
    return words.unique(_OUTPUTS[0], [entry.name for entry in folder.iterdir()])


def _drafted(survey: Survey, found: list[Found], *, moment: dt.datetime, zone: str, zone_why: str) -> Draft:
    taken: list[str] = []
    sources = []
    left = list(survey.left)
    for one in found:
        source = compose(one, taken)
        if source is None:
            left += [
                (file.name, "no column of numbers that vary") for part in one.series for file, _ in part.files
            ]
        else:
            sources.append(source)
    if not sources:
        raise SettingsError(_nothing(survey.folder, left))
    newest = max((int(one.time.time.max()) for one in found if one.time.time.size), default=NO_TIME)
    site = _site(survey, newest, moment=moment, zone=zone, zone_why=zone_why)
    return Draft(site=site, sources=tuple(sources), left=tuple(sorted(left)))


def _nothing(folder: Path, left: list[tuple[str, str]]) -> Problem:
    if not left:
        what, remedy = "holds no .csv, .tsv or .txt file", "Name the folder that holds the measurement files."
    else:
        shown = "; ".join(f"{name}: {why}" for name, why in left[:3])
        what = f"holds nothing that could be charted ({shown}{'; …' if len(left) > 3 else ''})"
        remedy = "Export tables with a header line and numbers below it."
    return _problem(str(folder), what, remedy)


def _site(survey: Survey, newest: int, *, moment: dt.datetime, zone: str, zone_why: str) -> SiteDraft:
    today = moment.date()
    if newest == NO_TIME:
        day, why, as_of = today, "the day this was taken up", None
    else:
        last = to_datetime(newest, ZoneInfo("UTC")).replace(tzinfo=None)
        day, as_of = min(today, last.date()), None
        why = "the day this was taken up: what was over before is history, not work"
        if last.date() < today - _LONG_AGO:
            why = "the day of the newest reading: what was over before is history, not work"
            as_of = last.replace(second=0, microsecond=0) + dt.timedelta(minutes=1)
        else:
            day = today
    return SiteDraft(
        title=words.as_title(survey.folder.resolve().name) or "Measurements",
        output=survey.site.output,
        timezone=zone,
        timezone_why=zone_why,
        watch_from=day,
        watch_from_why=why,
        as_of=as_of,
    )


def _loaded(text: str, folder: Path) -> Settings:
    """Read back what is to be written; what does not load is a fault of ours and is not written."""
    try:
        return read_settings(text, folder)
    except SettingsError as error:
        raise RuntimeError(f"the settings made for this folder do not load: {error}") from error


def _write(path: Path, text: str) -> None:
    try:
        with path.open("x", encoding="utf-8", newline="\n") as stream:
            stream.write(text)
    except FileExistsError:
        what, remedy = (
            "came to be meanwhile, and nothing is overwritten",
            "Look at it, or move it away first.",
        )
        raise SettingsError(_problem(str(path), what, remedy)) from None
    except OSError as error:
        what = f"cannot be written: {error.strerror or error}"
        raise SettingsError(_problem(str(path), what, "Give the right to write in this folder.")) from None


def _problem(where: str, what: str, remedy: str) -> Problem:
    return Problem(severity=Severity.ERROR, where=where, what=what, remedy=remedy)
