"""A draft as the text of `holdsteady.toml`, with a comment for each guess."""

from __future__ import annotations

import re
from collections.abc import Iterable

from holdsteady.start.draft import CharacteristicDraft, Draft, Guess, SiteDraft, SourceDraft, Value
from holdsteady.start.words import printable

_ESCAPES = {"\\": "\\\\", '"': '\\"', "\n": "\\n", "\r": "\\r", "\t": "\\t"}
_BARE = re.compile(r"[A-Za-z0-9_-]+")
_WIDE = 100
_MOST_LEFT = 20

_TOP = """\
# Written by `holdsteady start` from what lies in this folder. Nothing here is settled: each value says how
# sure it is (sure, likely, guess) and what it rests on. Change what is wrong, take out what is not wanted.
"""


def toml_text(draft: Draft) -> str:
    """Return the text; every value is escaped, whatever stands in names of columns and files."""
    parts = [_TOP, _site(draft.site)]
    for source in draft.sources:
        parts.append(_source(source))
        parts += [_characteristic(one, source.id) for one in source.characteristics]
    if draft.left:
        parts.append(_left(draft.left))
    return "\n".join(parts)


def quoted(text: str) -> str:
    """Return a text as a basic string of TOML."""
    whole = text.encode("utf-8", "replace").decode()
    return '"' + "".join(_escaped(character) for character in whole) + '"'


def written(value: Value) -> str:
    """Return a value as it is written in TOML."""
    if isinstance(value, str):
        return quoted(value)
    if isinstance(value, tuple):
        return "[" + ", ".join(map(quoted, value)) + "]"
    if isinstance(value, dict):
        return "{ " + ", ".join(f"{_key(key)} = {written(item)}" for key, item in value.items()) + " }"
    return repr(value)


def _escaped(character: str) -> str:
    if character in _ESCAPES:
        return _ESCAPES[character]
    code = ord(character)
    return f"\\u{code:04X}" if code < 0x20 or 0x7F <= code < 0xA0 or code in (0x2028, 0x2029) else character


def _key(text: str) -> str:
    return text if _BARE.fullmatch(text) else quoted(text)


def _comment(text: str) -> str:
    return f"# {printable(text).strip()}\n"


def _pair(guess: Guess) -> str:
    """Return a key with its comment, behind it where there is room, else above."""
    line = f"{'# ' if guess.offered else ''}{guess.key} = {written(guess.value)}"
    if not guess.why:
        return f"{line}\n"
    said = _comment(f"{guess.confidence}: {guess.why}")
    return f"{line}  {said}" if len(line) + len(said) < _WIDE else f"{said}{line}\n"


def _pairs(guesses: Iterable[Guess]) -> str:
    return "".join(map(_pair, guesses))


def _site(site: SiteDraft) -> str:
    lines = [
        "[site]\n",
        f"title = {quoted(site.title)}\n",
        f"output = {quoted(site.output)}\n",
        f"timezone = {quoted(site.timezone)}  {_comment(site.timezone_why)}",
        _comment(site.watch_from_why),
        f"watch_from = {site.watch_from.isoformat()}\n",
    ]
    if site.as_of is not None:
        lines.append(
            _comment("the newest reading is from then; without the # a finished set of data stands still")
        )
        lines.append(f"# as_of = {site.as_of.isoformat()}\n")
    return "".join(lines)


def _source(source: SourceDraft) -> str:
    title = printable(source.id)
    lines = [f"# {'-' * max(4, 70 - len(title))} {title}\n", _comment(source.seen)]
    lines += [_comment(f"    {row}") for row in source.example]
    lines += ["\n[[source]]\n", f"id = {quoted(source.id)}\n", f"files = {written(source.files)}\n"]
    lines.append(_pairs(source.guesses))
    lines += [_comment(note) for note in source.notes]
    return "".join(lines)


def _characteristic(one: CharacteristicDraft, source: str) -> str:
    lines = ["[[characteristic]]\n", f"id = {quoted(one.id)}\n", f"title = {quoted(one.title)}\n"]
    if one.area:
        lines.append(f"area = {quoted(one.area)}\n")
    lines.append(f"source = {quoted(source)}\n")
    lines.append(_pairs(one.guesses))
    lines += [_comment(note) for note in one.notes]
    return "".join(lines)


def _left(left: tuple[tuple[str, str], ...]) -> str:
    lines = [_comment("Files that are in no source:")]
    lines += [_comment(f"  {name}: {why}") for name, why in left[:_MOST_LEFT]]
    if len(left) > _MOST_LEFT:
        lines.append(_comment(f"  and {len(left) - _MOST_LEFT} more"))
    return "".join(lines)
