"""What a file holds, as UTF-8 text: read while it stands still, unpacked, decoded."""

from __future__ import annotations

import gzip
import io
import os
import shutil
import zlib
from dataclasses import dataclass
from pathlib import Path

import xxhash

from holdsteady.intake.encoding import decode

_PACKED = b"\x1f\x8b"
_ATTEMPTS = 3
_STEP = 1 << 20
_BROKEN = "broken gzip; nothing of it is used; copy it again"


@dataclass(frozen=True, slots=True, kw_only=True)
class Content:
    """A file's text as UTF-8, or why there is none.

    `size` is in bytes as the file lies on the disk, `digest` that of these bytes: by both the same
    content is known again.
    """

    text: bytes = b""
    encoding: str = ""
    size: int = 0
    digest: int = 0
    trouble: str = ""


def load(path: Path, encoding: str | None = None) -> Content:
    """Read a file; `encoding` is the one that the settings prescribe."""
    try:
        raw = _read_still(path)
    except OSError as error:
        return Content(trouble=f"cannot be read: {error.strerror or error}; see to its permissions")
    if raw is None:
        return Content(trouble="changes while it is read; build again when it is complete")
    return _of(raw, encoding)


def load_again(path: Path, encoding: str | None, *, size: int, digest: int) -> Content | None:
    """Read what was read before, leaving what was added since; None where it is no longer there."""
    try:
        raw = path.read_bytes()
    except OSError:
        return None
    if len(raw) > size:
        raw = raw[:size]
    return _of(raw, encoding) if len(raw) == size and xxhash.xxh3_64_intdigest(raw) == digest else None


def _of(raw: bytes, encoding: str | None) -> Content:
    size, digest = len(raw), xxhash.xxh3_64_intdigest(raw)
    if raw.startswith(_PACKED):
        unpacked = _unpacked(raw)
        if unpacked is None:
            return Content(size=size, digest=digest, trouble=_BROKEN)
        raw = unpacked
    decoded = decode(raw, encoding)
    return Content(
        text=decoded.text, encoding=decoded.encoding, size=size, digest=digest, trouble=decoded.trouble
    )


def _read_still(path: Path) -> bytes | None:
    """Return a file's bytes, None where they are others each time; what only grows stands still so far."""
    before = path.stat()
    raw = path.read_bytes()
    for _ in range(_ATTEMPTS):
        after = path.stat()
        if _stands(before, after) and len(raw) == after.st_size:
            return raw
        before, again = after, path.read_bytes()
        if again.startswith(raw):
            return again
        raw = again
    return None


def _stands(before: os.stat_result, after: os.stat_result) -> bool:
    return (before.st_size, before.st_mtime_ns, before.st_ino) == (
        after.st_size,
        after.st_mtime_ns,
        after.st_ino,
    )


def _unpacked(raw: bytes) -> bytes | None:
    """Return what a gzip file holds; None where any of it is damaged or not there yet."""
    result = io.BytesIO()
    try:
        with gzip.GzipFile(fileobj=io.BytesIO(raw)) as packed:
            shutil.copyfileobj(packed, result, _STEP)
    except (EOFError, OSError, zlib.error):
        return None
    return result.getvalue()
