"""From the text of `holdsteady.toml` to settings, or to everything that is wrong with it."""

from __future__ import annotations

import datetime as dt
import difflib
import re
import tomllib
from collections.abc import Collection, Iterable, Mapping
from pathlib import Path, PurePosixPath, PureWindowsPath
from typing import Any, TypeVar
from zoneinfo import ZoneInfo, available_timezones

from holdsteady.problems import Problem, SettingsError, Severity
from holdsteady.project.cross_checks import cross_faults
from holdsteady.project.faults import SETTINGS_FILE, Fault, Places, shown
from holdsteady.project.key_checks import in_order, key_faults
from holdsteady.project.not_yet import refused
from holdsteady.project.output_folder import output_fault
from holdsteady.project.settings import Characteristic, GivenLimits, Settings, Site, Source, Specification
from holdsteady.project.tables import ReadTable, read_table, unknown_key
from holdsteady.project.toml_lines import KeyPath

_TABLES = ("site", "defaults", "source", "characteristic")
_STAND_IN = {"id": "unnamed", "source": "unnamed"}
_NO_SECONDS = re.compile(r"=\s*[0-9]{4}-[0-9]{2}-[0-9]{2}[T ][0-9]{2}:[0-9]{2}(?![0-9:])")
_PLACE = re.compile(r" \(at (?:line (\d+), column \d+|end of document)\)$")
History = TypeVar("History", tuple[Specification, ...], tuple[GivenLimits, ...])


def read_settings(text: str, folder: Path) -> Settings:
    """Read and check the settings of the project in `folder`; nothing of the folder is read.

    `[defaults]` is laid under every characteristic, key by key: a key that a characteristic gives takes
    the place of the whole default.

    Raises
    ------
    SettingsError
        with every problem found, in the order of the file.
    """
    raw = _parse(text)
    places = Places(text, raw)
    tables = _top(raw, places)
    site, zone = _site(tables["site"], places)
    sources = _sources(tables["source"], places)
    if why := output_fault(folder, sources.values(), folder / site.output):
        places.add(("site", "output"), *why)
    defaults = _defaults(tables["defaults"], zone, places)
    characteristics = _characteristics(tables["characteristic"], defaults, sources, zone, places)
    if not raw.get("characteristic"):
        places.add(("characteristic",), "there is no characteristic", "Add a [[characteristic]] to watch.")
    if problems := places.sorted():
        raise SettingsError(*problems)
    return Settings(site=site, source=tuple(sources.values()), characteristic=tuple(characteristics))


def known_zone(name: str) -> ZoneInfo | None:
    """Return a time zone by its name, None where there is no such zone."""
    try:
        return ZoneInfo(name)
    except (OSError, ValueError, KeyError):  # a name may be a folder, a path or nothing at all
        return None


def _parse(text: str) -> dict[str, Any]:
    try:
        return tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        match = _PLACE.search(str(error))
        said = str(error)[: match.start()] if match else str(error)
        line = int(match[1]) if match and match[1] else len(text.rstrip().splitlines()) or 1
        remedy = "Correct this line; the settings could not be read any further."
        rows = text.splitlines()
        if 0 < line <= len(rows) and _NO_SECONDS.search(rows[line - 1]):
            remedy = "Write times with their seconds, as in 2026-03-17T14:10:00."
        problem = Problem(
            severity=Severity.ERROR,
            where=SETTINGS_FILE,
            what=f"is not valid TOML: {said[:1].lower()}{said[1:]}",
            remedy=remedy,
            line=line,
        )
        raise SettingsError(problem) from None


def _top(raw: Mapping[str, Any], places: Places) -> dict[str, Any]:
    """Return the four tables, empty where they are missing or of another shape."""
    not_yet = refused("", raw)
    for key, what in not_yet:
        places.add((key,), what.replace(f"`{key}`", f"[[{key}]]"), "Take it out for now.")
    for key in raw:
        if key not in _TABLES and key not in dict(not_yet):
            fault = unknown_key((key,), (*_TABLES, "study"))
            places.add((key,), fault.what, fault.remedy)
    tables: dict[str, Any] = {}
    for key in _TABLES:
        many = key in ("source", "characteristic")
        value = raw.get(key, [] if many else {})
        tables[key] = value
        items = value if many and isinstance(value, list) else [value]
        if isinstance(value, list) is not many or not all(isinstance(item, dict) for item in items):
            header = f"[[{key}]]" if many else f"[{key}]"
            places.add(
                (key,),
                "must be a list of tables" if many else "must be a table",
                f"Write {header} above its keys.",
            )
            tables[key] = [] if many else {}
    return tables


