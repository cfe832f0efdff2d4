"""A source's guesses put together: its keys, and a characteristic for each measured or counted thing."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from holdsteady.arrays import Floats
from holdsteady.start import words
from holdsteady.start.draft import CharacteristicDraft, Guess, SourceDraft, Value
from holdsteady.start.facts import Table
from holdsteady.start.guess_columns import Counted, Roles, Wide, guess_roles
from holdsteady.start.guess_points import Points, guess_points
from holdsteady.start.guess_rhythm import guess_rhythm
from holdsteady.start.sources import Found

_MOST = 500  # characteristics of a source
_ORDER = (
    "value", "values", "count", "size", "where", "each", "subgroup", "chart", "unit", "decimals", "censored",
    "cadence", "calendar", "gap",
)  # fmt: skip


@dataclass(frozen=True, slots=True, kw_only=True)
class _Thing:
    """One thing to chart: its columns, the guess that names them, and what it is called."""

    columns: tuple[str, ...]
    name: str
    guesses: tuple[Guess, ...]


def compose(found: Found, taken: list[str]) -> SourceDraft | None:
    """Return a source with its characteristics; None where nothing in it can be charted.

    `taken` are the ids given before; those given here are added to it.
    """
    table = found.table
    roles = guess_roles(table, found.time.spoken_for)
    things = _things(roles, table)
    notes = [*found.time.notes, *roles.notes]
    if len(things) > _MOST:
        notes.append(f"{len(things)} columns could be charted; these are the first {_MOST}")
        things = things[:_MOST]
    if not things:
        return None
    characteristics: list[CharacteristicDraft] = []
    for kind in ("one", "wide", "count"):
        of_kind = [thing for thing in things if _kind(thing) == kind]
        if of_kind:
            drafts, said = _characteristics(found, of_kind, roles, kind, taken)
            characteristics += drafts
            notes += said
    used = [column for thing in things for column in thing.columns]
    missing, unsaid = _missing(table, used)
    rows = table.rows
    return SourceDraft(
        id=found.id,
        files=found.globs,
        seen=_seen(found),
        example=tuple(rows.shown(row) for row in np.flatnonzero(~table.units)[:2].tolist()),
        guesses=(*found.time.guesses, *_decimal(table), *missing),
        characteristics=tuple(characteristics),
        notes=tuple(dict.fromkeys((*notes, *unsaid))),
    )


def _seen(found: Found) -> str:
    files = [one for part in found.series for one in part.files]
    header = files[0][1]
    delimiter = "tab" if header.delimiter == "\t" else header.delimiter
    names = ", ".join(header.usable[:12]) + (" …" if len(header.usable) > 12 else "")
    many = f"{len(files)} file{'s'[: len(files) != 1]}"
    rows = found.table.rows
    looked = f"{rows.count:,} rows{' of them' * rows.left_out} looked at"
    return f"{many}, fields separated by {delimiter!r}, header in line {header.line}: {names}; {looked}"


def _things(roles: Roles, table: Table) -> list[_Thing]:
    things = []
    for name in roles.measured:
        facts = table.facts[name]
        low, high = facts.numbers.min(), facts.numbers.max()
        why = f"{facts.numbers.size:,} numbers from {low:.6g} to {high:.6g}"
        guess = Guess(key="value", value=name, confidence="sure", why=why, rows=_with_number(table, name))
        things.append(_Thing(columns=(name,), name=name, guesses=(guess,)))
    things += [_wide_thing(one, table) for one in roles.wide]
    things += [_counted_thing(one, table) for one in roles.counted]
    place = {name: index for index, name in enumerate(table.facts)}
    return sorted(things, key=lambda thing: place[thing.columns[0]])


def _with_number(table: Table, name: str) -> tuple[str, ...]:
    at = np.flatnonzero(np.isfinite(table.facts[name].values))
    return tuple(table.rows.shown(row) for row in at[:2].tolist())


def _wide_thing(one: Wide, table: Table) -> _Thing:
    guess = Guess(
        key="values", value=one.names, confidence="likely", why=f"{one.why}: one subgroup a row",
        rows=_with_number(table, one.names[0]),
    )  # fmt: skip
    return _Thing(columns=one.names, name=one.stem, guesses=(guess,))


def _counted_thing(one: Counted, table: Table) -> _Thing:
    rows = _with_number(table, one.name)
    guesses = [Guess(key="count", value=one.name, confidence=one.confidence, why=one.why, rows=rows)]
    if one.size is not None:
        guesses.append(
            Guess(key="size", value=one.size, confidence=one.confidence, why="how many were looked at")
        )
    if one.chart is not None:
        guesses.append(Guess(key="chart", value=one.chart, confidence=one.confidence, why=""))
    return _Thing(columns=(one.name,), name=one.name, guesses=tuple(guesses))


def _kind(thing: _Thing) -> str:
    return {"value": "one", "values": "wide", "count": "count"}[thing.guesses[0].key]


def _characteristics(
    found: Found, things: Sequence[_Thing], roles: Roles, kind: str, taken: list[str]
) -> tuple[list[CharacteristicDraft], tuple[str, ...]]:
    table = found.table
    labels = [name for name in roles.labels if name not in words.UNIT_COLUMN]
    values: list[Floats] = [table.facts[column].values for thing in things for column in thing.columns]
    points = guess_points(
        table, labels, values, found.time.time, one_a_row=kind == "wide", counts=kind == "count"
    )
    by_size = any(one.key == "subgroup" and "size" in dict(_table(one.value)) for one in points.guesses)
    rhythm = guess_rhythm(points, found.time.time, table.rows, by_size=by_size)
    drafts = []
    for thing in things:
        for part, where in _parts(thing, table, points):
            drafts.append(_draft(found, part, (*where, *points.guesses, *rhythm), taken))
    return drafts, points.notes


def _table(value: Value) -> dict[str, str] | dict[str, int]:
    return value if isinstance(value, dict) else {}


def _parts(thing: _Thing, table: Table, points: Points) -> list[tuple[_Thing, tuple[Guess, ...]]]:
    """Return a thing, or where a label names what was measured, one for each of its texts."""
    if points.split is None:
        return [(thing, ())]
    facts = table.facts[points.split]
    parts: list[tuple[_Thing, tuple[Guess, ...]]] = []
    for kind in facts.kinds:
        at = np.flatnonzero(points.kept & (facts.code == facts.texts.index(kind)))
        if at.size == 0:
            continue
        why = f"{points.split} says what was measured, and levels differ"
        rows = tuple(table.rows.shown(row) for row in at[:2].tolist())
        guess = Guess(key="where", value={points.split: kind}, confidence="likely", why=why, rows=rows)
        parts.append((replace(thing, name=kind), (guess,)))
    return parts


def _draft(found: Found, thing: _Thing, shared: Sequence[Guess], taken: list[str]) -> CharacteristicDraft:
    table = found.table
    facts = [table.facts[column] for column in thing.columns]
    counted = thing.guesses[0].key == "count"
    base, units = (thing.name, []) if counted else _unit(thing, table)
    named = found.name if _says_nothing(base) else base
    notes, extra = [], units
    if not counted:
        decimals = min(max(one.decimals for one in facts), 12)
        extra.append(Guess(key="decimals", value=decimals, confidence="sure", why="as they are written"))
    censored = sum(one.censored for one in facts)
    if censored:
        why = f"{censored} cells are limits, as in <0.05; they are set aside unless this is taken up"
        extra.append(Guess(key="censored", value="at-limit", confidence="guess", why=why, offered=True))
    odd = [one for one in facts if one.with_text]
    notes += [f"{one.name} has cells that are no numbers, as '{one.with_text}': set aside" for one in odd]
    own = words.as_id(named) or found.id
    name = words.unique(own, taken, instead=f"{found.id}-{own}"[:80] if own != found.id else "")
    taken.append(name)
    guesses = [*thing.guesses, *_united_where([*shared]), *extra]
    guesses.sort(key=lambda one: _ORDER.index(one.key))
    folder = found.series[0].folder.split("/")[0].replace("\0", " ")
    title = words.as_title(named) or name
    return CharacteristicDraft(
        id=name, title=title, area=words.as_title(folder), guesses=tuple(guesses), notes=tuple(notes)
    )


def _unit(thing: _Thing, table: Table) -> tuple[str, list[Guess]]:
    """Return the name without its unit, and the unit, from the row of units or else from the name."""
    base, unit = words.split_unit(thing.name)
    facts = [table.facts[column] for column in thing.columns]
    stated = next((one.unit for one in facts if one.unit), "").strip("[]() ")
    if stated:
        at = np.flatnonzero(table.units)[:2]
        rows = tuple(table.rows.shown(row) for row in at.tolist())
        why = "in the row below the header"
        return base, [Guess(key="unit", value=words.printable(stated), confidence="sure", why=why, rows=rows)]
    if unit:
        why = "in the column's name"
        return base, [Guess(key="unit", value=words.printable(unit), confidence="likely", why=why)]
    base, unit = words.doubtful_unit(thing.name)
    if unit:
        why = f"the end of {thing.name} may mean this"
        return base, [Guess(key="unit", value=unit, confidence="guess", why=why, offered=True)]
    return base, []


def _says_nothing(name: str) -> bool:
    """Whether a name is one letter or a word that goes for everything, so that the file's says more."""
    said = [word for word in words.words_of(name) if not word.isdigit()]
    return not said or all(len(word) < 2 or word in words.GENERIC_VALUE for word in said)


