"""How a casebook is opened: for writing where nobody else writes, else for reading from a private picture."""

import os
import shutil
import sqlite3
import tempfile
from contextlib import closing
from dataclasses import dataclass
from pathlib import Path

import plumbrule_core
from plumbrule_core.casebook import checks, migrations
from plumbrule_core.casebook.connection import connect, copy_into, in_words, set_journal, transaction
from plumbrule_core.casebook.lock import NoLock, WriterLock
from plumbrule_core.errors import CasebookError


@dataclass(frozen=True, slots=True)
class Opened:
    """An open casebook. `path` is None for an unsaved one; `folder` is private and removed at close."""

    db: sqlite3.Connection
    path: Path | None
    folder: Path | None = None
    lock: WriterLock | None = None
    why_read_only: str = ""
    migrated_from: Path | None = None
    """The copy of the older file that a migration left."""


def open_casebook(path: Path | None) -> Opened:
    """Open, or create where there is nothing; raises CasebookError and leaves a refused file as it was."""
    if path is None:
        with in_words("An unsaved casebook cannot be made"):
            return _unsaved()
    path = path.expanduser().resolve()
    if not path.parent.is_dir():
        raise CasebookError(f"There is no folder {path.parent}; make it first, or choose another place.")
    if path.is_dir():
        raise CasebookError(f"{path} is a folder; choose a file in it.")
    with in_words(f"{path.name} cannot be opened"):
        try:
            return _to_write(path)
        except NoLock as why:
            return _to_read(path, str(why))


def picture(path: Path, why_read_only: str) -> Opened:
    """What the casebook holds at this moment, copied to a private folder; raises CasebookError.

    A connection left open for reading would keep the writer from folding its log into the one file.
    """
    folder = Path(tempfile.mkdtemp(prefix="plumbrule-"))
    try:
        copy = folder / path.name
        _copy(path, copy)
        db = connect(copy, "rw")
        try:
            checks.check_content(path.name, db)
            migrations.upgrade(db)
            checks.check_layout(path.name, db)
            db.execute("PRAGMA query_only = ON")
        except BaseException:
            db.close()
            raise
    except BaseException:
        shutil.rmtree(folder, ignore_errors=True)
        raise
    return Opened(db, path, folder=folder, why_read_only=why_read_only)


def close(opened: Opened) -> None:
    """Fold the log into the file, let go of the lock, remove what was private."""
    try:
        if opened.lock is not None:
            _fold_log(opened.db)
        opened.db.close()
    finally:
        if opened.lock is not None:
            opened.lock.release()
        if opened.folder is not None:
            shutil.rmtree(opened.folder, ignore_errors=True)


def _unsaved() -> Opened:
    folder = Path(tempfile.mkdtemp(prefix="plumbrule-"))
    try:
        path = folder / "unsaved.plumb"
        _create(path)
        return Opened(_writing(path), None, folder=folder)
    except BaseException:
        shutil.rmtree(folder, ignore_errors=True)
        raise


def _to_write(path: Path) -> Opened:
    lock = WriterLock.take(path)
    try:
        if path.exists():
            if not os.access(path, os.W_OK):
                raise NoLock(f"{path.name} is write-protected, so it can only be read.")
            kept = _prepare(path)
        else:
            _create(path)
            kept = None
        return Opened(_writing(path), path, lock=lock, migrated_from=kept)
    except BaseException:
        lock.release()
        raise


def _to_read(path: Path, why: str) -> Opened:
    if not path.exists():
        raise CasebookError(f"There is no casebook {path}, and none can be made. {why}")
    return picture(path, why)


def _create(path: Path) -> None:
    """Made beside and renamed, so that there is never half a casebook."""
    beside = path.with_name(f"{path.name}-new")
    beside.unlink(missing_ok=True)
    try:
        with closing(connect(beside, "rwc")) as db:
            migrations.create(db)
            with transaction(db):
                db.execute(
                    "INSERT INTO meta (key, value) VALUES ('created by', ?)", (plumbrule_core.__version__,)
                )
        beside.replace(path)
    finally:
        beside.unlink(missing_ok=True)


def _prepare(path: Path) -> Path | None:
    """Check and, where the file is older, migrate; returns the copy of the older file."""
    checks.check_header(path)
    interrupted = path.with_name(f"{path.name}-journal").exists()
    with closing(connect(path, "rw" if interrupted else "ro")) as db:
        checks.check_content(path.name, db)
    with closing(connect(path, "rw")) as db:
        kept = migrations.upgrade_file(db, path)
        checks.check_layout(path.name, db)
    return kept


def _writing(path: Path) -> sqlite3.Connection:
    db = connect(path, "rw")
    try:
        set_journal(db, "WAL")
        db.execute("PRAGMA synchronous = FULL")
        # Only a first read opens the log; without it, one that a reader made meanwhile would stay at close.
        db.execute("SELECT count(*) FROM meta").fetchone()
    except BaseException:
        db.close()
        raise
    return db


def _fold_log(db: sqlite3.Connection) -> None:
    try:
        set_journal(db, "DELETE")
    except sqlite3.OperationalError:
        # A full disk, or a reader that does not end: the log stays beside the file and loses nothing.
        return


def _copy(path: Path, copy: Path) -> None:
    try:
        with closing(connect(path, "ro")) as live:
            copy_into(live, copy)
    except sqlite3.OperationalError:
        # In a folder that cannot be written to, SQLite reads no log; nobody writes there either.
        copy.unlink(missing_ok=True)
        for suffix in ("", "-wal", "-journal"):
            source = path.with_name(path.name + suffix)
            if source.exists():
                shutil.copyfile(source, copy.with_name(copy.name + suffix))
