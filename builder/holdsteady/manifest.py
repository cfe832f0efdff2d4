"""Which files of a published folder are ours: the list that a publication keeps beside its pages."""

from __future__ import annotations

import json
import os
from collections.abc import Collection, Iterable, Mapping
from dataclasses import dataclass, field, replace
from pathlib import Path
from typing import Any

NAME = ".holdsteady-site.json"
_FORM = 1


def is_inside(path: str) -> bool:
    """Whether a path with "/" stays inside the folder it is taken in, on every system."""
    return not any(part in ("", ".", "..") or "\\" in part or ":" in part for part in path.split("/"))


class ManifestError(Exception):
    """The list is there but cannot be read."""


@dataclass(frozen=True, slots=True)
class Entry:
    """One file of ours: the digests its content may have, and since when (seconds) nothing needs it.

    Two digests stand there while a publication is under way: the content before, and the one to come.
    """

    digests: tuple[str, ...]
    retired: float | None = None


@dataclass(frozen=True, slots=True)
class Manifest:
    """Every file of ours, path below the folder with "/" -> entry."""

    entries: Mapping[str, Entry] = field(default_factory=dict)

    @classmethod
    def read(cls, folder: Path) -> Manifest:
        """Read the list of a folder; an empty one where there is none. Raises ManifestError."""
        try:
            text = (folder / NAME).read_bytes()
        except FileNotFoundError:
            return cls()
        try:
            content: Any = json.loads(text)
            if content["form"] != _FORM:
                raise ManifestError(f"form {content['form']}, written by another version")
            if not all(map(is_inside, content["files"])):
                raise ManifestError("it names files outside the folder")
            return cls(
                {
                    path: Entry(tuple(entry["digests"]), entry.get("retired"))
                    for path, entry in content["files"].items()
                }
            )
        except (ValueError, KeyError, TypeError, AttributeError) as error:
            raise ManifestError("damaged") from error

    def write(self, folder: Path, staging: Path) -> None:
        """Put the list in place whole, by way of `staging`."""
        files = {
            path: {"digests": list(entry.digests)}
            | ({} if entry.retired is None else {"retired": entry.retired})
            for path, entry in sorted(self.entries.items())
        }
        text = json.dumps({"form": _FORM, "files": files}, ensure_ascii=True, indent=0).encode("ascii")
        if (folder / NAME).exists() and (folder / NAME).read_bytes() == text:
            return
        scratch = staging / NAME
        with scratch.open("wb") as stream:
            stream.write(text)
            stream.flush()
            os.fsync(stream.fileno())
        os.replace(scratch, folder / NAME)  # noqa: PTH105  a rename over the list before

    def retired(self, needed: Collection[str], now: float) -> Manifest:
        """Return the list with files that are not needed marked from now on, and needed ones unmarked."""
        return Manifest(
            {
                path: replace(entry, retired=None)
                if path in needed
                else replace(entry, retired=now if entry.retired is None else entry.retired)
                for path, entry in self.entries.items()
            }
        )

    def with_coming(self, digests: Mapping[str, str]) -> Manifest:
        """Return the list with the coming contents allowed beside those before."""
        coming = {
            path: Entry(tuple(dict.fromkeys((*self._digests(path), digest))))
            for path, digest in digests.items()
        }
        return Manifest({**self.entries, **coming})

    def with_only(self, digests: Mapping[str, str]) -> Manifest:
        """Return the list with the new contents alone, now that they are in place."""
        return Manifest({**self.entries, **{path: Entry((digest,)) for path, digest in digests.items()}})

    def without(self, paths: Iterable[str]) -> Manifest:
        """Return the list without some files."""
        gone = set(paths)
        return Manifest({path: entry for path, entry in self.entries.items() if path not in gone})

    def _digests(self, path: str) -> tuple[str, ...]:
        entry = self.entries.get(path)
        return entry.digests if entry is not None else ()
