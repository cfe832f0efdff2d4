"""Faults in the settings: found within one table, then given their place in the file."""

from __future__ import annotations

import difflib
from collections.abc import Iterable, Mapping
from dataclasses import dataclass

from holdsteady.problems import Problem, Severity
from holdsteady.project.toml_lines import KeyPath, TomlLines

SETTINGS_FILE = "holdsteady.toml"


@dataclass(frozen=True, slots=True, kw_only=True)
class Fault:
    """What is wrong with a table; `keys` are paths within it, those concerned, the most telling first."""

    keys: tuple[KeyPath, ...]
    what: str
    remedy: str

    def concerns(self, names: Iterable[str]) -> bool:
        """Tell whether one of these keys of the table is concerned."""
        return not {path[0] for path in self.keys if path}.isdisjoint(names)


class Places:
    """Collects faults as problems with key path and line; each is kept once."""

    def __init__(self, text: str, raw: Mapping[str, object]) -> None:
        self._text = text
        self._raw = raw
        self._lines: TomlLines | None = None
        self._problems: dict[tuple[str, str], Problem] = {}

    def add(self, path: KeyPath, what: str, remedy: str) -> None:
        """Keep a problem at a key path of the file."""
        where = self._named(path)
        problem = Problem(
            severity=Severity.ERROR, where=where, what=what, remedy=remedy, line=self.line(path) or 1
        )
        self._problems.setdefault((where, what), problem)

    def line(self, path: KeyPath) -> int | None:
        """Return the line of a key path."""
        if self._lines is None:  # only a file with a fault is looked through
            self._lines = TomlLines(self._text)
        return self._lines.line(path)

    def sorted(self) -> tuple[Problem, ...]:
        """Return all problems in the order of the file."""
        return tuple(sorted(self._problems.values(), key=lambda p: (p.line or 0, p.where, p.what)))

    def _named(self, path: KeyPath) -> str:
        """Write a key path with dots; items of a list by their id, else counted from 1."""
        parts = []
        value: object = self._raw
        for part in path:
            if isinstance(part, int):
                value = value[part] if isinstance(value, list) and part < len(value) else None
                identifier = value.get("id") if isinstance(value, dict) else None
                parts.append(identifier if isinstance(identifier, str) and identifier else str(part + 1))
            else:
                value = value.get(part) if isinstance(value, dict) else None
                parts.append(part)
        return ".".join(parts)


def nearest(name: str, known: Iterable[str]) -> str | None:
    """Return the known name that is spelt most like this one."""
    found = difflib.get_close_matches(name.lower(), sorted(known), n=1, cutoff=0.6)
    return found[0] if found else None


def shown(value: object) -> str:
    """Write a value of the settings as it would stand in the file, cut where it is long."""
    match value:
        case bool():
            return "true" if value else "false"
        case str():
            return f"'{value}'" if len(value) <= 60 else f"'{value[:60]}…'"
        case dict():
            return "a table"
        case list() | tuple():
            return "a list"
        case _:
            return str(value)