def _united_where(guesses: list[Guess]) -> list[Guess]:
    """Put conditions of several guesses into the one `where` that a characteristic has."""
    where = [one for one in guesses if one.key == "where"]
    if len(where) < 2:
        return guesses
    value = {key: text for one in where for key, text in _table(one.value).items()}
    united = replace(where[0], value=value, why="; ".join(one.why for one in where))  # type: ignore[arg-type]
    return [united, *(one for one in guesses if one.key != "where")]


def _decimal(table: Table) -> list[Guess]:
    if not table.is_open:
        return []
    why = "a mark before three digits could be decimal or thousands; the delimiter suggests this"
    return [Guess(key="decimal", value=table.decimal[0], confidence="guess", why=why)]


def _missing(table: Table, used: Sequence[str]) -> tuple[list[Guess], list[str]]:
    """Propose texts that mean: nothing was measured. A number that another column measures is none."""
    seen: dict[str, dict[str, int]] = {}
    for name in used:
        for text, count in table.facts[name].missing.items():
            seen.setdefault(text, {})[name] = count
    kept, notes = {}, []
    for text, columns in seen.items():
        if (other := _measures(text, table, used)) is not None:
            there = ", ".join(columns)
            notes.append(f"{text} looks like a missing code in {there}, but {other} measures such values")
        else:
            kept[text] = columns
    if not kept:
        return [], notes
    said = [f"{text} {_times(sum(c.values()))} in {', '.join(list(c)[:3])}" for text, c in kept.items()]
    why = f"seen {'; '.join(said)}; taken as nothing measured: take out what is a value"
    many = 2 if len(kept) == 1 else 1
    at = [
        row for text, columns in kept.items() for row in _rows_with(table, next(iter(columns)), text)[:many]
    ]
    guess = Guess(
        key="missing", value=tuple(kept), confidence="likely", why=why,
        rows=tuple(table.rows.shown(row) for row in at[:2]),
    )  # fmt: skip
    return [guess], notes


def _times(count: int) -> str:
    return "once" if count == 1 else f"{count:,} times"


def _rows_with(table: Table, name: str, text: str) -> list[int]:
    facts = table.facts[name]
    return [int(row) for row in np.flatnonzero(facts.code == facts.texts.index(text))[:2]]


def _measures(text: str, table: Table, used: Sequence[str]) -> str | None:
    try:
        number = float(text.replace(",", "."))
    except ValueError:
        return None
    if not np.isfinite(number):
        return None
    for name in used:
        numbers = table.facts[name].numbers
        if text in table.facts[name].missing or not numbers.size:
            continue
        if numbers.min() <= number <= numbers.max():
            return name
    return None
