"""From the rows of a source to the readings of each characteristic and member."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from holdsteady.arrays import Bools, Floats, Ints, Sides, frozen
from holdsteady.intake.demand import Ask
from holdsteady.intake.numbers import State, States, is_censored
from holdsteady.intake.pool import Pool
from holdsteady.intake.readings import Readings
from holdsteady.intake.selection import Selection
from holdsteady.project.settings import Characteristic

_NONE = np.zeros(0, dtype=np.int64)


@dataclass(frozen=True, slots=True, kw_only=True)
class Taken:
    """What one characteristic takes from the R rows it asks for, in the order of its members.

    `usable`, (R,), says which of them are readings, U in all; None for all of them. values (U, k),
    size (U,). `side`, (U, k), is -1 where a value is a limit that the reading lies below, 1 above, 0
    elsewhere; None without any. Of the cells it could not read, `fault_rows` (places in the pool),
    `fault_columns` (places in `columns`) and `fault_states` are (F,). `lacking` are the rows it asks for in
    files that lack one of its columns, and `lacks` that column of each.
    """

    selection: Selection
    usable: Bools | None
    values: Floats
    side: Sides | None
    size: Floats | None
    columns: tuple[str, ...]
    fault_rows: Ints
    fault_columns: Ints
    fault_states: States
    lacking: Ints
    lacks: Sequence[str]

    @property
    def rows(self) -> Ints:
        """The places, (U,), of its readings in the pool."""
        return self.selection.rows if self.usable is None else self.selection.rows[self.usable]

    @property
    def censored(self) -> int:
        """How many cells were set aside because they are beyond what the gauge can tell."""
        return int(np.count_nonzero(is_censored(self.fault_states)))

    @property
    def implausible(self) -> int:
        """How many cells were set aside because they lie outside the plausible bounds."""
        return int(np.count_nonzero(self.fault_states == State.IMPLAUSIBLE))


def take(ask: Ask, pool: Pool) -> Taken:
    """Find a characteristic's rows and read its cells; `where` is judged before the value is read."""
    one = ask.characteristic
    chosen = pool.selection(one.where, one.each)
    served = np.ones(len(pool.files), dtype=np.bool_)
    for name in ask.columns:
        served &= pool.has[name]
    if served.all() and _is_clean(ask, pool):
        return Taken(
            selection=chosen,
            usable=None,
            values=_values(ask, pool, chosen),
            side=None,
            size=None,
            columns=ask.numbers,
            fault_rows=_NONE,
            fault_columns=_NONE,
            fault_states=np.zeros(0, dtype=np.uint8),
            lacking=_NONE,
            lacks=(),
        )
    return _take_judged(ask, pool, chosen, served)


def _is_clean(ask: Ask, pool: Pool) -> bool:
    """Whether every cell is known to be a number that can be true."""
    one = ask.characteristic
    if one.count is not None or not all(pool.is_clean(name) for name in ask.values):
        return False
    if one.plausible is None or pool.size == 0:
        return True
    lower, upper = _plausible(one)
    bounds = (pool.bounds(name) for name in ask.values)
    return all(least >= lower and most <= upper for least, most in bounds)


def _values(ask: Ask, pool: Pool, chosen: Selection) -> Floats:
    if len(ask.values) == 1:
        return pool.selected(ask.values[0], chosen)[:, None]
    return np.column_stack([pool.selected(name, chosen) for name in ask.values])


def _take_judged(ask: Ask, pool: Pool, chosen: Selection, served: Bools) -> Taken:
    one = ask.characteristic
    values = _values(ask, pool, chosen)
    state = np.column_stack([chosen.of(pool.states(name)) for name in ask.values])
    size, size_state = _sizes(ask, pool, chosen)
    if not served.all():
        unserved = ~served[chosen.file]
        state[unserved] = State.EMPTY
        size_state[unserved] = State.EMPTY
    side = _to_limits(one, state)
    _judge(one, values, state, size, size_state)
    usable = (state == State.NUMBER).any(axis=1) & (size_state == State.NUMBER)
    every = np.column_stack((state, size_state))
    fault_rows, fault_columns = np.nonzero(every > State.EMPTY)
    rows = chosen.rows
    values = np.where(state == State.NUMBER, values, np.nan)[usable]
    lacking, lacks = _lacking(ask, pool, rows, served)
    return Taken(
        selection=chosen,
        usable=usable,
        values=values,
        side=None if side is None else _where_any(np.where(np.isnan(values), np.int8(0), side[usable])),
        size=None if size is None else size[usable],
        columns=ask.numbers,
        fault_rows=rows[fault_rows],
        fault_columns=fault_columns,
        fault_states=every[fault_rows, fault_columns],
        lacking=lacking,
        lacks=lacks,
    )


