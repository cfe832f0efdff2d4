"""Which files belong to a source."""

from __future__ import annotations

import fnmatch
import os
import re
import stat
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field, replace
from pathlib import Path

from holdsteady.intake.readings import SetAside
from holdsteady.manifest import NAME as PUBLISHED
from holdsteady.project.settings import Settings

ENDINGS = (".csv", ".tsv", ".txt")
PACKED = ".gz"
_OURS = ("holdsteady.toml", "logbook.csv", "limits.csv")
_LEAVES = "a link out of the project folder; copy in what it leads to"
_WILD = re.compile(r"[*?\[]")


@dataclass(frozen=True, slots=True, kw_only=True)
class Found:
    """A file that a glob matched; `trouble` says why it may not be opened."""

    name: str  # below the project folder, with "/"
    path: Path
    trouble: str = ""


@dataclass(slots=True)
class Scanner:
    """Walks a project folder for the globs of its sources, listing each folder once.

    Published sites, wherever they lie, and the project's own tables are no measurement files.
    """

    folder: Path
    settings: Settings
    _listings: dict[Path, list[os.DirEntry[str]]] = field(default_factory=dict)
    _closed: dict[str, str] = field(default_factory=dict)
    _linked: bool = False
    _root: Path = field(init=False)
    _site: Path | None = field(init=False)

    def __post_init__(self) -> None:
        self._root = _real(self.folder)
        site = _real(self.folder / self.settings.site.output)
        self._site = None if self._root.is_relative_to(site) else site

    def files(self, globs: tuple[str, ...]) -> tuple[Found, ...]:
        """Return the files that any of the globs matches, in the order of their paths."""
        found: dict[str, Found] = {}
        for glob in globs:
            parts = [part for part in glob.replace("\\", "/").split("/") if part not in ("", ".")]
            if ".." in parts or Path(glob).is_absolute():
                continue
            for path in self._expand(self.folder, parts, frozenset({self._root})):
                one = self._look(path)
                if one is not None:
                    found.setdefault(one.name, one)
        files = [found[name] for name in sorted(found)]
        return tuple(self._each_once(files) if self._linked else files)

    def closed_folders(self) -> tuple[SetAside, ...]:
        """Return a line for each folder that could not be listed."""
        return tuple(
            SetAside(file=name, line=None, column="", reason=reason, text="")
            for name, reason in sorted(self._closed.items())
        )

    def _expand(self, folder: Path, parts: list[str], above: frozenset[Path]) -> Iterator[Path]:
        if not parts:
            return
        part, rest = parts[0], parts[1:]
        if part == "**":
            yield from self._expand(folder, rest or ["*"], above)
            yield from self._deeper(folder, parts, above)
            return
        matches = _matcher(part, last=not rest)
        for entry in self._list(folder):
            if not matches(entry.name):
                continue
            if not rest:
                yield Path(entry.path)
            elif self._enters(entry, above):
                yield from self._expand_in(entry, rest, above)
            elif entry.is_symlink():
                yield from self._not_entered(Path(entry.path))

    def _deeper(self, folder: Path, parts: list[str], above: frozenset[Path]) -> Iterator[Path]:
        for entry in self._list(folder):
            if entry.name.startswith("."):
                continue
            if self._enters(entry, above):
                yield from self._expand_in(entry, parts, above)
            elif entry.is_symlink() and Path(entry.path).is_dir():
                self._pass_over(Path(entry.path))

    def _expand_in(self, entry: os.DirEntry[str], parts: list[str], above: frozenset[Path]) -> Iterator[Path]:
        inner = Path(entry.path)
        yield from self._expand(inner, parts, above | {_real(inner)})

    def _not_entered(self, link: Path) -> Iterator[Path]:
        """Yield a link that stands where a folder should, unless it leads back to one that it lies in."""
        if self._inside(link) and link.is_dir():
            self._pass_over(link)
        else:
            yield link

    def _list(self, folder: Path) -> list[os.DirEntry[str]]:
        if folder not in self._listings:
            try:
                with os.scandir(folder) as entries:
                    self._listings[folder] = sorted(entries, key=lambda entry: entry.name)
                self._linked |= any(entry.is_symlink() for entry in self._listings[folder])
            except OSError as error:
                self._closed[self._name(folder)] = f"the folder cannot be listed: {error.strerror}"
                self._listings[folder] = []
        return self._listings[folder]

    def _enters(self, entry: os.DirEntry[str], above: frozenset[Path]) -> bool:
        try:
            if not entry.is_dir():
                return False
        except OSError:
            return False
        target = _real(Path(entry.path))
        if target in above or target == self._site or not self._inside(target):
            return False
        return not (target / PUBLISHED).exists()

    def _pass_over(self, link: Path) -> None:
        """List a link to a folder that is not entered."""
        if not self._inside(link):
            self._closed[self._name(link)] = _LEAVES
        elif _real(link) != self._site:
            self._closed[self._name(link)] = "a link back to a folder that it lies in"

    def _each_once(self, files: Sequence[Found]) -> Iterator[Found]:
        """Pass over links to files that are there by name or another link, lest rows be doubled."""
        targets = {one.name: _real(one.path) for one in files if not one.trouble}
        own = {
            one.name: targets[one.name] == self._root / one.path.relative_to(self.folder)
            for one in files
            if not one.trouble
        }
        seen: dict[Path, str] = {}
        for name in sorted(targets, key=lambda name: (not own[name], name)):
            seen.setdefault(targets[name], name)
        for one in files:
            first = seen.get(targets.get(one.name, Path()), one.name)
            twice = "" if first == one.name else f"a link to {first}, which is read already"
            yield replace(one, trouble=one.trouble or twice)

    def _inside(self, path: Path) -> bool:
        return _real(path).is_relative_to(self._root)

    def _look(self, path: Path) -> Found | None:
        name = self._name(path)
        if name in _OURS:
            return None
        try:
            if path.is_symlink():
                target = _real(path)
                if not target.is_relative_to(self._root):
                    return Found(name=name, path=path, trouble=_LEAVES)
                if self._site is not None and target.is_relative_to(self._site):
                    return None
            mode = path.stat().st_mode
        except OSError as error:
            return Found(name=name, path=path, trouble=f"cannot be opened: {error.strerror or error}")
        if stat.S_ISDIR(mode):
            return None
        return Found(name=name, path=path, trouble=_unfit(name, mode))

    def _name(self, path: Path) -> str:
        relative = path.relative_to(self.folder).as_posix()
        return os.fsencode(relative).decode("utf-8", "backslashreplace")


