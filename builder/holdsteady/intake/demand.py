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
    """Everything asked of one source."""

    source: Source
    asks: tuple[Ask, ...]
    numbers: tuple[str, ...]
    labels: tuple[str, ...]

    @property
    def columns(self) -> tuple[str, ...]:
        """All columns, the time first, each once."""
        first = () if self.source.time is None else (self.source.time,)
        return tuple(dict.fromkeys((*first, *self.numbers, *self.labels)))


def demand_of(source: Source, settings: Settings) -> Demand:
    """Gather what the characteristics of a source ask of it."""
    asks = tuple(_ask(one) for one in settings.characteristic if one.source == source.id)
    return Demand(
        source=source,
        asks=asks,
        numbers=tuple(dict.fromkeys(name for ask in asks for name in ask.numbers)),
        labels=tuple(dict.fromkeys(name for ask in asks for name in ask.labels)),
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
