"""Bytes to UTF-8: which encoding a file is written in, and its text in the one encoding that is parsed.

Whatever a file is written in, its text is turned into UTF-8 first; everything after that knows no other.
"""

from __future__ import annotations

import codecs
import io
from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

_PIECE = 1 << 20
_HEAD = 65_536
_REPLACEMENT = "\ufffd"
_MARKS = (
    (codecs.BOM_UTF8, "utf-8"),
    (codecs.BOM_UTF16_LE, "utf-16-le"),
    (codecs.BOM_UTF16_BE, "utf-16-be"),
)
_WIDE_MARKS = (codecs.BOM_UTF32_LE, codecs.BOM_UTF32_BE)
_SHEET = "a spreadsheet or archive; save the sheet as CSV"
_PICTURE = "a picture; take it out of `files`"
_ARCHIVE = "an archive; unpack it"
_PAGE = "a web page or XML; export the data as CSV"
_SIGNATURES = (
    (b"PK\x03\x04", _SHEET),
    (b"\xd0\xcf\x11\xe0", _SHEET),
    (b"\x89PNG", _PICTURE),
    (b"\xff\xd8\xff", _PICTURE),
    (b"GIF8", _PICTURE),
    (b"II*\0", _PICTURE),
    (b"MM\0*", _PICTURE),
    (b"%PDF", "a PDF; export the data as CSV"),
    (b"BZh", _ARCHIVE),
    (b"7z\xbc\xaf", _ARCHIVE),
    (b"\xfd7zXZ", _ARCHIVE),
    (b"\x28\xb5\x2f\xfd", _ARCHIVE),
    (b"<!doctype html", _PAGE),
    (b"<html", _PAGE),
    (b"<?xml", _PAGE),
    (b"{\\rtf", "a document; save it as CSV"),
)
_ASCII = frozenset(map(chr, range(128)))
_LOOKED_AT = 4_096
_FAR_AHEAD = 50  # characters
_CONTROLS = bytes(code for code in range(32) if chr(code) not in "\0\t\n\v\f\r\x1a\x1b")
# ISO 8859-1 has control characters where cp1252 has letters and signs, and is otherwise the same.
_ALSO_CP1252 = ("cp1252", "iso8859-1", "ascii")


@dataclass(frozen=True, slots=True, kw_only=True)
class Decoded:
    """A file's text as UTF-8 (a byte order mark may stand before it), or why it is not text."""

    text: bytes = b""
    encoding: str = ""
    trouble: str = ""


def known_encoding(name: str) -> str | None:
    """Return the one name under which an encoding of text is kept; None where there is no such encoding."""
    try:
        found = codecs.lookup(name)
        "0".encode(found.name)
    except (LookupError, ValueError, TypeError):  # no such name, or one that turns bytes into bytes
        return None
    if found.name in _ALSO_CP1252:
        return "cp1252"
    return "utf-8" if found.name == "utf-8-sig" else found.name


def decode(data: bytes, given: str | None = None) -> Decoded:
    """Return the text of a file's bytes as UTF-8.

    A byte order mark tells the encoding; else `given`, the one that the settings prescribe; else UTF-16
    where every other byte is zero, UTF-8 where the bytes can be, cp1252 where they cannot. Single
    characters that cannot be read become U+FFFD.
    """
    trouble = _signature(data)
    if trouble:
        return Decoded(trouble=trouble)
    marked = next((name for mark, name in _MARKS if data.startswith(mark)), None)
    given = None if given is None else known_encoding(given)
    wide = marked if marked != "utf-8" else None
    if wide is None and marked is None and given in (None, "utf-16", "utf-16-le", "utf-16-be"):
        wide = given if given in ("utf-16-le", "utf-16-be") else _zeros_say(data)
        wide = wide or ("utf-16-le" if given == "utf-16" else None)
    if wide is not None:
        return Decoded(text=_transcoded(memoryview(data)[2 if marked else 0 :], wide), encoding=wide)
    if trouble := _not_text(data):
        return Decoded(trouble=trouble)
    return _narrow(data, marked or given)


