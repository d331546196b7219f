"""What is kept of the chosen question, and how it is brought up to date. QtCore only."""

from collections.abc import Callable
from typing import TYPE_CHECKING

from PySide6.QtCore import QObject, Signal

from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.faults import Fault
from plumbrule_core.documents.findings import Finding, Judgement
from plumbrule_core.documents.plan import Plan
from plumbrule_core.documents.run_state import RunState
from plumbrule_core.errors import PlumbruleError
from plumbrule_desktop.state.clerk import Clerk
from plumbrule_desktop.state.seen import Casebook, Entry, Offer, shelf_of

if TYPE_CHECKING:
    from plumbrule_core.session import Session


class Kept(QObject):
    """Plan, check, state and judgement of the chosen question, as the clerk brought them.

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
    begun = Signal()
    """A person begins something new: what the last message said is over."""
    message = Signal(str, str)
    """A sentence for people, and its kind: `note` or `error`."""

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._clerk = Clerk("plumbrule-clerk", self)
        self._session: Session | None = None
        self._casebook = Casebook()
        self._offer = Offer()
        self._entries: tuple[Entry, ...] = ()
        self._brief_id: int | None = None
        self._brief = Brief()
        self._weighed: Brief | None = None
        self._own_faults: tuple[Fault, ...] = ()
        self._generation = 0
        self._fresh = True
        self._forget()

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
        if self._weighed is not self._brief:
            self._weighed, self._own_faults = self._brief, self._brief.faults()
        own, later = self._own_faults, self._plan.faults if self._plan else ()
        return (*own, *(fault for fault in later if fault not in own))

    # bringing what is kept up to date

    def _refuse_read_only(self) -> bool:
        if self._casebook.read_only:
            self.message.emit(self._casebook.why_read_only, "error")
        return self._casebook.read_only

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
            lambda: shelf_of(session, brief_id), lambda seen: self._shelved(seen, generation), self._say
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
