"""From the rows of a source to the readings of each characteristic and member."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from holdsteady.arrays import Bools, Floats, Ints, frozen
from holdsteady.intake.demand import Ask
from holdsteady.intake.numbers import State, States
from holdsteady.intake.pool import Pool, group
from holdsteady.intake.readings import Readings
from holdsteady.project.settings import Characteristic


@dataclass(frozen=True, slots=True, kw_only=True)
class Taken:
    """What one characteristic takes from R of the rows it asks for.

    `rows`, (R,), are places in the pool; values (R, k), size (R,). Of the cells it could not read,
    `fault_rows`, `fault_columns` (places in `columns`) and `fault_states` are (F,). `lacking` are the
    rows it asks for in files that lack one of its columns, and `lacks` that column of each.
    """

    rows: Ints
    values: Floats
    size: Floats | None
    columns: tuple[str, ...]
    fault_rows: Ints
    fault_columns: Ints
    fault_states: States
    lacking: Ints
    lacks: Sequence[str]

    @property
    def censored(self) -> int:
        """How many cells are beyond what the gauge can tell."""
        return int(np.count_nonzero(self.fault_states == State.CENSORED))


def take(ask: Ask, pool: Pool) -> Taken:
    """Find a characteristic's rows and read its cells; `where` is judged before the value is read."""
    one = ask.characteristic
    rows = pool.rows_where(one.where)
    served = np.ones(len(pool.files), dtype=np.bool_)
    for name in ask.columns:
        served &= pool.has[name]
    lacking, lacks = _lacking(ask, pool, rows, served)
    if not served.all():
        rows = rows[served[pool.file[rows]]]
    values = np.column_stack([pool.numbers[name].values[rows] for name in ask.values])
    state = np.column_stack([pool.numbers[name].state[rows] for name in ask.values])
    size, size_state = _sizes(ask, pool, rows)
    _judge(one, values, state, size, size_state)
    usable = (state == State.NUMBER).any(axis=1) & (size_state == State.NUMBER)
    every = np.column_stack((state, size_state))
    fault_rows, fault_columns = np.nonzero(every > State.EMPTY)
    values = np.where(state == State.NUMBER, values, np.nan)[usable]
    return Taken(
        rows=rows[usable],
        values=values,
        size=None if size is None else size[usable],
        columns=ask.numbers,
        fault_rows=rows[fault_rows],
        fault_columns=fault_columns,
        fault_states=every[fault_rows, fault_columns],
        lacking=lacking,
        lacks=lacks,
    )


def _lacking(ask: Ask, pool: Pool, rows: Ints, served: Bools) -> tuple[Ints, Sequence[str]]:
    """Return the rows asked for in files that cannot serve the characteristic."""
    if served.all():
        return np.zeros(0, dtype=np.int64), ()
    lost: list[str] = [
        next((name for name in ask.columns if not pool.has[name][file]), "")
        for file in range(len(pool.files))
    ]
    knows_where = np.ones(len(pool.files), dtype=np.bool_)
    for name in ask.characteristic.where:
        knows_where &= pool.has[name]
    blind = np.flatnonzero(~knows_where[pool.file])  # nothing tells that their rows are not meant
    asked = rows[~served[pool.file[rows]]]
    found = np.union1d(blind, asked)
    return found, [lost[file] for file in pool.file[found].tolist()]


def _sizes(ask: Ask, pool: Pool, rows: Ints) -> tuple[Floats | None, States]:
    fine = np.full(rows.size, State.NUMBER, dtype=np.uint8)
    if ask.size is None:
        return None, fine
    if isinstance(ask.size, str):
        column = pool.numbers[ask.size]
        return column.values[rows], column.state[rows]
    return np.full(rows.size, float(ask.size)), fine


def _judge(
    one: Characteristic, values: Floats, state: States, size: Floats | None, size_state: States
) -> None:
    """Mark, in place, cells that are numbers but cannot be true."""
    number = state == State.NUMBER
    if one.plausible is not None:
        lower = -np.inf if one.plausible.lower is None else one.plausible.lower
        upper = np.inf if one.plausible.upper is None else one.plausible.upper
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
    one = ask.characteristic
    if taken.rows.size == 0:
        return ()
    if not one.each:
        return (_readings(ask, pool, taken, np.arange(taken.rows.size), {}),)
    groups = group([pool.labels[name].codes[taken.rows] for name in one.each])
    found = []
    for index, key in enumerate(groups.keys.tolist()):
        each = {name: pool.labels[name].categories[code] for name, code in zip(one.each, key, strict=True)}
        found.append(_readings(ask, pool, taken, groups.rows(index), each))
    return tuple(sorted(found, key=lambda readings: readings.name))


def _readings(ask: Ask, pool: Pool, taken: Taken, picked: Ints, each: dict[str, str]) -> Readings:
    one = ask.characteristic
    rows = taken.rows[picked]
    subgroup = None
    if one.subgroup is not None and one.subgroup.column is not None:
        labels = pool.labels[one.subgroup.column]
        subgroup = tuple(np.array(labels.categories, dtype=object)[labels.codes[rows]].tolist())
    suffix = ",".join(f"{column}={value}" for column, value in each.items())
    return Readings(
        family=one.id,
        name=f"{one.id}[{suffix}]" if each else one.id,
        each=each,
        time=None if pool.time is None else frozen(pool.time[rows]),
        values=frozen(taken.values[picked]),
        size=None if taken.size is None else frozen(taken.size[picked]),
        subgroup=subgroup,
        file=frozen(pool.file[rows]),
        files=pool.files,
        line=frozen(pool.line[rows]),
    )