def _put(faults: Iterable[Fault], place: KeyPath, places: Places) -> None:
    for fault in faults:
        places.add((*place, *fault.keys[0]), fault.what, fault.remedy)


def _site(raw: Mapping[str, Any], places: Places) -> tuple[Site, ZoneInfo]:
    read = read_table("site", raw, Site, {})
    _put(read.faults, ("site",), places)
    site = read.model
    zone = known_zone(site.timezone)
    if zone is None:
        found = difflib.get_close_matches(site.timezone, sorted(available_timezones()), n=1)
        remedy = f"Did you mean '{found[0]}'?" if found else "Give one as in 'Europe/Lisbon'."
        places.add(("site", "timezone"), f"there is no time zone {shown(site.timezone)}", remedy)
    return site, zone or ZoneInfo("UTC")


def _sources(raw: list[Mapping[str, Any]], places: Places) -> dict[str, Source]:
    sources: dict[str, Source] = {}
    _distinct("source", raw, places)
    for index, table in enumerate(raw):
        read = read_table("source", table, Source, {"id": _STAND_IN["id"], "files": ("*",)})
        faults = [*read.faults, *(f for f in _source_faults(read.model) if not f.concerns(read.failed))]
        _put(faults, ("source", index), places)
        if "id" in read.failed:
            continue
        source = read.model
        if (
            "time" in read.failed
        ):  # it has times, in a way that cannot be used: no fault of those who need them
            source = source.model_copy(update={"time": "unnamed"})
        sources.setdefault(source.id, source)
    return sources


def _source_faults(source: Source) -> Iterable[Fault]:
    for index, pattern in enumerate(source.files):
        if why := _pattern_fault(pattern):
            remedy = "Give a pattern below the project folder, as in 'press/*.csv'."
            yield Fault(keys=(("files", index),), what=f"{shown(pattern)} {why}", remedy=remedy)
    if source.delimiter is not None and (len(source.delimiter) != 1 or source.delimiter in '"\r\n'):
        what = f"must be a single character, not {shown(source.delimiter)}"
        yield Fault(keys=(("delimiter",),), what=what, remedy='Write it as in ";" or, for a tab, "\\t".')
    if source.delimiter is not None and source.delimiter == source.decimal:
        what = f"delimiter and decimal mark are both {shown(source.decimal)}"
        yield Fault(
            keys=(("decimal",), ("delimiter",)), what=what, remedy="Leave out the one that is not sure."
        )
    yield from _key_faults(source)
    if source.time_format is not None:
        if source.time is None:
            yield Fault(
                keys=(("time_format",), ("time",)),
                what="goes with `time`, which is not given",
                remedy="Add `time`.",
            )
        if not _reads_back(source.time_format):
            what = f"{shown(source.time_format)} is no form of a date and time"
            yield Fault(keys=(("time_format",),), what=what, remedy="Write it as in '%d.%m.%Y %H:%M:%S'.")


def _key_faults(source: Source) -> Iterable[Fault]:
    if "key" in source.model_fields_set and not source.key:
        remedy = "Name something, or leave the key out."
        yield Fault(keys=(("key",),), what="must hold at least one item", remedy=remedy)
        return
    for index, column in enumerate(source.key):
        if column in source.key[:index]:
            what = f"names column {shown(column)} twice"
            yield Fault(keys=(("key", index),), what=what, remedy="Name each column once.")
    if "newest" in source.model_fields_set and not source.key:
        remedy = "Add `key`, the columns that tell one reading from another, or take `newest` out."
        yield Fault(keys=(("newest",), ("key",)), what="goes with `key`, which is not given", remedy=remedy)


def _pattern_fault(pattern: str) -> str:
    if not pattern.strip():
        return "names no file"
    if PurePosixPath(pattern).is_absolute() or PureWindowsPath(pattern).anchor:
        return "starts outside the project folder"
    if "\\" in pattern:
        return "holds a backslash; folders are separated by /"
    return "leads out of the project folder" if ".." in pattern.split("/") else ""


