"""A finished site in place of the one before; the only module that writes in the published folder.

Everything that changed is staged in a hidden folder inside the site, so on the same file system, and then
put in place by renames alone: assets, tables, pages that are new, pages that were there, `index.html` last.
A page is therefore always whole, old or new, and finds what it draws on: names of assets carry a digest of
their content, and what an earlier publication needed stays for a day.

A manifest (`.holdsteady-site.json`) says which files are ours, with a digest of each. It names the coming
files before the first rename, so that a publication cut short at any moment is recognised and finished by
the next. Whatever the manifest does not vouch for belongs to somebody else and is left alone.
"""

from __future__ import annotations

import contextlib
import errno
import os
import shutil
import stat
import time
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass
from pathlib import Path

import xxhash

from holdsteady.lock import LockHeldError, exclusive
from holdsteady.manifest import NAME as MANIFEST
from holdsteady.manifest import Entry, Manifest, ManifestError, is_inside
from holdsteady.problems import Problem, PublishError, RefusedFolderError, Severity, SiteBusyError

LOCK = ".holdsteady-lock"
STAGING = ".holdsteady-staging"
OURS = frozenset({MANIFEST, LOCK, STAGING})
KEPT_SECONDS = 86_400
VOLATILE = frozenset({"tables/build.json"})  # differs at every build, so no digest of it is recorded


@dataclass(frozen=True, slots=True, kw_only=True)
class Published:
    """What a publication did: paths below the site's folder, with "/", sorted."""

    written: tuple[str, ...]
    kept: tuple[str, ...]  # had the right content already
    removed: tuple[str, ...]  # of earlier publications, a day after they were last needed


@dataclass(frozen=True, slots=True)
class HeldSite:
    """The folder of a site, locked by this build; made by `held`."""

    folder: Path

    def publish(self, files: Mapping[str, bytes], *, now: float | None = None) -> Published:
        """Put `files` (path with "/" -> content) in place of the site before.

        `now` is the time in seconds since 1970 from which kept files are counted; left out: the clock.

        Raises
        ------
        PublishError: a file that is not ours lies where one of `files` belongs (nothing was changed), or the
            file system refused (the site before stands; pages already in place are whole).
        """
        for path in files:
            if not is_inside(path) or path.split("/")[0] in OURS:
                raise ValueError(f"{path!r} is no path inside a site")
        with _explained(self.folder):
            return _publish(self.folder, files, time.time() if now is None else now)


def publish(files: Mapping[str, bytes], folder: Path, *, now: float | None = None) -> Published:
    """Publish `files` in `folder`; see `held` and `HeldSite.publish`."""
    with held(folder) as site:
        return site.publish(files, now=now)


@contextlib.contextmanager
def held(folder: Path) -> Iterator[HeldSite]:
    """Lock the folder of a site for one build; it is made where it is missing, and gone if it stays empty.

    Raises
    ------
    RefusedFolderError: the folder holds files and is no published site.
    SiteBusyError: another build holds it.
    PublishError: it cannot be made or locked.
    """
    with contextlib.ExitStack() as stack:
        with _explained(folder):
            # A folder given as a link is meant; links inside it are not followed.
            folder = folder.resolve()
            refuse_foreign(folder)
            made = _make(folder)
            stack.callback(_unmake, made)
            try:
                stack.enter_context(exclusive(folder / LOCK))
            except LockHeldError:
                raise SiteBusyError(
                    _problem(
                        folder, "another build holds this site", "Wait until it is done, then build again."
                    )
                ) from None
        yield HeldSite(folder)


def refuse_foreign(folder: Path) -> None:
    """Raise RefusedFolderError unless the folder is missing, empty, or a published site."""
    try:
        names = {entry.name for entry in os.scandir(folder)}
    except FileNotFoundError:
        return
    except NotADirectoryError:
        raise _refused(folder, "is a file, not a folder") from None
    if MANIFEST not in names:
        if names - OURS:
            raise _refused(folder, "holds files and is no published site")
        return
    try:
        Manifest.read(folder)
    except ManifestError as error:
        raise _refused(folder, f"has a list of published files that cannot be read ({error})") from None


def _publish(folder: Path, files: Mapping[str, bytes], now: float) -> Published:
    manifest = Manifest.read(folder)
    _clear_staging(folder)
    changed, kept = _compare(folder, files, manifest)
    fresh = [path for path in changed if not (folder / path).exists()]
    digests = {path: _digest(path, content) for path, content in files.items()}
    staging = folder / STAGING
    try:
        staging.mkdir()
        for path in changed:
            _write(staging / path, files[path])
        manifest = manifest.retired(files, now)
        manifest.with_coming(digests).write(folder, staging)
        for parent in sorted({(folder / path).parent for path in changed}):
            parent.mkdir(parents=True, exist_ok=True)
        for path in _in_order(changed, fresh):
            # Staging and site are one file system, so this is a rename: it happens whole or not at all.
            os.replace(staging / path, folder / path)  # noqa: PTH105
        removed, forgotten = _remove_old(folder, manifest, now)
        manifest.with_only(digests).without(forgotten).write(folder, staging)
    finally:
        shutil.rmtree(staging, ignore_errors=True)
    return Published(written=tuple(sorted(changed)), kept=tuple(sorted(kept)), removed=removed)


