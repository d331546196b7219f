"""The desk: the one thing that holds state in the window. QtCore only; widgets read it and hold no copy."""

import threading
from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Any, Literal

from PySide6.QtCore import QObject, QTimer, Signal

from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.edits import edited
from plumbrule_core.documents.events import Event, Failed, Finished
from plumbrule_core.documents.faults import Fault
from plumbrule_core.documents.findings import Edit, Finding, Judgement, Remedy
from plumbrule_core.documents.plan import Machine, Plan
from plumbrule_core.documents.run_state import RunState
from plumbrule_core.documents.species import Species
from plumbrule_core.errors import PlumbruleError, Refused
from plumbrule_desktop.state.clerk import Clerk

if TYPE_CHECKING:
    from plumbrule_core.session import RungCard, Session

Kind = Literal["note", "error"]
TICK_MS = 100


@dataclass(frozen=True, slots=True)
class Entry:
    """One question of the casebook, as the chooser lists it."""

    id: int
    title: str


@dataclass(frozen=True, slots=True)
class Casebook:
    """What the window shows of the open file."""

    path: Path | None = None
    read_only: bool = False
    why_read_only: str = ""
    damaged: tuple[str, ...] = ()
    undo_label: str | None = None
    redo_label: str | None = None


@dataclass(frozen=True, slots=True)
class Offer:
    """What the core can do, known once it has been imported."""

    rungs: "tuple[RungCard, ...]" = ()
    bases: tuple[str, ...] = ()
    exports: Mapping[str, str] | None = None