def _reads_back(time_format: str) -> bool:
    moment = dt.datetime(2026, 11, 23, 14, 15, 16, tzinfo=dt.UTC)
    try:
        read = dt.datetime.strptime(moment.strftime(time_format), time_format)  # noqa: DTZ007  only its date matters
    except ValueError:
        return False
    return read.date() == moment.date()


def _distinct(table: str, raw: list[Mapping[str, Any]], places: Places) -> None:
    """Ids differ in more than case: they become names of files."""
    seen: dict[str, tuple[str, int]] = {}
    for index, item in enumerate(raw):
        identifier = item.get("id")
        if not isinstance(identifier, str):
            continue
        if identifier.lower() in seen:
            other, first = seen[identifier.lower()]
            line = places.line((table, first, "id"))
            what = (
                f"id {shown(identifier)} is taken by the {table} on line {line}"
                if other == identifier
                else f"id {shown(identifier)} differs only in case from {shown(other)} on line {line}"
            )
            places.add((table, index, "id"), what, "Give each its own id.")
        seen.setdefault(identifier.lower(), (identifier, index))


def _defaults(raw: Mapping[str, Any], zone: ZoneInfo, places: Places) -> ReadTable[Characteristic]:
    """Read the defaults; a key that is wrong by itself is reported here, once, and laid under nothing."""
    if "id" in raw:
        places.add(
            ("defaults", "id"), "`id` belongs to a single characteristic", "Take it out of [defaults]."
        )
    raw = {key: value for key, value in raw.items() if key != "id"}
    read = read_table("characteristic", raw, Characteristic, _STAND_IN)
    faults = [
        f
        for f in read.faults
        if f.keys[0] not in (("id",), ("source",)) or f.what != f"`{f.keys[0][0]}` is missing"
    ]
    later = [fault for fault in key_faults(read.model, zone) if not fault.concerns(read.failed)]
    _put([*faults, *later], ("defaults",), places)
    bad = {str(path[0]) for fault in [*faults, *later] for path in fault.keys}
    return ReadTable(
        model=read.model,
        raw={key: value for key, value in read.raw.items() if key not in bad},
        failed=frozenset(bad),
        faults=(),
    )


def _characteristics(
    raw: list[Mapping[str, Any]],
    defaults: ReadTable[Characteristic],
    sources: Mapping[str, Source],
    zone: ZoneInfo,
    places: Places,
) -> list[Characteristic]:
    _distinct("characteristic", raw, places)
    return [_characteristic(table, index, defaults, sources, zone, places) for index, table in enumerate(raw)]


def _characteristic(
    raw: Mapping[str, Any],
    index: int,
    defaults: ReadTable[Characteristic],
    sources: Mapping[str, Source],
    zone: ZoneInfo,
    places: Places,
) -> Characteristic:
    own = read_table("characteristic", raw, Characteristic, _STAND_IN)
    faults = [
        fault
        for fault in own.faults
        if not (fault.what == "`source` is missing" and {"source"} & (defaults.raw.keys() | defaults.failed))
    ]
    _put(faults, ("characteristic", index), places)
    settings = Characteristic.model_validate({**_STAND_IN, **defaults.raw, **own.raw}, strict=True)
    failed = {str(path[0]) for fault in faults for path in fault.keys} | (defaults.failed - raw.keys())
    by_key = (f for f in key_faults(own.model, zone) if not f.concerns(own.failed))
    _put(by_key, ("characteristic", index), places)
    for fault in cross_faults(settings, sources, raw.keys()):
        if not fault.concerns(failed):
            _put_across(fault, index, raw, defaults.raw, places)
    return settings.model_copy(
        update={
            "specification": _sorted(settings.specification, zone),
            "limits": _sorted(settings.limits, zone),
        }
    )


def _put_across(
    fault: Fault, index: int, raw: Collection[str], defaults: Collection[str], places: Places
) -> None:
    """Place a fault at the first of its keys that the characteristic gives, else at that of the defaults."""
    for keys, place in ((raw, ("characteristic", index)), (defaults, ("defaults",))):
        for path in fault.keys:
            if not path or path[0] in keys:
                where: KeyPath = (*place, *path)
                places.add(where, fault.what, fault.remedy)
                return
    places.add(("characteristic", index, *fault.keys[0]), fault.what, fault.remedy)


def _sorted(history: History, zone: ZoneInfo) -> History:
    return tuple(history[index] for _, index in in_order(history, zone))
