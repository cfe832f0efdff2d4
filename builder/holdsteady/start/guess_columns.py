"""What each column is to a chart: measured, counted, how many were looked at, or a label."""

from __future__ import annotations

import re
from dataclasses import dataclass

import numpy as np

from holdsteady.arrays import Bools
from holdsteady.start import words
from holdsteady.start.draft import Confidence
from holdsteady.start.facts import Facts, Table

_FEWEST = 3
_MOST_LABELS = 60
_MOST_IN_ONE = 25
_ORDERED = 0.98
_HARDLY_EVER = 0.98  # cells that cannot be true are set aside; a few change nothing
_SAME_LEVEL = 1.0  # standard deviations of a single reading
_WITH_UNIT = re.compile(r"[+-]?[0-9]+(?:[.,][0-9]+)?\s*[^\W\d]\S{0,7}")
_NUMBERED = re.compile(r"^(?P<before>.*?)[ _.-]*(?P<number>[0-9]{1,3})(?P<after>\D*)$", re.DOTALL)


@dataclass(frozen=True, slots=True, kw_only=True)
class Counted:
    """A column of counts, the one of how many were looked at, and the chart where it is not the usual one."""

    name: str
    size: str | None
    chart: str | None
    confidence: Confidence
    why: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Wide:
    """Columns of one kind: one subgroup a row."""

    names: tuple[str, ...]
    stem: str
    why: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Roles:
    """The columns of a source by what they are."""

    measured: tuple[str, ...]
    wide: tuple[Wide, ...]
    counted: tuple[Counted, ...]
    labels: tuple[str, ...]
    notes: tuple[str, ...]


def guess_roles(table: Table, spoken_for: tuple[str, ...]) -> Roles:
    """Sort the columns of a source; those in `spoken_for` tell times."""
    numbers: list[Facts] = []
    labels: list[str] = []
    notes: list[str] = []
    for one in table.facts.values():
        if one.name in spoken_for or one.filled == 0:
            continue
        if not one.numeric:
            labels.append(one.name)
            if _holds_units(one):
                said = f"{one.name} holds numbers with text behind them, '{one.kinds[0]}'"
                notes.append(f"{said}: no chart can be made of it")
        elif is_label(one, table):
            labels.append(one.name)
        elif np.ptp(one.numbers) == 0 and not words.names_one_of(one.name, words.SIZE):
            if one.filled >= _FEWEST:
                notes.append(f"{one.name} is always {one.kinds[0]}: nothing to chart")
        else:
            numbers.append(one)
    counted = _counted(numbers)
    taken = {one.name for one in counted} | {one.size for one in counted}
    measured = [one for one in numbers if one.name not in taken and _varies(one)]
    wide, apart = _wide(measured)
    in_one = {name for one in wide for name in one.names}
    return Roles(
        measured=tuple(one.name for one in measured if one.name not in in_one),
        wide=wide,
        counted=counted,
        labels=tuple(labels),
        notes=(*notes, *apart),
    )


def _varies(one: Facts) -> bool:
    return one.filled >= _FEWEST and bool(np.ptp(one.numbers) > 0)


def _holds_units(one: Facts) -> bool:
    some = one.kinds[:50]
    return bool(some) and all(_WITH_UNIT.fullmatch(text) for text in some)


def is_label(one: Facts, table: Table) -> bool:
    """Whether a column of numbers names something: a machine, a place, a batch, a running number."""
    if not one.whole or np.any(one.numbers < 0):
        return False
    few = len(one.kinds) <= _MOST_LABELS
    if words.names_one_of(one.name, words.COUNT_OF_ITEMS | words.COUNT_OF_EVENTS):
        return False
    if few and words.ends_in(one.name, words.STREAM | words.PLACE | words.WHO):
        return True
    is_size = words.names_one_of(one.name, words.SIZE)
    identifies = words.names_one_of(one.name, words.IDENTITY) and not is_size
    if few and (identifies or _same_throughout(one, table)):
        return True
    return _is_running(one, table) or _is_cycle(one)


def _same_throughout(one: Facts, table: Table) -> bool:
    """Whether the column has one value in each of several files, and not the same in all."""
    files, file = len(table.rows.files), table.rows.file
    if files < 2 or len(one.kinds) < 2 or table.rows.count < 4 * files:
        return False
    pairs = np.unique(np.column_stack((file, one.code)), axis=0)
    return len(pairs) == files


def _is_running(one: Facts, table: Table) -> bool:
    """Whether the numbers rise, row by row, as running numbers do."""
    known = np.isfinite(one.values)
    values, file = one.values[known], table.rows.file[known]
    step = np.diff(values)[np.diff(file) == 0]
    if step.size < _FEWEST * 3 or len(one.kinds) < 6:
        return False
    small = step <= max(10.0, float(np.median(step)) * 10)
    return bool(np.mean(step >= 0) >= _ORDERED and np.mean(small) > 0.9)


