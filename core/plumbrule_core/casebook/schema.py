"""Version 1 of the casebook's tables, and the marks by which the file is known.

Never edited once released: a later version is a step in `migrations`, which new casebooks walk as well.
"""

import sqlite3

APPLICATION_ID = 0x504C554D
"""`PLUM` in ASCII; SQLite keeps it in the header of the file."""

TABLES = (
    "CREATE TABLE meta (key TEXT PRIMARY KEY, value TEXT NOT NULL)",
    # AUTOINCREMENT: the number of a question that was taken back is never given to another one.
    "CREATE TABLE briefs (id INTEGER PRIMARY KEY AUTOINCREMENT, position INTEGER NOT NULL,"
    " document TEXT NOT NULL, digest TEXT NOT NULL)",
    "CREATE TABLE steps (number INTEGER PRIMARY KEY, label TEXT NOT NULL, brief INTEGER NOT NULL,"
    " position INTEGER NOT NULL, before TEXT, after TEXT, undone INTEGER NOT NULL DEFAULT 0)",
    "CREATE TABLE results (task TEXT PRIMARY KEY, document TEXT NOT NULL, digest TEXT NOT NULL,"
    " created TEXT NOT NULL)",
    "CREATE TABLE task_states (task TEXT PRIMARY KEY, document TEXT NOT NULL, digest TEXT NOT NULL)",
    "CREATE TABLE blobs (name TEXT PRIMARY KEY, packed BLOB NOT NULL)",
)


def create_first(db: sqlite3.Connection) -> None:
    """Make the tables of version 1 in an empty database; the caller holds the transaction."""
    for table in TABLES:
        db.execute(table)
    db.execute(f"PRAGMA application_id = {APPLICATION_ID}")
    db.execute("PRAGMA user_version = 1")


def layout(db: sqlite3.Connection) -> dict[str, tuple[str, ...]]:
    """Everything that the database holds by name, tables with their columns.

    Triggers, views and indexes of somebody else's making appear here too, so that unequal layouts tell them.
    """
    names = db.execute(
        "SELECT type || ' ' || name, name FROM sqlite_master WHERE name NOT LIKE 'sqlite#_%' ESCAPE '#'"
    ).fetchall()
    return {
        kind: tuple(row[0] for row in db.execute("SELECT name FROM pragma_table_info(?)", (name,)))
        for kind, name in names
    }
