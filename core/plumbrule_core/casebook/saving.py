"""Saving a copy: written beside its target and renamed, so that the target is old or new, never half."""

import os
import sqlite3
import sys
from pathlib import Path

from plumbrule_core.casebook.connection import copy_into
from plumbrule_core.casebook.lock import NoLock, WriterLock
from plumbrule_core.errors import CasebookError


def save_copy(db: sqlite3.Connection, own: Path | None, target: Path) -> None:
    """Write the whole casebook to `target`; raises CasebookError where that is this one or one in use."""
    target = target.expanduser().resolve()
    if not target.parent.is_dir():
        raise CasebookError(f"There is no folder {target.parent}; make it first, or choose another place.")
    if own is not None and (target == own or (target.exists() and own.exists() and target.samefile(own))):
        raise CasebookError(f"{target.name} is this casebook itself, and it is saved; choose another name.")
    if target.is_dir():
        raise CasebookError(f"{target} is a folder; choose a file in it.")
    try:
        lock = WriterLock.take(target)
    except NoLock as why:
        raise CasebookError(f"{target.name} cannot be replaced. {why}") from why
    try:
        _replace(db, target)
    finally:
        lock.release()


def _replace(db: sqlite3.Connection, target: Path) -> None:
    beside = target.with_name(f"{target.name}-new")
    beside.unlink(missing_ok=True)
    try:
        copy_into(db, beside)
        for suffix in ("-wal", "-shm", "-journal"):  # a log left by a crash would be read into the new file
            target.with_name(target.name + suffix).unlink(missing_ok=True)
        beside.replace(target)
        _settle(target.parent)
    finally:
        beside.unlink(missing_ok=True)


def _settle(folder: Path) -> None:
    """Make the rename itself survive a power cut, where the system can."""
    if sys.platform == "win32":
        return
    handle = os.open(folder, os.O_RDONLY)
    try:
        os.fsync(handle)
    finally:
        os.close(handle)
