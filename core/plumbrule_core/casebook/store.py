"""The open casebook."""

import sqlite3
import threading
from collections.abc import Iterable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from datetime import UTC, datetime
from pathlib import Path
from types import TracebackType
from typing import Self

import numpy as np

from plumbrule_core.casebook import arrays, history, opening, saving
from plumbrule_core.casebook.connection import in_words, transaction
from plumbrule_core.casebook.history import Step
from plumbrule_core.casebook.rows import digest_of_row, read_row, sift
from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.results import ArrayRef, Result
from plumbrule_core.documents.run_state import TaskState
from plumbrule_core.errors import CasebookError


@dataclass(frozen=True, slots=True)
class BriefEntry:
    """One question of the casebook and its number, which stays its own."""

    id: int
    brief: Brief


class Casebook:
    """Questions with their undo history, results, traces and arrays in one file.

    Every change is safe on the disk when its method returns. Methods may be called from several threads.
    All raise CasebookError where the file, the disk or the content is at fault.
    """

    def __init__(self, opened: opening.Opened) -> None:
        self._opened = opened
        self._guard = threading.RLock()
        self._closed = False

    @classmethod
    def open(cls, path: Path | None) -> Self:
        """Open a casebook, or create it where the folder exists; None makes an unsaved one, gone at close.

        A file of an older version is migrated, with a copy of it left beside. A file of another program, of a
        newer version or with damaged pages is refused and left as it is.
        """
        return cls(opening.open_casebook(path))

    def __enter__(self) -> Self:
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        self.close()

    def close(self) -> None:
        """Close the file, which is then one file again; does nothing the second time."""
        with self._guard:
            if not self._closed:
                self._closed = True
                with in_words("The casebook cannot be closed"):
                    opening.close(self._opened)

    @property
    def path(self) -> Path | None:
        """Where it is saved, or None while it is not."""
        return self._opened.path

    @property
    def read_only(self) -> bool:
        """Whether it can only be read."""
        return bool(self.why_read_only)

    @property
    def why_read_only(self) -> str:
        """The sentence for people; empty where it can be changed."""
        return self._opened.why_read_only

    @property
    def migrated_from(self) -> Path | None:
        """Where the copy of the older file is, if opening migrated one."""
        return self._opened.migrated_from

    def refresh(self) -> None:
        """See what the writer has finished since; nothing to do where this one is the writer."""
        with self._reading():
            path = self._opened.path
            if not self.read_only or path is None:
                return
            with in_words(f"{path.name} cannot be read again"):
                older, self._opened = self._opened, opening.picture(path, self.why_read_only)
                opening.close(older)

    # the questions

    def briefs(self) -> tuple[BriefEntry, ...]:
        """The questions in their order, without those that are damaged."""
        return tuple(BriefEntry(key, brief) for key, brief in self._sifted_briefs()[0].items())

    def brief(self, brief_id: int) -> Brief:
        """One question; raises KeyError where there is none, CasebookError where it is damaged."""
        with self._reading() as db:
            row = db.execute("SELECT id, document, digest FROM briefs WHERE id = ?", (brief_id,)).fetchone()
        if row is None:
            raise KeyError(brief_id)
        return read_row(Brief, row, _question(brief_id))

    def add_brief(self, brief: Brief, label: str) -> int:
        """Add a question at the end; `label` names the step in words. Returns its number."""
        with self._writing() as db:
            return history.add(db, brief.to_json(), label)

    def put_brief(self, brief_id: int, brief: Brief, label: str) -> None:
        """Replace a question; an equal one makes no step. Raises KeyError where there is none."""
        with self._writing() as db:
            position, before = history.placed(db, brief_id)
            if not _same(brief, before):
                history.make(db, Step(label, brief_id, position, before, brief.to_json()))

    def remove_brief(self, brief_id: int, label: str) -> None:
        """Take a question out; results stay. Raises KeyError where there is none."""
        with self._writing() as db:
            position, before = history.placed(db, brief_id)
            history.make(db, Step(label, brief_id, position, before, None))

    def undo(self) -> str | None:
        """Take the last step back; returns its label, or None where there is none."""
        with self._writing() as db:
            return history.turn(db, undone=False)

    def redo(self) -> str | None:
        """Make the step again that was taken back; returns its label, or None where there is none."""
        with self._writing() as db:
            return history.turn(db, undone=True)

    @property
    def undo_label(self) -> str | None:
        """What undo would take back, in words."""
        with self._reading() as db:
            return history.label(db, undone=False)

    @property
    def redo_label(self) -> str | None:
        """What redo would make again, in words."""
        with self._reading() as db:
            return history.label(db, undone=True)

    def forget_history(self) -> None:
        """Forget every step; the questions stay as they are."""
        with self._writing() as db:
            history.forget(db)

    # what was computed

    def results(self) -> dict[str, Result]:
        """The results by task, the oldest first, without those that are damaged."""
        return self._sifted_results()[0]

    def put_result(self, result: Result) -> None:
        """Keep what a task found, in place of what it found before."""
        text = result.to_json()
        now = datetime.now(UTC).isoformat(timespec="seconds")
        with self._writing() as db:
            db.execute(
                "INSERT OR REPLACE INTO results (task, document, digest, created) VALUES (?, ?, ?, ?)",
                (result.task, text, digest_of_row(result.task, text), now),
            )

    def put_task_state(self, state: TaskState) -> None:
        """Keep a task's trace and log, in place of the last ones."""
        text = state.to_json()
        with self._writing() as db:
            db.execute(
                "INSERT OR REPLACE INTO task_states (task, document, digest) VALUES (?, ?, ?)",
                (state.task, text, digest_of_row(state.task, text)),
            )

    def task_states(self, ids: Iterable[str]) -> dict[str, TaskState]:
        """The kept traces and logs of these tasks, without what is missing or damaged."""
        with self._reading() as db:
            asked = "SELECT task, document, digest FROM task_states WHERE task = ?"
            rows = [row for task in ids for row in db.execute(asked, (task,))]
        return sift(TaskState, rows, _trace)[0]

    def put_array(self, npy: bytes | Path) -> ArrayRef:
        """Keep an array given as the bytes of an `.npy` file, or its path; pickled objects are refused."""
        with self._writing() as db:
            content = npy.read_bytes() if isinstance(npy, Path) else npy
            return arrays.put(db, content)

    def array(self, ref: ArrayRef) -> np.ndarray:
        """An array that was kept."""
        with self._reading() as db:
            return arrays.get(db, ref)

    @property
    def damaged(self) -> tuple[str, ...]:
        """One sentence for each question, result and trace that cannot be read; reads them all."""
        return (*self._sifted_briefs()[1], *self._sifted_results()[1], *self._sifted_states()[1])

    def save_copy(self, path: Path) -> None:
        """Write the whole casebook to another file, replacing what is there once the copy is complete."""
        with self._reading() as db, in_words(f"{path.name} cannot be saved"):
            saving.save_copy(db, self.path, path)

    @contextmanager
    def _reading(self) -> Iterator[sqlite3.Connection]:
        with self._guard:
            if self._closed:
                raise CasebookError("The casebook is closed.")
            with in_words("The casebook cannot be read"):
                yield self._opened.db

    @contextmanager
    def _writing(self) -> Iterator[sqlite3.Connection]:
        with self._guard:
            if self._closed:
                raise CasebookError("The casebook is closed.")
            if self.read_only:
                raise CasebookError(f"The casebook cannot be changed. {self.why_read_only}")
            with in_words("The change was not kept"), transaction(self._opened.db):
                yield self._opened.db

    def _sifted_briefs(self) -> tuple[dict[int, Brief], tuple[str, ...]]:
        with self._reading() as db:
            rows = db.execute("SELECT id, document, digest FROM briefs ORDER BY position").fetchall()
        return sift(Brief, rows, _question)

    def _sifted_results(self) -> tuple[dict[str, Result], tuple[str, ...]]:
        with self._reading() as db:
            rows = db.execute("SELECT task, document, digest FROM results ORDER BY rowid").fetchall()
        return sift(Result, rows, _result)

    def _sifted_states(self) -> tuple[dict[str, TaskState], tuple[str, ...]]:
        with self._reading() as db:
            rows = db.execute("SELECT task, document, digest FROM task_states ORDER BY rowid").fetchall()
        return sift(TaskState, rows, _trace)


def _question(brief_id: int) -> str:
    return f"Question {brief_id}"


def _result(task: str) -> str:
    return f"The result of task {task}"


def _trace(task: str) -> str:
    return f"The trace of task {task}"


def _same(brief: Brief, text: str) -> bool:
    try:
        return Brief.from_json(text).digest == brief.digest
    except ValueError:
        return False
