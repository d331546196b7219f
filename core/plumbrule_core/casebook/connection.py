"""Connections to a casebook's file, transactions, and SQLite's troubles in words."""

import sqlite3
import time
from collections.abc import Iterator
from contextlib import closing, contextmanager
from pathlib import Path
from typing import Literal

from plumbrule_core.errors import CasebookError

PATIENCE = 5.0
"""Seconds to wait for another connection to let go (common practice, no source)."""

_REASONS = {
    "SQLITE_FULL": "the disk is full; free some space and try again",
    "SQLITE_IOERR": "the disk reported a fault while reading or writing",
    "SQLITE_READONLY": "the file cannot be written to",
    "SQLITE_CORRUPT": "the file is damaged",
    "SQLITE_NOTADB": "it is not a casebook, or it is damaged",
    "SQLITE_CANTOPEN": "the file, or a file that belongs beside it, cannot be opened",
    "SQLITE_BUSY": "another window kept it busy; try again",
}


def connect(path: Path, mode: Literal["ro", "rw", "rwc"]) -> sqlite3.Connection:
    """A connection in which each statement stands alone unless a transaction is begun."""
    db = sqlite3.connect(
        f"{path.absolute().as_uri()}?mode={mode}",
        uri=True,
        timeout=PATIENCE,
        isolation_level=None,
        check_same_thread=False,
    )
    # Damaged text must not keep its neighbours from being read; the digest beside it tells.
    db.text_factory = lambda raw: raw.decode("utf-8", "replace")
    db.execute("PRAGMA trusted_schema = OFF")
    return db


def set_journal(db: sqlite3.Connection, mode: Literal["WAL", "DELETE"]) -> None:
    """Change how changes are kept; waits here for readers to end, since SQLite does not wait at this."""
    last = time.monotonic() + PATIENCE
    while True:
        try:
            db.execute(f"PRAGMA journal_mode = {mode}")
            return
        except sqlite3.OperationalError as error:
            if not error.sqlite_errorname.startswith("SQLITE_BUSY") or time.monotonic() > last:
                raise
        time.sleep(0.01)


@contextmanager
def transaction(db: sqlite3.Connection) -> Iterator[None]:
    """Everything inside is kept as one piece, or none of it."""
    db.execute("BEGIN IMMEDIATE")
    try:
        yield
        db.execute("COMMIT")
    except BaseException:
        if db.in_transaction:
            db.execute("ROLLBACK")
        raise


@contextmanager
def in_words(trouble: str) -> Iterator[None]:
    """Turn faults of the database and the disk into `trouble: reason`; raises CasebookError."""
    try:
        yield
    except sqlite3.Error as error:
        raise CasebookError(f"{trouble}: {_reason(error)}.") from error
    except OSError as error:
        where = f" ({error.filename})" if error.filename else ""
        raise CasebookError(f"{trouble}: {error.strerror or error}{where}.") from error


def _reason(error: sqlite3.Error) -> str:
    name = getattr(error, "sqlite_errorname", "")
    return next((words for start, words in _REASONS.items() if name.startswith(start)), str(error))


def copy_into(db: sqlite3.Connection, target: Path) -> None:
    """Copy the database as it stands into the new file `target`, which is then one plain file."""
    with closing(connect(target, "rwc")) as copy:
        db.backup(copy)
        copy.execute("PRAGMA journal_mode = DELETE")
