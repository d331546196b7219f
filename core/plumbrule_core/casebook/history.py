"""The questions and their undo history: every change of a question is a step that can be taken back."""

import sqlite3
from dataclasses import dataclass

from plumbrule_core.casebook.rows import digest_of_row, parsed
from plumbrule_core.documents.brief import Brief

MAX_STEPS = 500
"""Older steps are forgotten (common practice, no source)."""


@dataclass(frozen=True, slots=True)
class Step:
    """One change: the question's text before and after; None where it was or is not there."""

    label: str
    brief: int
    position: int
    before: str | None
    after: str | None


def add(db: sqlite3.Connection, text: str, label: str) -> int:
    """Add a question at the end, under a number that no other one ever had; returns the number."""
    number = db.execute(
        "SELECT ifnull(max(seq), 0) + 1 FROM sqlite_sequence WHERE name = 'briefs'"
    ).fetchone()[0]
    position = db.execute("SELECT ifnull(max(position), 0) + 1 FROM briefs").fetchone()[0]
    make(db, Step(label, number, position, None, text))
    return int(number)


def placed(db: sqlite3.Connection, brief: int) -> tuple[int, str]:
    """The position and the text of a question; raises KeyError where there is none."""
    row = db.execute("SELECT position, document FROM briefs WHERE id = ?", (brief,)).fetchone()
    if row is None:
        raise KeyError(brief)
    return int(row[0]), str(row[1])


def make(db: sqlite3.Connection, step: Step) -> None:
    """Make the change and remember it; what was undone can no longer be redone."""
    db.execute("DELETE FROM steps WHERE undone")
    db.execute(
        "INSERT INTO steps (label, brief, position, before, after) VALUES (?, ?, ?, ?, ?)",
        (step.label, step.brief, step.position, step.before, step.after),
    )
    db.execute("DELETE FROM steps WHERE number <= (SELECT max(number) FROM steps) - ?", (MAX_STEPS,))
    _place(db, step, step.after)


def label(db: sqlite3.Connection, *, undone: bool) -> str | None:
    """What the next undo (or redo, of what is undone) would change, in words."""
    found = _next(db, undone)
    return found[1].label if found else None


def turn(db: sqlite3.Connection, *, undone: bool) -> str | None:
    """Take the last step back, or make the last one that was undone again; returns its label.

    Raises CasebookError where the stored text is damaged; nothing is changed then.
    """
    found = _next(db, undone)
    if found is None:
        return None
    number, step = found
    text = step.after if undone else step.before
    if text is not None:
        parsed(Brief, text, f"What the step '{step.label}' would bring back")
    _place(db, step, text)
    db.execute("UPDATE steps SET undone = ? WHERE number = ?", (not undone, number))
    return step.label


def forget(db: sqlite3.Connection) -> None:
    """Forget all steps; the questions stay as they are."""
    db.execute("DELETE FROM steps")


def _next(db: sqlite3.Connection, undone: bool) -> tuple[int, Step] | None:
    row = db.execute(
        "SELECT number, label, brief, position, before, after FROM steps WHERE undone = ? ORDER BY number "
        + ("ASC" if undone else "DESC")
        + " LIMIT 1",
        (undone,),
    ).fetchone()
    return (row[0], Step(*row[1:])) if row else None


def _place(db: sqlite3.Connection, step: Step, text: str | None) -> None:
    if text is None:
        db.execute("DELETE FROM briefs WHERE id = ?", (step.brief,))
    else:
        db.execute(
            "INSERT OR REPLACE INTO briefs (id, position, document, digest) VALUES (?, ?, ?, ?)",
            (step.brief, step.position, text, digest_of_row(step.brief, text)),
        )
