"""Is this file a casebook that this program can open? Looked at before a byte of it is changed."""

import sqlite3
import struct
from pathlib import Path

from plumbrule_core.casebook.migrations import newest, newest_layout, version_of
from plumbrule_core.casebook.schema import APPLICATION_ID, layout
from plumbrule_core.errors import CasebookError

_HEADER = struct.Struct(">16s H 2x 8x I 28x I 4x I 28x")
"""Magic string, page size, pages, user_version, application_id (https://www.sqlite.org/fileformat2.html)."""
_MAGIC = b"SQLite format 3\x00"


def check_header(path: Path) -> None:
    """Refuse what its first hundred bytes and its length show to be no casebook; raises CasebookError."""
    with path.open("rb") as file:
        head = file.read(_HEADER.size)
    if not head:
        raise CasebookError(
            f"{path.name} is empty, so it is no casebook; choose another file or another name."
        )
    if len(head) < _HEADER.size:
        raise _foreign(path.name)
    magic, page, pages, version, application = _HEADER.unpack(head)
    if magic != _MAGIC:
        raise _foreign(path.name)
    check_marks(path.name, application, version)
    # What a log beside the file still holds may stand in the header before it stands in the file.
    due, there = pages * (65536 if page == 1 else page), path.stat().st_size
    if there < due and not _beside(path, "-wal").exists() and not _beside(path, "-journal").exists():
        raise CasebookError(
            f"{path.name} is cut short: {there} of {due} bytes are there. It was left as it is; "
            "copy it again from where it came from, or open a backup."
        )


def check_marks(name: str, application: int, version: int) -> None:
    """Refuse a file of another program or of a newer version; raises CasebookError."""
    if application != APPLICATION_ID:
        raise _foreign(name)
    if version > newest():
        raise CasebookError(
            f"{name} was written by a newer Plumbrule: it has version {version} and this program knows up to "
            f"{newest()}. It was left as it is; open it with the newer program."
        )
    if version < 1:
        raise CasebookError(f"{name} is damaged: it has no version.")


def check_content(name: str, db: sqlite3.Connection) -> None:
    """Refuse a file of another program, of a newer version, or with broken pages; raises CasebookError."""
    check_marks(name, int(db.execute("PRAGMA application_id").fetchone()[0]), version_of(db))
    says = db.execute("PRAGMA quick_check(1)").fetchone()[0]
    if says != "ok":
        raise CasebookError(f"{name} is damaged and was left as it is; open a backup. SQLite says: {says}")


def check_layout(name: str, db: sqlite3.Connection) -> None:
    """Refuse tables that differ from those of the newest version; raises CasebookError."""
    if layout(db) != newest_layout():
        raise CasebookError(f"{name} is damaged: its tables are not those of a casebook.")


def _foreign(name: str) -> CasebookError:
    return CasebookError(f"{name} is no casebook; choose another file, or another name for a new casebook.")


def _beside(path: Path, suffix: str) -> Path:
    return path.with_name(path.name + suffix)
