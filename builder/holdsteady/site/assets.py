"""What pages share, named by content: one name never stands for two things, so no copy is ever torn.

Only the charts' sources, which no page runs on, keep one name.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from pathlib import Path

import xxhash

from holdsteady.charts.kinds import kinds_script
from holdsteady.places import templates

CHART_SOURCES = "assets/kinds.vl.json"
_LONGEST = 40
_OUTSIDE_NAMES = re.compile(r"[^a-z0-9]+")
_VENDOR_SCRIPTS = ("vega.min.js", "vega-interpreter.js")
_APPLICATION = ("rows.js", "reading.js", "frame.js", "app.js")  # each uses the ones before


@dataclass(frozen=True, slots=True, kw_only=True)
class Assets:
    """The shared files, and where pages find them below the site's folder."""

    files: dict[str, bytes]
    style: str
    first_scripts: tuple[str, ...]
    chart_scripts: tuple[str, ...]  # in the order in which they are to run
    chart_sources: str  # Vega-Lite, for documents of one's own
    licence: str  # of the scripts that charts run on


def content_named(folder: str, stem: str, suffix: str, content: bytes) -> str:
    """Return a path named by content, lower-case ASCII, the stem at most 40 characters."""
    stem = _OUTSIDE_NAMES.sub("-", stem.lower())[:_LONGEST].strip("-") or "file"
    return f"{folder}/{stem}-{xxhash.xxh3_64_hexdigest(content)}{suffix}"


def shared_assets(cache: Path | None, *, keep: bool = True) -> Assets:
    """Gather styles, scripts, chart kinds and the licences of what others wrote.

    `keep` says whether what had to be compiled may be kept in the cache.
    """
    folder = templates()
    files: dict[str, bytes] = {}

    def named(stem: str, suffix: str, content: bytes) -> str:
        path = content_named("assets", stem, suffix, content)
        files[path] = content
        return path

    style = named(
        "site", ".css", b"".join(sheet.read_bytes() for sheet in sorted((folder / "css").glob("*.css")))
    )
    vendor = tuple(
        named(name.removesuffix(".js"), ".js", (folder / "vendor" / name).read_bytes())
        for name in _VENDOR_SCRIPTS
    )
    kinds = kinds_script(cache, keep=keep)
    app = named("app", ".js", b"".join((folder / "js" / name).read_bytes() for name in _APPLICATION))
    # The kinds call a function of the application, so they run after it.
    chart_scripts = (*vendor, app, named("kinds", ".js", kinds.script))
    # People name this one in documents of their own, so its name stays; no page runs on it.
    files[CHART_SOURCES] = kinds.vega_lite
    first = named("first", ".js", (folder / "js" / "first.js").read_bytes())
    licence = named("license-vega", ".txt", (folder / "vendor" / "LICENSE-vega.txt").read_bytes())
    return Assets(
        files=files,
        style=style,
        first_scripts=(first,),
        chart_scripts=chart_scripts,
        chart_sources=CHART_SOURCES,
        licence=licence,
    )
