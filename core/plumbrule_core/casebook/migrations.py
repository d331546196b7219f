"""The way from each version of the file to the next; a new casebook walks it from version 1."""

import sqlite3
from collections.abc import Callable
from contextlib import closing
from pathlib import Path

from plumbrule_core.casebook.connection import copy_into, transaction
from plumbrule_core.casebook.schema import create_first, layout

Migration = Callable[[sqlite3.Connection], None]

MIGRATIONS: tuple[Migration, ...] = ()
"""The first leads from version 1 to 2, the next from 2 to 3. Only ever appended to."""


def newest() -> int:
    """The version that this program writes."""
    return 1 + len(MIGRATIONS)


def version_of(db: sqlite3.Connection) -> int:
    """The version of the file."""
    return int(db.execute("PRAGMA user_version").fetchone()[0])


def upgrade(db: sqlite3.Connection) -> None:
    """Bring the file to the newest version, each step in one transaction."""
    for version in range(version_of(db), newest()):
        with transaction(db):
            MIGRATIONS[version - 1](db)
            db.execute(f"PRAGMA user_version = {version + 1}")


def upgrade_file(db: sqlite3.Connection, path: Path) -> Path | None:
    """Like `upgrade`, leaving a copy of the older file beside it; returns where, or None."""
    version = version_of(db)
    if version >= newest():
        return None
    kept = _free_name(path, version)
    copy_into(db, kept)
    upgrade(db)
    return kept


def _free_name(path: Path, version: int) -> Path:
    stem = f"{path.stem} (version {version})"
    names = (f"{stem}{path.suffix}", *(f"{stem} {n}{path.suffix}" for n in range(2, 1000)))
    return next(place for name in names if not (place := path.with_name(name)).exists())


def create(db: sqlite3.Connection) -> None:
    """Fill an empty database with the newest tables."""
    with transaction(db):
        create_first(db)
    upgrade(db)


def newest_layout() -> dict[str, tuple[str, ...]]:
    """The tables and columns that a file of the newest version must have."""
    with closing(sqlite3.connect(":memory:", isolation_level=None)) as db:
        create(db)
        return layout(db)
