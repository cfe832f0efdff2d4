"""Which series of files are one source: those that a column tells apart, or that follow each other."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import groupby, pairwise, takewhile
from pathlib import Path
from zoneinfo import ZoneInfo

from holdsteady.intake.times_text import NO_TIME
from holdsteady.start import words
from holdsteady.start.facts import Table, measure
from holdsteady.start.guess_time import TimeGuess, guess_time
from holdsteady.start.rows import read_rows
from holdsteady.start.survey import WILD, Progress, Series, Survey

_MOST_FILES = 200
_FEW_FILES = 8
_MOST_BYTES = 8_000_000  # looked at in a source
_FIRST_BYTES = 32_000_000  # looked at in all series, to see which belong together
_LEAST_BYTES = 16_384  # of a file


@dataclass(frozen=True, slots=True, kw_only=True)
class Found:
    """The files of one source, `globs` that match them and no other table, and what is in them.

    `name` is what its files, or else its folder, are called, for titles.
    """

    id: str
    name: str
    series: tuple[Series, ...]
    globs: tuple[str, ...]
    table: Table
    time: TimeGuess


def find_sources(survey: Survey, now: int, zone: ZoneInfo, progress: Progress | None = None) -> list[Found]:
    """Read rows of all series, and join those that belong together."""
    looked: list[_Looked] = []
    at_first = min(_MOST_BYTES, _FIRST_BYTES // max(len(survey.series), 1))
    for done, series in enumerate(survey.series):
        looked.append(_look(series, now, zone, most_bytes=at_first))
        if progress is not None:
            progress("Reading rows", done + 1, len(survey.series))
    joined = [group for alike in _alike(looked) for group in _join(alike)]
    joined = [group for group in joined if group[0].table.rows.count]
    joined.sort(key=lambda group: group[0].series.files[0][0].name)
    all_files = {name: index for index, group in enumerate(joined) for name in _files(group)}
    taken: list[str] = []
    found = []
    for index, group in enumerate(joined):
        whole = group[0]
        if len(group) > 1 or whole.table.rows.left_out:
            whole = _look(_united([one.series for one in group]), now, zone, most_bytes=_MOST_BYTES)
        name = words.unique(_name(group, joined) or "source", taken)
        taken.append(name)
        found.append(
            Found(
                id=name,
                name=_stem(group)
                or group[0].series.folder.rpartition("/")[2].replace(WILD, " ").strip()
                or name,
                series=tuple(one.series for one in group),
                globs=_globs(group, index, all_files, survey),
                table=whole.table,
                time=whole.time,
            )
        )
    return found


@dataclass(frozen=True, slots=True, kw_only=True)
class _Looked:
    series: Series
    table: Table
    time: TimeGuess


def _look(series: Series, now: int, zone: ZoneInfo, *, most_bytes: int) -> _Looked:
    sizes = [_size(one.path) for one, _ in series.files]
    files, breaks = list(series.files), [False] * len(series.files)
    if len(files) > _MOST_FILES or (sum(sizes) > most_bytes and len(files) > _FEW_FILES):
        # Unbroken stretches at both ends, so that pauses between files are what they seem.
        share = max(_FEW_FILES, min(_MOST_FILES, int(len(files) * most_bytes / max(sum(sizes), 1))))
        head, tail = share // 4, share - share // 4
        if head + tail < len(files):
            files = [*files[:head], *files[-tail:]]
            breaks = [index == head for index in range(len(files))]
    most = max(_LEAST_BYTES, most_bytes // len(files))
    rows = read_rows(files, series.names, most_bytes=most, breaks=breaks)
    table = measure(rows, series.files[0][1].delimiter)
    return _Looked(series=series, table=table, time=guess_time(table, now, zone))


def _size(path: Path) -> int:
    try:
        return path.stat().st_size
    except OSError:
        return 0


def _united(series: Sequence[Series]) -> Series:
    files = sorted((one for part in series for one in part.files), key=lambda one: one[0].name)
    names = tuple(dict.fromkeys(name for part in series for name in part.names))
    first = series[0]
    return Series(folder=first.folder, stem=first.stem, ending=first.ending, names=names, files=tuple(files))


def _alike(looked: list[_Looked]) -> list[list[_Looked]]:
    def columns(one: _Looked) -> list[str]:
        return sorted(one.series.names)

    return [list(group) for _, group in groupby(sorted(looked, key=columns), key=columns)]


def _join(alike: list[_Looked]) -> list[list[_Looked]]:
    """Join series of the same columns; all that a column tells apart, else those that follow each other."""
    alike = sorted(alike, key=lambda one: (one.series.folder, one.series.stem, one.series.ending))
    if len(alike) == 1 or _told_apart(alike):
        return [alike]
    groups: list[list[_Looked]] = []
    for _, group in groupby(alike, key=lambda one: (one.series.folder, _without_digits(one.series.stem))):
        parts = list(group)
        groups += (
            [parts] if len(parts) > 1 and (_told_apart(parts) or _follow(parts)) else [[one] for one in parts]
        )
    return groups


def _told_apart(series: Sequence[_Looked]) -> bool:
    """Whether some column has one text in each series and another in every other."""
    times = {name for one in series for name in one.time.spoken_for}
    for name in series[0].series.names:
        if name in times:
            continue
        kinds = [one.table.facts[name].kinds for one in series]
        if all(len(one) == 1 for one in kinds) and len(set(kinds)) == len(series):
            return True
    return False


def _without_digits(stem: str) -> str:
    return "".join(character for character in stem if not character.isdigit())


def _follow(series: Sequence[_Looked]) -> bool:
    """Whether the times of the series do not overlap, or none has any."""
    spans = []
    for one in series:
        known = one.time.time[one.time.time != NO_TIME]
        if known.size:
            spans.append((int(known.min()), int(known.max())))
    if not spans:
        return True
    return len(spans) == len(series) and all(
        before[1] <= after[0] for before, after in pairwise(sorted(spans))
    )


def _files(group: Sequence[_Looked]) -> list[str]:
    return [one.name for part in group for one, _ in part.series.files]


def _name(group: Sequence[_Looked], joined: Sequence[Sequence[_Looked]]) -> str:
    """Name a source after its folder, or after its files where the folder holds other tables too."""
    folder = group[0].series.folder
    same = {one.series.folder for one in group}
    others = [one for other in joined if other is not group for one in other if one.series.folder in same]
    last = words.as_id(folder.rpartition("/")[2].replace(WILD, " "))
    stem = words.as_id(_stem(group))
    if folder and not others and len(same) == 1:
        return last or stem
    return stem or last


def _stem(group: Sequence[_Looked]) -> str:
    """Return what the names of a group's files have in common, whole words of it, without dates."""
    shared = _common(group)
    if len({one.series.stem for one in group}) > 1:
        shared = shared.rstrip("0123456789")
    return shared.replace(WILD, " ").strip(" _-.")


