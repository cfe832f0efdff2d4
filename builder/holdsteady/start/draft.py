"""Settings in the making: each value with what it rests on and how sure it is."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass, field
from typing import Literal

Confidence = Literal["sure", "likely", "guess"]
Value = str | int | float | tuple[str, ...] | dict[str, str] | dict[str, int]


@dataclass(frozen=True, slots=True, kw_only=True)
class Guess:
    """One key of the settings.

    `why` is the evidence in a few words; `rows` are at most two rows of the files that show it, as
    `file:line: text`. With `offered` the key is written behind a `#`, for a person to take up.
    """

    key: str
    value: Value
    confidence: Confidence
    why: str
    rows: tuple[str, ...] = ()
    offered: bool = False


@dataclass(frozen=True, slots=True, kw_only=True)
class SiteDraft:
    """What the whole site shares. `last_day` is the day of the newest reading that was seen."""

    title: str
    output: str
    timezone: str
    timezone_why: str
    watch_from: dt.date
    watch_from_why: str
    as_of: dt.datetime | None = None  # offered where the data ended long ago


@dataclass(frozen=True, slots=True, kw_only=True)
class CharacteristicDraft:
    """One `[[characteristic]]`: its keys in the order in which they are written."""

    id: str
    title: str
    area: str
    guesses: tuple[Guess, ...]
    notes: tuple[str, ...] = ()

    def value(self, key: str) -> Value | None:
        """Return the value of a key, None where it is not set."""
        return next((one.value for one in self.guesses if one.key == key and not one.offered), None)


@dataclass(frozen=True, slots=True, kw_only=True)
class SourceDraft:
    """One `[[source]]` with its characteristics. `seen` is what its files are, in a sentence."""

    id: str
    files: tuple[str, ...]
    seen: str
    example: tuple[str, ...]
    guesses: tuple[Guess, ...]
    characteristics: tuple[CharacteristicDraft, ...]
    notes: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Draft:
    """A whole `holdsteady.toml`; `left` are files that are in no source, with the reason."""

    site: SiteDraft
    sources: tuple[SourceDraft, ...]
    left: tuple[tuple[str, str], ...] = field(default=())
