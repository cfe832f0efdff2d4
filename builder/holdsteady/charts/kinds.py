"""Every kind of chart compiled once, and written as the one script that all pages share."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Mapping
from dataclasses import dataclass
from importlib.metadata import version
from pathlib import Path
from typing import Any, Final

import holdsteady

_NAME: Final = "chart-kinds"
_LIBRARIES: Final = ("altair", "vl-convert-python")


@dataclass(frozen=True, slots=True, kw_only=True)
class KindsScript:
    """What `assets/` needs of chart kinds."""

    script: bytes  # classic script: holdsteady.kinds({...}), Vega specifications
    vega_lite: bytes  # JSON: kind -> Vega-Lite specification, for documents of one's own


def kinds_script(cache: Path | None, *, keep: bool = True) -> KindsScript:
    """Return all kinds of chart, compiled, the same bytes each time.

    Parameters
    ----------
    cache : Path or None
        A folder of the project's own, made when missing. What it holds counts only if version and content
        fit; a cache that cannot be read or written is as if it were not there.
    keep : bool
        Whether what had to be compiled is written there.
    """
    key = _key()
    found = None if cache is None else _read(cache / f"{_NAME}-{key}.json")
    if found is not None:
        return found
    made = _compile()
    if cache is not None and keep:
        _write(cache, key, made)
    return made


def _key() -> str:
    """Return a digest of all that the result follows from: versions, and how marks look."""
    digest = hashlib.sha256(
        "\n".join([holdsteady.__version__, *(f"{name}={version(name)}" for name in _LIBRARIES)]).encode()
    )
    here = Path(__file__).parent
    for name in ("specs.py", "marks.py", "kinds.py"):
        digest.update((here / name).read_bytes())
    return digest.hexdigest()[:16]


def _compile() -> KindsScript:
    import vl_convert  # noqa: PLC0415  half a second that a warm cache saves

    from holdsteady.charts.specs import all_specifications  # noqa: PLC0415  likewise altair

    sources = all_specifications()
    compiled: dict[str, Any] = {}
    kinds: dict[str, str] = {}
    for kind, source in sources.items():
        name = hashlib.sha256(_json(source)).hexdigest()[:8]
        if name not in compiled:
            compiled[name] = _without_schema(vl_convert.vegalite_to_vega(source))
        kinds[kind] = name
    script = b"holdsteady.kinds(" + _json({"kinds": kinds, "vega": compiled}) + b");\n"
    return KindsScript(script=script, vega_lite=_json(sources) + b"\n")


def _without_schema(vega: Mapping[str, Any]) -> dict[str, Any]:
    return {key: value for key, value in vega.items() if key != "$schema"}


def _json(value: Any) -> bytes:
    text = json.dumps(value, ensure_ascii=True, allow_nan=False, sort_keys=True, separators=(",", ":"))
    return text.replace("<", "\\u003c").encode("ascii")


def _read(path: Path) -> KindsScript | None:
    try:
        stored = json.loads(path.read_bytes())
        script, source, check = stored["script"], stored["vega_lite"], stored["check"]
    except (OSError, ValueError, KeyError, TypeError):
        return None
    if not (isinstance(script, str) and isinstance(source, str)) or check != _check(script, source):
        return None
    return KindsScript(script=script.encode(), vega_lite=source.encode())


def _write(cache: Path, key: str, made: KindsScript) -> None:
    script, source = made.script.decode(), made.vega_lite.decode()
    text = json.dumps({"check": _check(script, source), "script": script, "vega_lite": source})
    path = cache / f"{_NAME}-{key}.json"
    try:
        cache.mkdir(parents=True, exist_ok=True)
        waiting = path.with_suffix(".new")
        waiting.write_text(text, encoding="utf-8")
        waiting.replace(path)
    except OSError:
        return


def _check(script: str, source: str) -> str:
    return hashlib.sha256(f"{script}\n{source}".encode()).hexdigest()