def _compare(folder: Path, files: Mapping[str, bytes], manifest: Manifest) -> tuple[list[str], list[str]]:
    """Split paths into those to write and those that are right already; raise where a file is not ours."""
    changed, kept, foreign = [], [], []
    for path, content in files.items():
        obstacle = _obstacle(folder, path)
        if obstacle is not None:
            foreign.append(obstacle)
            continue
        present = _read(folder / path)
        entry = manifest.entries.get(path)
        if present is None:
            changed.append(path)
        elif entry is not None and present == content:
            kept.append(path)
        elif entry is not None and _is_ours(path, present, entry):
            changed.append(path)
        else:
            foreign.append(path)
    if foreign:
        raise PublishError(
            *(
                _problem(
                    folder / path,
                    "this file, where a page belongs, is not as a build left it; nothing was published",
                    "Move it elsewhere or delete it, then build again.",
                )
                for path in sorted(set(foreign))
            )
        )
    return changed, kept


def _is_ours(path: str, content: bytes, entry: Entry) -> bool:
    # An empty file is what a power cut leaves of one of ours; nobody loses anything with it.
    return not content or path in VOLATILE or _digest(path, content) in entry.digests


def _obstacle(folder: Path, path: str) -> str | None:
    """Return the first part of the path that is not a folder, or at the end not a plain file or nothing."""
    parts = path.split("/")
    for depth in range(1, len(parts) + 1):
        below = "/".join(parts[:depth])
        try:
            mode = (folder / below).lstat().st_mode
        except FileNotFoundError:
            return None
        if not (stat.S_ISREG(mode) if depth == len(parts) else stat.S_ISDIR(mode)):
            return below
    return None


def _in_order(changed: Iterable[str], fresh: Iterable[str]) -> list[str]:
    new = set(fresh)

    def rank(path: str) -> tuple[int, str]:
        if path == "index.html":
            return 4, path
        if path.startswith("assets/"):
            return 0, path
        if path.startswith("tables/"):
            return 1, path
        return (2 if path in new else 3), path

    return sorted(changed, key=rank)


def _remove_old(folder: Path, manifest: Manifest, now: float) -> tuple[tuple[str, ...], list[str]]:
    """Remove what nothing has needed for a day; return the paths removed, and those to forget."""
    removed, forgotten = [], []
    for path, entry in manifest.entries.items():
        if entry.retired is None or now - entry.retired < KEPT_SECONDS:
            continue
        forgotten.append(path)
        content = _read(folder / path) if _obstacle(folder, path) is None else None
        if content is not None and _is_ours(path, content, entry):
            (folder / path).unlink()
            removed.append(path)
    _remove_empty(folder, removed)
    return tuple(sorted(removed)), forgotten


def _remove_empty(folder: Path, removed: Iterable[str]) -> None:
    parents = {parent for path in removed for parent in Path(path).parents if parent != Path()}
    for parent in sorted(parents, key=lambda parent: len(parent.parts), reverse=True):
        with contextlib.suppress(OSError):  # still in use
            (folder / parent).rmdir()


def _write(path: Path, content: bytes) -> None:
    path.parent.mkdir(parents=True, exist_ok=True)
    path.write_bytes(content)


def _read(path: Path) -> bytes | None:
    try:
        return path.read_bytes()
    except FileNotFoundError:
        return None


def _digest(path: str, content: bytes) -> str:
    return "" if path in VOLATILE else xxhash.xxh3_128_hexdigest(content)


def _make(folder: Path) -> tuple[Path, ...]:
    """Make the folder; return those made, deepest first."""
    made = [parent for parent in (folder, *folder.parents) if not parent.exists()]
    folder.mkdir(parents=True, exist_ok=True)
    return tuple(made)


def _unmake(made: Iterable[Path]) -> None:
    for folder in made:
        with contextlib.suppress(OSError):  # in use by now
            folder.rmdir()


def _clear_staging(folder: Path) -> None:
    staging = folder / STAGING
    if staging.is_symlink() or staging.is_file():
        raise PublishError(_problem(staging, "is in the way of publishing", "Delete it, then build again."))
    if staging.exists():
        shutil.rmtree(staging)


@contextlib.contextmanager
def _explained(folder: Path) -> Iterator[None]:
    """Turn what the file system refuses into a PublishError with a remedy."""
    stood = os.path.exists(folder / MANIFEST)  # noqa: PTH110  False too where it may not be looked at
    try:
        yield
    except ManifestError as error:
        raise _refused(folder, f"has a list of published files that cannot be read ({error})") from error
    except OSError as error:
        what = f"the site could not be written ({error.strerror or error})"
        what += "; the one before still stands" if stood else ""
        where = Path(os.fsdecode(error.filename)) if error.filename else folder
        raise PublishError(_problem(where, what, _remedy(error))) from error


def _remedy(error: OSError) -> str:
    if error.errno in (errno.ENOSPC, errno.EDQUOT):
        return "Free some space there, then build again."
    if error.errno in (errno.EACCES, errno.EPERM, errno.EROFS):
        return "Get the right to write there, or give another folder with --out."
    if error.errno in (errno.ENOLCK, errno.ENOTSUP):
        return "This file system knows no locks: publish elsewhere with --out, and copy the site from there."
    return "See to that folder, or give another one with --out; then build again."


def _refused(folder: Path, what: str) -> RefusedFolderError:
    return RefusedFolderError(
        _problem(folder, what, "Give an empty folder or a new one, with --out or `output` under [site].")
    )


def _problem(where: Path, what: str, remedy: str) -> Problem:
    return Problem(severity=Severity.ERROR, where=str(where), what=what, remedy=remedy)