class Desk(QObject):
    """The open casebook, the chosen question, and the running run.

    Every call to the session is made in the clerk's thread; what comes back is kept here and announced.
    Properties never compute and never block.
    """

    casebook_changed = Signal()
    """Another file, its name, read-only state, damage, or the undo labels."""
    briefs_changed = Signal()
    """The list of questions, or which one is chosen."""
    brief_changed = Signal()
    plan_changed = Signal()
    """The plan, its faults, or the findings before the run."""
    run_changed = Signal(object)
    """A frozenset of the task ids that moved; empty at the start and the end of a run."""
    judgement_changed = Signal()
    message = Signal(str, str)
    """A sentence for people, and its kind: `note` or `error`."""

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._clerk = Clerk("plumbrule-clerk", self)
        self._reader = Clerk("plumbrule-reader", self)
        self._session: Session | None = None
        self._casebook = Casebook()
        self._offer = Offer()
        self._entries: tuple[Entry, ...] = ()
        self._brief_id: int | None = None
        self._brief = Brief()
        self._generation = 0
        self._fresh = True
        self._forget()
        self._run: Any = None
        self._running_id: int | None = None
        self._starting = False
        self._stop_asked = False
        self._events: list[Event] = []
        self._events_lock = threading.Lock()
        self._timer = QTimer(self, interval=TICK_MS)
        self._timer.timeout.connect(self._tick)

    def _forget(self) -> None:
        self._plan: Plan | None = None
        self._check: tuple[Finding, ...] = ()
        self._state = RunState()
        self._judgement: Judgement | None = None

    # what is known

    @property
    def casebook(self) -> Casebook:
        """The open file."""
        return self._casebook

    @property
    def offer(self) -> Offer:
        """Rungs, basis sets and export formats."""
        return self._offer

    @property
    def entries(self) -> tuple[Entry, ...]:
        """The questions of the casebook."""
        return self._entries

    @property
    def brief_id(self) -> int | None:
        """The number of the chosen question, or None while nothing is open."""
        return self._brief_id

    @property
    def brief(self) -> Brief:
        """The chosen question with its species and recipe."""
        return self._brief

    @property
    def plan(self) -> Plan | None:
        """The plan, or None while it is being made."""
        return self._plan

    @property
    def check(self) -> tuple[Finding, ...]:
        """Findings before the run."""
        return self._check

    @property
    def state(self) -> RunState:
        """Where the tasks of the plan stand."""
        return self._state

    @property
    def judgement(self) -> Judgement | None:
        """The answer and what it is worth, or None while it is not known."""
        return self._judgement

    @property
    def faults(self) -> tuple[Fault, ...]:
        """All that keeps the question from being run: seen at once, or by the planner."""
        own = self._brief.faults()
        later = self._plan.faults if self._plan else ()
        return (*own, *(fault for fault in later if fault not in own))

    @property
    def running(self) -> bool:
        """Whether a run is being started or is under way."""
        return self._starting or self._run is not None

    @property
    def running_id(self) -> int | None:
        """The number of the question that is being run."""
        return self._running_id

    # opening and closing

    def new(self) -> None:
        """Begin an unsaved casebook with one empty question."""
        self._begin(lambda session: session.open(None))

    def open(self, path: Path) -> None:
        """Open a casebook; a message says why it cannot be."""
        self._begin(lambda session: session.open(path))

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
        session, self._session = self._session, None
        if session is not None:
            closed = threading.Event()

            def shut() -> None:
                session.close()
                closed.set()

            self._clerk.do(shut)
            closed.wait(5)
        self._clerk.close()
        self._reader.close()

    def _begin(self, opened: "Callable[[type[Session]], Session]") -> None:
        if self.running:
            self.message.emit("A run is under way. Stop it before another casebook is opened.", "error")
            return
        old = self._session

        def work() -> tuple["Session", Offer, int]:
            from plumbrule_core import session as core

            fresh = opened(core.Session)
            if not fresh.briefs():
                _first_question(fresh)
            if old is not None:
                old.close()
            offer = Offer(core.rung_cards(), core.basis_names(), core.Session.export_suffixes())
            return fresh, offer, fresh.briefs()[0].id if fresh.briefs() else 0

        def then(outcome: tuple["Session", Offer, int]) -> None:
            self._session, self._offer, first = outcome
            self._brief_id = first or None
            self._refresh(reset=True)

        def failed(error: Exception) -> None:
            self._say(error)
            if self._session is None:
                self.new()

        self._clerk.do(work, then, failed)

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
        from plumbrule_desktop.state.changes import with_species

        self.edit(with_species(self._brief, tuple(species)), says)

    def undo(self) -> None:
        """Take the last step back."""
        self._with_session(lambda session: (session.undo(), _ids(session))[1], self._stepped)

    def redo(self) -> None:
        """Make the step again."""
        self._with_session(lambda session: (session.redo(), _ids(session))[1], self._stepped)

    def _stepped(self, ids: tuple[int, ...]) -> None:
        if ids and self._brief_id not in ids:
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

    def _refuse_read_only(self) -> bool:
        if self._casebook.read_only:
            self.message.emit(self._casebook.why_read_only, "error")
        return self._casebook.read_only

    # molecules

    def read(
        self, work: Callable[[], tuple[Species, ...]], then: Callable[[tuple[Species, ...]], None]
    ) -> None:
        """Read molecules in a thread; a message says why they cannot be read."""
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

    # the run

    def run(self) -> None:
        """Start the tasks that are not answered yet."""
        session, brief_id = self._session, self._brief_id
        if session is None or brief_id is None or self.running or self._refuse_read_only():
            return
        self._starting, self._stop_asked, self._running_id = True, False, brief_id
        self.run_changed.emit(frozenset())

        def failed(error: Exception) -> None:
            self._starting, self._running_id = False, None
            self._say(error)
            self.run_changed.emit(frozenset())

        self._clerk.do(lambda: session.run(brief_id, self._on_event), self._started, failed)

    def stop(self) -> None:
        """Ask the run to stop; what was checkpointed stays. Never waits."""
        self._stop_asked = True
        if self._run is not None:
            self._run.stop()

    def _started(self, run: Any) -> None:
        self._starting, self._run = False, run
        if self._stop_asked:
            run.stop()
        self._timer.start()
        self._reload_state(frozenset())

    def _on_event(self, event: Event) -> None:
        with self._events_lock:
            self._events.append(event)

    def _tick(self) -> None:
        ended = self._run is not None and not self._run.running
        with self._events_lock:
            events, self._events = self._events, []
        if events:
            self._reload_state(frozenset(event.task for event in events))
        for event in events:
            if isinstance(event, Failed):
                self.message.emit(event.reason, "error")
        if ended:
            self._ended(self._run)
        if ended or any(isinstance(event, Finished) for event in events):
            self._rejudge()

    def _ended(self, run: Any) -> None:
        self._timer.stop()
        self._run, self._running_id = None, None
        self._reload_state(frozenset())
        try:
            run.wait(0)
        except PlumbruleError as error:
            self._say(error)
            return
        if run.outcome != "failed":
            stopped = "Stopped. What was computed stays; Run carries on from there."
            self.message.emit(stopped if run.outcome == "stopped" else "The run is done.", "note")

    @property
    def stopping(self) -> bool:
        """Whether the run was asked to stop and has not ended yet."""
        return self.running and self._stop_asked

    def _reload_state(self, moved: frozenset[str]) -> None:
        session, brief_id = self._session, self._brief_id
        if session is None or brief_id is None:
            return

        def then(state: RunState) -> None:
            if brief_id == self._brief_id:
                self._state = state
            self.run_changed.emit(moved)

        self._clerk.do(lambda: session.state(brief_id), then, self._say)

    def _rejudge(self) -> None:
        session, brief_id, generation = self._session, self._brief_id, self._generation
        if session is None or brief_id is None or self.faults:
            return

        def then(judgement: Judgement) -> None:
            if generation == self._generation:
                self._judgement = judgement
                self.judgement_changed.emit()

        self._clerk.do(lambda: session.judge(brief_id), then, self._say)

    # the report

    def report(self, then: Callable[[str], None]) -> None:
        """Hand the report's HTML to `then`."""
        session, brief_id = self._session, self._brief_id
        if session is not None and brief_id is not None and not self.faults:
            self._clerk.do(lambda: session.report_html(brief_id), then, self._say)

    def export(self, path: Path) -> None:
        """Write the question in the format that the suffix names."""
        session, brief_id = self._session, self._brief_id
        if session is not None and brief_id is not None:
            done = f"Exported as {path.name}"
            self._clerk.do(
                lambda: session.export(brief_id, path), lambda _: self.message.emit(done, "note"), self._say
            )

    def machine(self, then: Callable[[Machine], None]) -> None:
        """Hand what this computer offers to `then`."""
        session = self._session
        if session is not None:
            self._clerk.do(session.machine, then, self._say)

    # bringing what is kept up to date

    def _say(self, error: Exception) -> None:
        if not isinstance(error, PlumbruleError | OSError):
            raise error
        self.message.emit(str(error), "error")

    def _refresh(self, reset: bool = False) -> None:
        """Read everything anew, the cheap first; an answer to an older call is dropped."""
        session, brief_id = self._session, self._brief_id
        if session is None or brief_id is None:
            return
        self._generation += 1
        generation = self._generation
        if reset:
            self._fresh = True
            self._forget()
        self._clerk.do(
            lambda: _shelf(session, brief_id), lambda seen: self._shelved(seen, generation), self._say
        )
        self._clerk.do(
            lambda: self._survey(session, brief_id, generation),
            oops=lambda error: self._say(error) if generation == self._generation else None,
        )

    def _shelved(self, seen: tuple[Casebook, tuple[Entry, ...], Brief], generation: int) -> None:
        if generation != self._generation:
            return
        self._casebook, self._entries, brief = seen
        news, self._brief, self._fresh = self._fresh or brief != self._brief, brief, False
        self.casebook_changed.emit()
        self.briefs_changed.emit()
        if news:
            self.brief_changed.emit()

    def _survey(self, session: "Session", brief_id: int, generation: int) -> None:
        """In the clerk's thread: plan, check, state, judgement, each announced as soon as it is there."""
        plan = session.plan(brief_id)
        self._hand(generation, "_plan", plan, self.plan_changed.emit)
        for name, work, announce in (
            ("_check", session.check, self.plan_changed.emit),
            ("_state", session.state, lambda: self.run_changed.emit(frozenset())),
            ("_judgement", session.judge, self.judgement_changed.emit),
        ):
            if generation != self._generation:
                return
            if name == "_judgement" and plan.faults:
                self._hand(generation, name, None, announce)
            else:
                self._hand(generation, name, work(brief_id), announce)

    def _hand(self, generation: int, name: str, value: object, announce: Callable[[], None]) -> None:
        def keep() -> None:
            if generation == self._generation:
                setattr(self, name, value)
                announce()

        self._clerk.post(keep)


def _first_question(session: "Session") -> None:
    if not session.read_only:
        session.add_brief(Brief(), "Begin")


def _ids(session: "Session") -> tuple[int, ...]:
    return tuple(entry.id for entry in session.briefs())


def _shelf(session: "Session", brief_id: int) -> tuple[Casebook, tuple[Entry, ...], Brief]:
    file = Casebook(
        session.path,
        session.read_only,
        session.why_read_only,
        session.damaged,
        session.undo_label,
        session.redo_label,
    )
    entries = tuple(Entry(entry.id, title_of(entry.brief)) for entry in session.briefs())
    return file, entries, session.brief(brief_id)


def title_of(brief: Brief) -> str:
    """What the chooser calls a question: its title, or its sentence."""
    if brief.title:
        return brief.title
    if brief.question is None:
        return "New question"
    words = "".join(clause.text for clause in brief.question.sentence(brief.by_name))
    return words.removeprefix("The ").split(", within")[0]