def _to_limits(one: Characteristic, state: States) -> Sides | None:
    """Let censored cells count, in place, as the limits they name, where the settings want them drawn."""
    censored = is_censored(state)
    if one.censored != "at-limit" or not censored.any():
        return None
    side = np.where(censored, np.where(state == State.CENSORED, -1, 1), 0).astype(np.int8)
    state[censored] = State.NUMBER
    return side


def _where_any(side: Sides) -> Sides | None:
    return side if side.any() else None


def _lacking(ask: Ask, pool: Pool, rows: Ints, served: Bools) -> tuple[Ints, Sequence[str]]:
    """Return the rows asked for in files that cannot serve the characteristic."""
    if served.all():
        return _NONE, ()
    lost: list[str] = [
        next((name for name in ask.columns if not pool.has[name][file]), "")
        for file in range(len(pool.files))
    ]
    knows_where = np.ones(len(pool.files), dtype=np.bool_)
    for name in ask.characteristic.where:
        knows_where &= pool.has[name]
    blind = ~knows_where[pool.ground.file]  # nothing tells that their rows are not meant
    if pool.kept is not None:
        blind &= pool.kept
    asked = rows[~served[pool.ground.file[rows]]]
    found = np.union1d(np.flatnonzero(blind), asked)
    return found, [lost[file] for file in pool.ground.file[found].tolist()]


def _sizes(ask: Ask, pool: Pool, chosen: Selection) -> tuple[Floats | None, States]:
    fine = np.full(chosen.size, State.NUMBER, dtype=np.uint8)
    if ask.size is None:
        return None, fine
    if isinstance(ask.size, str):
        return pool.selected(ask.size, chosen), chosen.of(pool.states(ask.size))
    return np.full(chosen.size, float(ask.size)), fine


def _plausible(one: Characteristic) -> tuple[float, float]:
    bounds = one.plausible
    lower = None if bounds is None else bounds.lower
    upper = None if bounds is None else bounds.upper
    return -np.inf if lower is None else lower, np.inf if upper is None else upper


def _judge(
    one: Characteristic, values: Floats, state: States, size: Floats | None, size_state: States
) -> None:
    """Mark, in place, cells that are numbers but cannot be true."""
    number = state == State.NUMBER
    lower, upper = _plausible(one)
    state[number & ((values < lower) | (values > upper))] = State.IMPLAUSIBLE
    if one.count is None:
        return
    state[number & (values != np.round(values))] = State.NOT_WHOLE
    state[number & (values < 0)] = State.NEGATIVE
    if size is None:
        return
    sized = size_state == State.NUMBER
    if isinstance(one.size, str):
        size_state[sized & (size != np.round(size))] = State.NOT_WHOLE
        size_state[sized & (size <= 0)] = State.SIZE_NOT_POSITIVE
    if one.chart in (None, "p", "np"):
        both = (state[:, 0] == State.NUMBER) & (size_state == State.NUMBER)
        state[both & (values[:, 0] > size), 0] = State.ABOVE_SIZE


def members(ask: Ask, pool: Pool, taken: Taken) -> tuple[Readings, ...]:
    """Split what a characteristic takes into one set of readings for each value of its `each` columns."""
    chosen, usable = taken.selection, taken.usable
    starts = chosen.starts
    time, file, line = chosen.time, chosen.file, chosen.line
    if usable is not None:
        kept: Ints = np.cumsum(usable, dtype=np.int64)
        starts = np.concatenate((np.zeros(1, dtype=np.int64), kept))[starts]
        time = None if time is None else time[usable]
        file, line = file[usable], line[usable]
    subgroup = _subgroups(ask, pool, taken)
    found = []
    for each, start, end in zip(chosen.each, starts[:-1].tolist(), starts[1:].tolist(), strict=True):
        if start == end:
            continue
        part = slice(start, end)
        suffix = ",".join(f"{column}={value}" for column, value in each.items())
        found.append(
            Readings(
                family=ask.characteristic.id,
                name=f"{ask.characteristic.id}[{suffix}]" if each else ask.characteristic.id,
                each=each,
                time=None if time is None else frozen(time[part]),
                values=frozen(taken.values[part]),
                side=None if taken.side is None else frozen(taken.side[part]),
                size=None if taken.size is None else frozen(taken.size[part]),
                subgroup=None if subgroup is None else tuple(subgroup[part]),
                file=frozen(file[part]),
                files=pool.files,
                line=frozen(line[part]),
            )
        )
    return tuple(sorted(found, key=lambda readings: readings.name))


def _subgroups(ask: Ask, pool: Pool, taken: Taken) -> list[str] | None:
    wanted = ask.characteristic.subgroup
    if wanted is None or wanted.column is None:
        return None
    labels = pool.labels[wanted.column]
    codes = taken.selection.of(labels.codes)
    used = codes if taken.usable is None else codes[taken.usable]
    texts: list[str] = np.array(labels.categories, dtype=object)[used].tolist()
    return texts
