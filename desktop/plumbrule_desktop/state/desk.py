"""The desk: the one thing that holds state in the window. QtCore only; widgets read it and hold no copy."""

import threading
from collections.abc import Callable, Iterable
from contextlib import ExitStack
from pathlib import Path
from typing import TYPE_CHECKING, Any

from PySide6.QtCore import QObject

from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.edits import edited
from plumbrule_core.documents.findings import Edit, Remedy
from plumbrule_core.documents.species import Species
from plumbrule_core.errors import PlumbruleError, Refused
from plumbrule_desktop.state.changes import with_species
from plumbrule_desktop.state.clerk import Clerk
from plumbrule_desktop.state.running import Running
from plumbrule_desktop.state.seen import Casebook, Entry, Offer, ids_of, title_of

if TYPE_CHECKING:
    from plumbrule_core.session import Session

__all__ = ["Casebook", "Desk", "Entry", "Offer", "title_of"]

CLOSE_SECONDS = 10.0
"""So long edits may take to be written when the window closes."""
SHUT_SECONDS = 2.0


class Desk(Running):
    """The open casebook, the chosen question, and the running run: what people can do with them."""

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._held: Session | None = None
        """The casebook that is open; belongs to the clerk's thread."""
        self._reader = Clerk("plumbrule-reader", self)

    # opening and closing

    def new(self) -> None:
        """Begin an unsaved casebook with one empty question."""
        self._begin(lambda session: session.open(None))

    def open(self, path: Path) -> None:
        """Open a casebook; a message says why it cannot be. The one that is open is only read anew."""
        self._begin(lambda session: session.open(path), path)

    def open_demo(self) -> None:
        """Open an unsaved casebook with the demo questions."""
        self._begin(lambda session: session.demo())

    def save_copy(self, path: Path, then: Callable[[], None] | None = None) -> None:
        """Write the casebook to another file; an unsaved one is carried on in that file."""
        session, unsaved = self._session, self._casebook.path is None
        if session is None:
            return

        def saved(_: object) -> None:
            self.message.emit(f"Saved as {path.name}", "note")
            if then is not None:
                then()
            elif unsaved and not self.running:
                self.open(path)

        self._clerk.do(lambda: session.save_copy(path), saved, self._say)

    def close(self) -> None:
        """Close the casebook and end the threads; a run must have ended before."""
        self._timer.stop()
        self._session = None
        self._generation += 1  # what only the window wants to know is not worked out any more
        self._clerk.do(self._shut)
        if not self._clerk.close(CLOSE_SECONDS):
            # A job that never ends is in hand and may hold the casebook: closing must not wait for it either.
            shutting = threading.Thread(target=self._shut, daemon=True)
            shutting.start()
            shutting.join(SHUT_SECONDS)
        self._reader.close()

    def _shut(self) -> None:
        if self._held is not None:
            self._held.close()

    def _begin(self, opened: "Callable[[type[Session]], Session]", path: Path | None = None) -> None:
        if self.running:
            self.message.emit("A run is under way. Stop it before another casebook is opened.", "error")
            return

        def work() -> tuple["Session", Offer, int]:
            from plumbrule_core import session as core

            offer = Offer(core.rung_cards(), core.basis_names(), core.Session.export_suffixes())
            old = self._held
            if old is not None and _writes(old, path):
                return old, offer, ids_of(old)[0]
            fresh, first = _furnished(opened, core.Session)
            self._held = fresh
            if old is not None:
                self._close_old(old)
            return fresh, offer, first

        def then(outcome: tuple["Session", Offer, int]) -> None:
            fresh, self._offer, first = outcome
            if fresh is not self._session:
                self._session, self._brief_id, self._computed = fresh, first or None, False
            self._refresh(reset=True)

        def failed(error: Exception) -> None:
            self._say(error)
            if self._session is None:
                self.new()

        self._clerk.do(work, then, failed)

    def _close_old(self, old: "Session") -> None:
        try:
            old.close()
        except (PlumbruleError, OSError) as error:
            trouble = error
            self._clerk.post(lambda: self._say(trouble))

    # questions

    def choose(self, brief_id: int) -> None:
        """Show another question of the casebook."""
        if brief_id != self._brief_id:
            self._brief_id = brief_id
            self._refresh(reset=True)

    def add_brief(self, brief: Brief, says: str = "Add a question") -> None:
        """Add a question and choose it."""
        self._with_session(lambda session: session.add_brief(brief, says), self._chosen)

    def add_question(self) -> None:
        """Add an empty question and choose it."""
        self.add_brief(Brief())

    def duplicate(self) -> None:
        """A copy of the chosen question."""
        title = f"{title_of(self._brief)}, copy"[:200]
        self.add_brief(self._brief.model_copy(update={"title": title}), "Copy the question")

    def remove_brief(self) -> None:
        """Take the chosen question out; an empty one takes the place of the last."""
        gone = self._brief_id
        if gone is None:
            return

        def work(session: "Session") -> int:
            session.remove_brief(gone)
            left = [entry.id for entry in session.briefs()]
            return left[0] if left else session.add_brief(Brief())

        self._with_session(work, self._chosen)

    def _chosen(self, brief_id: int) -> None:
        self._brief_id = brief_id
        self._refresh(reset=True)

    def edit(self, edits: Iterable[Edit], says: str) -> bool:
        """Change the chosen question; `says` names the step. False, with a message, where it cannot be."""
        self.begun.emit()
        return self._edit(edits, says)

    def _edit(self, edits: Iterable[Edit], says: str) -> bool:
        brief_id = self._brief_id
        if brief_id is None or self._refuse_read_only():
            return False
        try:
            brief = edited(self._brief, edits)
        except Refused as refused:
            self._say(refused)
            return False
        if brief == self._brief:
            return True
        self._generation += 1
        self._brief = brief
        self._plan, self._check, self._judgement = None, (), None
        self.brief_changed.emit()
        self._with_session(
            lambda session: session.put_brief(brief_id, brief, says), lambda _: self._refresh()
        )
        return True

    def apply(self, remedy: Remedy) -> None:
        """Do what a finding offers, as one step that can be undone."""
        if remedy.edits and not self.edit(remedy.edits, remedy.label):
            return
        if remedy.then_run:
            self.run()

    def add_species(self, species: Iterable[Species], says: str) -> None:
        """Put molecules into the chosen question, each under a name that is still free."""
        self._edit(with_species(self._brief, tuple(species)), says)

    def undo(self) -> None:
        """Take the last step back."""
        self.begun.emit()
        self._with_session(lambda session: (session.undo(), ids_of(session))[1], self._stepped)

    def redo(self) -> None:
        """Make the step again."""
        self.begun.emit()
        self._with_session(lambda session: (session.redo(), ids_of(session))[1], self._stepped)

    def _stepped(self, ids: tuple[int, ...]) -> None:
        if not ids:
            self.add_question()
            return
        if self._brief_id not in ids:
            self._brief_id = ids[-1]
        self._refresh()

    def _with_session(self, work: "Callable[[Session], Any]", then: Callable[[Any], None]) -> None:
        session = self._session
        if session is None or self._refuse_read_only():
            return

        def failed(error: Exception) -> None:
            self._say(error)
            self._refresh()

        self._clerk.do(lambda: work(session), then, failed)

    # molecules

    def read(
        self, work: Callable[[], tuple[Species, ...]], then: Callable[[tuple[Species, ...]], None]
    ) -> None:
        """Read molecules in a thread; a message says why they cannot be read."""
        self.begun.emit()
        self._reader.do(work, then, self._say)

    def read_text(self, text: str, name: str, then: Callable[[tuple[Species, ...]], None]) -> None:
        """Read pasted text or SMILES."""

        def work() -> tuple[Species, ...]:
            from plumbrule_core.session import read_molecules

            return read_molecules(text, name)

        self.read(work, then)

    def read_file(self, path: Path, then: Callable[[tuple[Species, ...]], None]) -> None:
        """Read a molecule file."""

        def work() -> tuple[Species, ...]:
            from plumbrule_core.session import read_molecule_file

            return read_molecule_file(path)

        self.read(work, then)

    # the report

    def report(self, then: Callable[[str], None]) -> None:
        """Hand the report's HTML to `then`."""
        session, brief_id = self._session, self._brief_id
        if session is not None and brief_id is not None and not self.faults:
            self._clerk.do(lambda: session.report_html(brief_id), then, self._say)

    def export(self, path: Path, then: Callable[[], None] | None = None) -> None:
        """Write the question in the format that the suffix names; `then` is called once it is written."""
        session, brief_id = self._session, self._brief_id
        if session is None or brief_id is None:
            return

        def written(_: object) -> None:
            self.message.emit(f"Written to {path}", "note")
            if then is not None:
                then()

        self._clerk.do(lambda: session.export(brief_id, path), written, self._say)


def _writes(session: "Session", path: Path | None) -> bool:
    """Whether this session has that file open and may write it: a second one could only read it."""
    own = session.path
    return path is not None and own is not None and not session.read_only and own.resolve() == path.resolve()


def _furnished(opened: "Callable[[type[Session]], Session]", core: "type[Session]") -> "tuple[Session, int]":
    """A casebook with at least one question, and the number of the first; closed again where that fails."""
    with ExitStack() as undone:
        session = opened(core)
        undone.callback(session.close)
        if not session.briefs() and not session.read_only:
            session.add_brief(Brief(), "Begin")
            session.forget_history()
        first = next(iter(ids_of(session)), 0)
        undone.pop_all()
    return session, first
