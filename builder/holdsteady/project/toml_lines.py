"""On which line of a TOML text each key stands, so that a problem can point at it."""

from __future__ import annotations

import re
import tomllib
from bisect import bisect_right

KeyPath = tuple[str | int, ...]

_BLANKS = re.compile(r"[ \t]*")
_FILLING = re.compile(r"(?:[ \t\r\n]|#[^\n]*)*")
_BARE_KEY = re.compile(r"[A-Za-z0-9_-]+")
_STRING = re.compile(
    r"""
    \"{3} (?:\\.|[^\\])*? \"{3,5}   # several lines, which may end in up to two quotes of their own
    | '{3} .*? '{3,5}
    | " (?:\\.|[^"\\\n])* "
    | ' [^'\n]* '
    """,
    re.DOTALL | re.VERBOSE,
)
_SCALAR = re.compile(r"[^,\]}#\n]*")


class TomlLines:
    """The lines of all keys, tables and array items of a text that `tomllib` has accepted.

    Key paths hold names and, for items of arrays, their index from 0, as in
    `("characteristic", 2, "baseline", "points")`.
    """

    def __init__(self, text: str) -> None:
        # The TOML reader takes CR LF for one end of line; so does this one.
        self._text = text.replace("\r\n", "\n")
        self._ends = [match.start() for match in re.finditer("\n", self._text)]
        self._position = 0
        self._lines: dict[KeyPath, int] = {}
        self._items: dict[KeyPath, int] = {}
        self._read()

    def line(self, path: KeyPath) -> int | None:
        """Return the line of a key, from 1; of the closest table above it where the key is not written."""
        for length in range(len(path), 0, -1):
            if path[:length] in self._lines:
                return self._lines[path[:length]]
        return None

    def _read(self) -> None:
        table: KeyPath = ()
        while self._skip(_FILLING) < len(self._text):
            table = self._header() if self._text[self._position] == "[" else self._pair(table)

    def _header(self) -> KeyPath:
        is_item = self._text.startswith("[[", self._position)
        line = self._line()
        self._position += 1 + is_item
        names = self._names()
        self._position += 1 + is_item
        path: KeyPath = ()
        for name in names[:-1]:
            path = (*path, name)
            self._lines.setdefault(path, line)
            if path in self._items:  # a table below an array of tables belongs to its latest item
                path = (*path, self._items[path])
        path = (*path, names[-1])
        if is_item:
            self._lines.setdefault(path, line)
            self._items[path] = self._items.get(path, -1) + 1
            path = (*path, self._items[path])
        self._lines[path] = line
        return path

    def _pair(self, table: KeyPath) -> KeyPath:
        line = self._line()
        path = table
        for name in self._names():
            path = (*path, name)
            self._lines.setdefault(path, line)
        self._lines[path] = line
        self._position += 1
        self._skip(_BLANKS)
        self._value(path)
        return table

    def _names(self) -> list[str]:
        names = []
        while True:
            self._skip(_BLANKS)
            names.append(self._name())
            self._skip(_BLANKS)
            if self._text[self._position] != ".":
                return names
            self._position += 1

    def _name(self) -> str:
        start = self._position
        pattern = _STRING if self._text[start] in "\"'" else _BARE_KEY
        raw = self._text[start : self._skip(pattern)]
        if raw[0] == '"':
            return str(tomllib.loads(f"name = {raw}")["name"])
        return raw.strip("'") if raw[0] == "'" else raw

    def _value(self, path: KeyPath) -> None:
        match self._text[self._position]:
            case "[":
                self._array(path)
            case "{":
                self._inline_table(path)
            case '"' | "'":
                self._skip(_STRING)
            case _:
                self._skip(_SCALAR)

    def _array(self, path: KeyPath) -> None:
        self._position += 1
        index = 0
        while self._text[self._skip(_FILLING)] != "]":
            self._lines[(*path, index)] = self._line()
            self._value((*path, index))
            index += 1
            self._comma()
        self._position += 1

    def _inline_table(self, path: KeyPath) -> None:
        self._position += 1
        while self._text[self._skip(_FILLING)] != "}":
            self._pair(path)
            self._comma()
        self._position += 1

    def _comma(self) -> None:
        if self._text[self._skip(_FILLING)] == ",":
            self._position += 1

    def _skip(self, pattern: re.Pattern[str]) -> int:
        match = pattern.match(self._text, self._position)
        if match is None:
            raise ValueError(f"not TOML at position {self._position}")
        self._position = match.end()
        return self._position

    def _line(self) -> int:
        return bisect_right(self._ends, self._position) + 1