def _narrow(data: bytes, encoding: str | None) -> Decoded:
    """Decode text in which the ASCII characters are single bytes."""
    if data.isascii() and encoding in (None, "utf-8", "cp1252"):
        return Decoded(text=data, encoding=encoding or "utf-8")
    cut = _cut_from_utf8(data) if encoding in (None, "utf-8") else None
    if cut is not None:
        text = data[: len(data) - cut] + _REPLACEMENT.encode() if cut else data
        return Decoded(text=text, encoding="utf-8")
    lost = _mostly_lost(data, encoding or "utf-8")
    if lost and encoding is not None:
        shown = "UTF-8" if encoding == "utf-8" else encoding
        return Decoded(trouble=f"not {shown} text; correct `encoding` of its source or leave it out")
    found = encoding or ("cp1252" if lost else "utf-8")
    return Decoded(text=_transcoded(data, found), encoding=found)


def _signature(data: bytes) -> str:
    head = data[:64].removeprefix(codecs.BOM_UTF8).lstrip()
    if data.startswith(_WIDE_MARKS):
        return "UTF-32 text; save it as UTF-8"
    for signature, reason in _SIGNATURES:
        if data.startswith(signature) or (signature.startswith(b"<") and head.lower().startswith(signature)):
            return reason
    return ""


def _not_text(data: bytes) -> str:
    head = data[:64]
    if head.count(0) * 4 >= max(len(head), 1):
        return "not text: NUL bytes; export the data as CSV"
    head = data[:_HEAD]
    if (len(head) - len(head.translate(None, _CONTROLS))) * 50 > len(head):
        return "not text; export the data as CSV"
    return ""


def _zeros_say(data: bytes) -> str | None:
    """Return the order of UTF-16 without a mark, whose zeros stand in every other byte of plain text."""
    head = data[: _HEAD - _HEAD % 2]
    pairs = len(head) // 2
    if not pairs or b"\0" not in head:
        return None
    first, second = head[0::2].count(0), head[1::2].count(0)
    if second * 2 > pairs and first * 20 <= second:
        return "utf-16-le"
    return "utf-16-be" if first * 2 > pairs and second * 20 <= first else None


def _pieces(data: bytes | memoryview, size: int = _PIECE) -> Iterator[memoryview]:
    view = memoryview(data)
    for start in range(0, len(view), size):
        yield view[start : start + size]


def _cut_from_utf8(data: bytes) -> int | None:
    """Return how many bytes of UTF-8 belong to a character that the end cuts in two; None for other text."""
    decoder = codecs.getincrementaldecoder("utf-8")()
    try:
        for piece in map(bytes, _pieces(data)):
            decoder.decode(piece)
    except UnicodeDecodeError:
        return None
    return len(decoder.getstate()[0])


def _transcoded(data: bytes | memoryview, encoding: str) -> bytes:
    """Return text as UTF-8, with U+FFFD for what cannot be read."""
    if encoding == "cp1252":
        return _from_cp1252(data)
    decoder = codecs.getincrementaldecoder(encoding)(errors="replace")
    result = io.BytesIO()
    for piece in map(bytes, _pieces(data)):
        result.write(_as_utf8(decoder.decode(piece)))
    result.write(_as_utf8(decoder.decode(b"", final=True)))
    return result.getvalue()


def _as_utf8(text: str) -> bytes:
    try:
        return text.encode("utf-8")
    except UnicodeEncodeError:  # some codecs let half a surrogate pair through
        return text.encode("utf-8", "replace")


def _mostly_lost(data: bytes, encoding: str) -> bool:
    """Whether of what is not ASCII, as far as it must be looked at, more is not of an encoding than is."""
    decoder = codecs.getincrementaldecoder(encoding)(errors="replace")
    ahead = lost = 0
    for piece in map(bytes, _pieces(data, _LOOKED_AT)):
        text = decoder.decode(piece)
        if text.isascii():
            continue
        unread = text.count(_REPLACEMENT)
        lost += unread
        ahead += 2 * unread - sum(map(text.count, {*text} - _ASCII))
        if abs(ahead) > _FAR_AHEAD:
            break
    return lost > 0 and ahead >= 0


def _from_cp1252(data: bytes | memoryview) -> bytes:
    """Return cp1252 as UTF-8; its five bytes without a meaning become U+FFFD."""
    result = io.BytesIO()
    for piece in map(bytes, _pieces(data)):
        if piece.isascii():
            result.write(piece)
        elif not np.any((np.frombuffer(piece, dtype=np.uint8) & 0xE0) == 0x80):  # none of 0x80 to 0x9F
            result.write(piece.decode("latin-1").encode("utf-8"))  # the same there, and far quicker
        else:
            result.write(piece.decode("cp1252", "replace").encode("utf-8"))
    return result.getvalue()
