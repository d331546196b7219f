"""The run of a question, as the window follows it. QtCore only."""

import threading
from typing import Literal, Protocol

from PySide6.QtCore import QObject, QTimer

from plumbrule_core.documents.events import Event, Failed, Finished
from plumbrule_core.documents.findings import Judgement
from plumbrule_core.documents.run_state import RunState
from plumbrule_core.errors import PlumbruleError
from plumbrule_desktop.state.kept import Kept

TICK_MS = 100
"""Events are handed on in batches, ten times a second."""


class Run(Protocol):
    """What the session gives back for a run."""

    @property
    def running(self) -> bool:
        """Whether the end is still to come."""

    @property
    def outcome(self) -> Literal["done", "failed", "stopped"] | None:
        """How it ended, None while it runs."""

    def stop(self) -> None:
        """Ask it to stop; never waits."""

    def wait(self, timeout: float | None = None) -> bool:
        """Wait for the end; raises what broke the run."""


class Running(Kept):
    """Starts and stops a run, and hands its events on in batches."""

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._run: Run | None = None
        self._running_id: int | None = None
        self._starting = False
        self._stop_asked = False
        self._labels: dict[str, str] = {}
        self._computed = False
        self._events: list[Event] = []
        self._events_lock = threading.Lock()
        self._timer = QTimer(self, interval=TICK_MS)
        self._timer.timeout.connect(self._tick)

    @property
    def running(self) -> bool:
        """Whether a run is being started or is under way."""
        return self._starting or self._run is not None

    @property
    def running_id(self) -> int | None:
        """The number of the question that is being run."""
        return self._running_id

    @property
    def unsaved_work(self) -> bool:
        """Whether the casebook is in no file and holds a step or a result that would be lost with it."""
        file = self._casebook
        return file.path is None and (file.undo_label is not None or self._computed)

    def run(self) -> None:
        """Start the tasks that are not answered yet."""
        session, brief_id = self._session, self._brief_id
        if session is None or brief_id is None or self.running or self._refuse_read_only():
            return
        self._starting, self._stop_asked, self._running_id = True, False, brief_id
        labels: dict[str, str] = {}
        self.run_changed.emit(frozenset())

        def failed(error: Exception) -> None:
            self._starting, self._running_id = False, None
            self._say(error)
            self.run_changed.emit(frozenset())

        def work() -> Run:
            labels.update({task.id: task.label for task in session.plan(brief_id).tasks})
            return session.run(brief_id, self._on_event)

        self._labels = labels
        self._clerk.do(work, self._started, failed)

    def stop(self) -> None:
        """Ask the run to stop; what was checkpointed stays. Never waits."""
        self._stop_asked = True
        if self._run is not None:
            self._run.stop()

    def _started(self, run: Run) -> None:
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
                self.message.emit(f"{self._labels[event.task]}: {event.reason}", "error")
            elif isinstance(event, Finished) and not event.reused:
                self._computed = True
        if ended and self._run is not None:
            self._ended(self._run)
        if ended or any(isinstance(event, Finished) for event in events):
            self._rejudge()

    def _ended(self, run: Run) -> None:
        self._timer.stop()
        self._run, self._running_id = None, None
        self._reload_state(frozenset())
        try:
            run.wait(0)
        except (PlumbruleError, OSError) as error:
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
