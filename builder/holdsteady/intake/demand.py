"""Which columns the settings ask of a source, and for which characteristic."""

from __future__ import annotations

from dataclasses import dataclass

from holdsteady.project.settings import Characteristic, Settings, Source


@dataclass(frozen=True, slots=True, kw_only=True)
class Ask:
    """What one characteristic takes from a row.

    `values` are the columns read as numbers, one for `value` and `count`; `size` the column of sizes
    of counted data, or the one size of all.
    """

    characteristic: Characteristic
    values: tuple[str, ...]
    size: str | float | None
    labels: tuple[str, ...]

    @property
    def numbers(self) -> tuple[str, ...]:
        """All columns read as numbers."""
        return (*self.values, self.size) if isinstance(self.size, str) else self.values

    @property
    def columns(self) -> tuple[str, ...]:
        """All columns this characteristic needs, each once."""
        return tuple(dict.fromkeys((*self.numbers, *self.labels)))


@dataclass(frozen=True, slots=True, kw_only=True)
class Demand:
    """Everything asked of one source.

    `labels` are read as text; a column of `key` that nobody else asks for is one of them.
    """

    source: Source
    asks: tuple[Ask, ...]
    numbers: tuple[str, ...]
    labels: tuple[str, ...]

    @property
    def stamps(self) -> tuple[str, ...]:
        """The columns that give a row its time: none, one, or date and clock."""
        time = self.source.time
        return (time,) if isinstance(time, str) else time or ()

    @property
    def columns(self) -> tuple[str, ...]:
        """All columns, the time first, each once."""
        return tuple(dict.fromkeys((*self.stamps, *self.numbers, *self.labels)))


def demand_of(source: Source, settings: Settings) -> Demand:
    """Gather what the characteristics of a source ask of it."""
    asks = tuple(_ask(one) for one in settings.characteristic if one.source == source.id)
    numbers = tuple(dict.fromkeys(name for ask in asks for name in ask.numbers))
    stamps = (source.time,) if isinstance(source.time, str) else source.time or ()
    stamped = stamps if set(stamps) <= set(source.key) else ()  # half a time is compared as text
    key = (name for name in source.key if name not in (*stamped, *numbers))
    return Demand(
        source=source,
        asks=asks,
        numbers=numbers,
        labels=tuple(dict.fromkeys((*(name for ask in asks for name in ask.labels), *key))),
    )


def _ask(one: Characteristic) -> Ask:
    values = one.values or tuple(name for name in (one.value, one.count) if name is not None)
    subgroup = () if one.subgroup is None or one.subgroup.column is None else (one.subgroup.column,)
    return Ask(
        characteristic=one,
        values=values,
        size=one.size if one.count is not None else None,
        labels=tuple(dict.fromkeys((*one.where, *one.each, *subgroup))),
    )