def _is_cycle(one: Facts) -> bool:
    """Whether the numbers go 1, 2, … k and begin again."""
    values = one.numbers
    kinds = np.unique(values)
    if not 2 <= kinds.size <= _MOST_IN_ONE or values.size < 3 * kinds.size or kinds[0] not in (0, 1):
        return False
    step = np.diff(values)
    goes_on = (step == 1) | (step == kinds[0] - kinds[-1])
    return bool(np.mean(goes_on) > 0.9 and np.ptp(kinds) == kinds.size - 1)


def _counted(numbers: list[Facts]) -> tuple[Counted, ...]:
    whole = [one for one in numbers if one.whole and one.filled >= _FEWEST and _mostly(one.numbers >= 0)]
    named = [one for one in whole if _names_counts(one.name)]
    sizes = [one for one in whole if one not in named and words.names_one_of(one.name, words.SIZE)]
    sizes = [one for one in sizes if _mostly(one.numbers > 0)]
    found = [_with_size(one, sizes, named=True) for one in named if not words.split_unit(one.name)[1]]
    if not found:
        rest = [one for one in whole if one not in sizes and np.ptp(one.numbers) > 0]
        found = [_with_size(one, sizes, named=False) for one in rest if _looks_counted(one, sizes)]
    return tuple(found)


def _mostly(true: Bools) -> bool:
    return bool(np.mean(true) > _HARDLY_EVER)


def _names_counts(name: str) -> bool:
    return words.names_one_of(name, words.COUNT_OF_ITEMS | words.COUNT_OF_EVENTS)


def _looks_counted(one: Facts, sizes: list[Facts]) -> bool:
    """Whether whole numbers are small and vary as counts of rare things do."""
    values = one.numbers
    if any(_never_above(one, size) for size in sizes):
        return True
    mean = float(values.mean())
    if one.unit or words.split_unit(one.name)[1] or not 0 < mean <= 30 or len(one.kinds) < 3:
        return False
    return bool(0.3 <= values.var() / mean <= 5 and values.min() <= mean / 2)


def _never_above(one: Facts, size: Facts) -> bool:
    both = np.isfinite(one.values) & np.isfinite(size.values)
    return bool(both.any()) and _mostly(one.values[both] <= size.values[both])


def _with_size(one: Facts, sizes: list[Facts], *, named: bool) -> Counted:
    fitting = [size for size in sizes if size.name != one.name]
    size = next((other for other in fitting if _never_above(one, other)), fitting[0] if fitting else None)
    of_items = words.names_one_of(one.name, words.COUNT_OF_ITEMS)
    of_events = words.names_one_of(one.name, words.COUNT_OF_EVENTS) and not of_items
    values = one.numbers
    said = "its name and whole numbers" if named else "whole numbers that vary as counts do"
    if size is None:
        why = f"{said} from {values.min():.0f} to {values.max():.0f}, no column of how many were looked at"
        return Counted(
            name=one.name, size=None, chart=None, confidence="likely" if named else "guess", why=why
        )
    above = not _never_above(one, size)
    chart: str | None = "np" if np.ptp(size.numbers) == 0 else None
    confidence: Confidence = "likely" if of_items or of_events else "guess"
    why = f"{said}, never above {size.name}"
    if above or of_events:
        chart = "u"
        kind = "more than one to a piece" if above else "things of which a piece can have several"
        why = f"{said}, out of {size.name}: {kind}"
    return Counted(name=one.name, size=size.name, chart=chart, confidence=confidence, why=why)


def _wide(measured: list[Facts]) -> tuple[tuple[Wide, ...], list[str]]:
    """Find columns that differ by a number alone and lie at one level."""
    families: dict[tuple[str, str], list[Facts]] = {}
    for one in measured:
        match = _NUMBERED.match(one.name)
        if match is not None:
            families.setdefault((match["before"].strip(), match["after"]), []).append(one)
    found, notes = [], []
    for (before, after), family in families.items():
        if not 2 <= len(family) <= _MOST_IN_ONE or not before:
            continue
        names = tuple(one.name for one in family)
        apart = _levels_apart(family)
        if apart <= _SAME_LEVEL:
            why = (
                f"{len(names)} columns that differ by a number, levels {apart:.1f} standard deviations apart"
            )
            found.append(Wide(names=names, stem=(before + after).strip(" _-"), why=why))
        else:
            some = ", ".join(names[:4]) + (" …" if len(names) > 4 else "")
            said = f"{some} differ by a number, but their levels lie {apart:.1f} standard deviations apart"
            notes.append(f"{said}: a chart each")
    return tuple(found), notes


def _levels_apart(family: list[Facts]) -> float:
    medians = np.array([np.median(one.numbers) for one in family])
    spreads = np.array([1.4826 * np.median(np.abs(one.numbers - np.median(one.numbers))) for one in family])
    sigma = float(np.median(spreads))
    span = float(np.ptp(medians))
    return span / sigma if sigma > 0 else (0.0 if span == 0 else float("inf"))