def _real(path: Path) -> Path:
    """Return where a path leads through all links, as far as it leads anywhere."""
    return Path(os.path.realpath(path))  # `Path.resolve` refuses links in a circle in some versions


def _unfit(name: str, mode: int) -> str:
    if not stat.S_ISREG(mode):
        return "not a regular file; only regular files are opened"
    if not name.lower().removesuffix(PACKED).endswith(ENDINGS):
        return "not a .csv, .tsv or .txt file, or .gz of one; save it as one or narrow `files` of its source"
    return ""


def _matcher(part: str, *, last: bool) -> _Named:
    if not _WILD.search(part) and not last:
        return _Named(part)
    stem, dot, ending = part.rpartition(".")
    if last and dot and not _WILD.search(ending):
        literal = "".join(
            f"[{character.lower()}{character.upper()}]" if character.isalpha() else re.escape(character)
            for character in ending
        )
        pattern = _translated(stem) + r"\." + literal
    else:
        pattern = _translated(part)
    hidden = "" if part.startswith(".") else r"(?!\.)"
    return _Named(part, re.compile(hidden + pattern, re.DOTALL))


def _translated(part: str) -> str:
    return fnmatch.translate(part).removesuffix(r"\Z").removesuffix(r"\z")


@dataclass(frozen=True, slots=True)
class _Named:
    """Says whether a name matches one part of a glob."""

    text: str
    pattern: re.Pattern[str] | None = None

    def __call__(self, name: str) -> bool:
        return name == self.text or (self.pattern is not None and self.pattern.fullmatch(name) is not None)
