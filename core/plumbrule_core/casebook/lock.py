"""One writer for each casebook, held by a lock on a small file beside it.

The lock is not on the casebook itself: SQLite keeps locks of its own there, and on POSIX systems closing
any other handle of the same file would drop them.
"""

import contextlib
import errno
import os
import sys
from pathlib import Path

_TAKEN = {errno.EWOULDBLOCK, errno.EACCES, errno.EAGAIN, errno.EDEADLK}
_UNWRITABLE = {errno.EACCES, errno.EPERM, errno.EROFS}

if sys.platform == "win32":
    import msvcrt

    def _hold(handle: int) -> None:
        msvcrt.locking(handle, msvcrt.LK_NBLCK, 1)
else:
    import fcntl

    def _hold(handle: int) -> None:
        fcntl.flock(handle, fcntl.LOCK_EX | fcntl.LOCK_NB)


class NoLock(Exception):
    """The lock cannot be had, so the casebook opens for reading; the text is the sentence for people."""


class WriterLock:
    """The right to write to one casebook; it ends with the process at the latest."""

    def __init__(self, beside: Path, handle: int) -> None:
        self._beside = beside
        self._handle: int | None = handle

    @classmethod
    def take(cls, casebook: Path) -> "WriterLock":
        """Take the lock without waiting; raises NoLock with the reason, and OSError for any other trouble."""
        beside = casebook.with_name(casebook.name + "-lock")
        while True:
            handle = _held(beside)
            # A holder that lets go removes the file; a lock on a removed file keeps nobody out.
            if _still_there(beside, handle):
                return cls(beside, handle)
            os.close(handle)

    def release(self) -> None:
        """Let others write; does nothing the second time."""
        if self._handle is None:
            return
        if sys.platform == "win32":  # an open file cannot be removed there
            os.close(self._handle)
            with contextlib.suppress(PermissionError, FileNotFoundError):  # another one holds it by now
                self._beside.unlink()
        else:
            self._beside.unlink(missing_ok=True)
            os.close(self._handle)
        self._handle = None


def _held(beside: Path) -> int:
    try:
        handle = os.open(beside, os.O_RDWR | os.O_CREAT, 0o600)
    except OSError as error:
        if error.errno in _UNWRITABLE:
            raise NoLock(
                f"The folder {beside.parent} cannot be written to, so the casebook can only be read."
            ) from error
        raise
    try:
        _hold(handle)
    except OSError as error:
        os.close(handle)
        if error.errno in _TAKEN:
            raise NoLock("Another window has this casebook open, so here it can only be read.") from error
        raise NoLock(
            "The disk that holds this casebook cannot keep two windows apart, so it can only be read; "
            "copy it to this computer to change it."
        ) from error
    return handle


def _still_there(beside: Path, handle: int) -> bool:
    try:
        return os.path.samestat(beside.stat(), os.fstat(handle))
    except FileNotFoundError:
        return False
