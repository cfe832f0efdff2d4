"""A lock on a folder that the operating system releases when its holder ends, however it ends."""

from __future__ import annotations

import contextlib
import errno
import os
import sys
from collections.abc import Iterator
from pathlib import Path

if sys.platform == "win32":
    import msvcrt

    def _acquire(descriptor: int) -> None:
        msvcrt.locking(descriptor, msvcrt.LK_NBLCK, 1)

else:
    import fcntl

    def _acquire(descriptor: int) -> None:
        fcntl.flock(descriptor, fcntl.LOCK_EX | fcntl.LOCK_NB)


_HELD_ELSEWHERE = (errno.EWOULDBLOCK, errno.EACCES, errno.EDEADLK)


class LockHeldError(Exception):
    """Another process holds the lock."""


@contextlib.contextmanager
def exclusive(path: Path) -> Iterator[None]:
    """Hold the lock whose file is `path`; the file is gone again afterwards.

    Raises
    ------
    LockHeldError: another holder, in this process or any other, has it.
    OSError: the file cannot be made, or its file system knows no locks.
    """
    descriptor = _locked(path)
    try:
        yield
    finally:
        # Unlinked while still held: whoever opened the old file meanwhile finds that it is no longer the
        # one at `path`, and opens anew. Where open files cannot be unlinked, an empty file stays behind.
        with contextlib.suppress(OSError):
            path.unlink()
        os.close(descriptor)


def _locked(path: Path) -> int:
    while True:
        descriptor = os.open(path, os.O_RDWR | os.O_CREAT | getattr(os, "O_NOFOLLOW", 0), 0o644)
        try:
            _acquire(descriptor)
            if _still_there(path, descriptor):
                return descriptor
        except OSError as error:
            os.close(descriptor)
            if error.errno in _HELD_ELSEWHERE:
                raise LockHeldError from error
            raise
        os.close(descriptor)


def _still_there(path: Path, descriptor: int) -> bool:
    try:
        return os.path.samestat(os.fstat(descriptor), path.stat(follow_symlinks=False))
    except FileNotFoundError:
        return False