def _common(group: Sequence[_Looked]) -> str:
    stems = sorted({one.series.stem for one in group})
    if len(stems) == 1:
        return stems[0]
    first, last = stems[0], stems[-1]
    same = takewhile(lambda pair: pair[0] == pair[1], zip(first, last, strict=False))
    shared = "".join(character for character, _ in same)
    return shared[: max((at + 1 for at, c in enumerate(shared) if c in " _-." + WILD), default=len(shared))]


def _globs(
    group: Sequence[_Looked], index: int, all_files: dict[str, int], survey: Survey
) -> tuple[str, ...]:
    """Return the widest globs that match the group's files and no table of another group."""
    folders = {(one.series.folder, one.series.ending): None for one in group}
    stems = {(one.series.folder, one.series.stem, one.series.ending): None for one in group}
    tries = [
        tuple(dict.fromkeys(_glob(folder, WILD, ending) for folder, ending in folders)),
        tuple(
            dict.fromkeys(
                _glob(folder, _common(group).rstrip(WILD) + WILD, ending) for folder, ending in folders
            )
        ),
        tuple(
            dict.fromkeys(_glob(folder, stem.rstrip(WILD) + WILD, ending) for folder, stem, ending in stems)
        ),
        tuple(dict.fromkeys(_glob(folder, stem, ending) for folder, stem, ending in stems)),
    ]
    own = {name for name, of in all_files.items() if of == index}
    for globs in tries:
        matched = {one.name for one in survey.scanner.files(globs)}
        if own <= matched and not any(all_files.get(name, index) != index for name in matched):
            return globs
    return tuple(_literal(name) for name in sorted(own))


def _glob(folder: str, stem: str, ending: str) -> str:
    path = f"{folder}/{stem}{ending}" if folder else f"{stem}{ending}"
    return "*".join(map(_literal, path.split(WILD)))


def _literal(text: str) -> str:
    """Return a piece of a path so that a glob matches it as it is, or as nearly as settings can say it."""
    result = []
    for character in text:
        if character in "*?[":
            result.append(f"[{character}]")
        elif character in "\\:" or not character.isprintable() or "\ud800" <= character <= "\udfff":
            result.append("?")
        else:
            result.append(character)
    return "".join(result)
