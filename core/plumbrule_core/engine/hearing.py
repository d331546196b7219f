"""What the core makes of a worker's lines: valid events of its tasks pass, everything else is said."""

import signal
from collections.abc import Callable
from typing import Literal

from pydantic import ValidationError

from plumbrule_core.documents.events import (
    MAX_LINE,
    PROTOCOL,
    Event,
    Failed,
    Finished,
    Hello,
    Log,
    Started,
    TaskStopped,
    read_event,
)
from plumbrule_core.engine.order import Order
from plumbrule_core.errors import PlumbruleError

Ending = Literal["done", "stopped", "failed", "died"]
"""How a worker ended: its tasks were answered, the user stopped it, it was refused, or it just ended."""

COMPLAINTS = 3
"""So many lines that are no events are shown; the others are counted."""


class Unfit(PlumbruleError):
    """This worker cannot be worked with; the sentence says why."""


class Hearing:
    """Follows one worker: which tasks are open, which one runs, and how it ended."""

    def __init__(self, order: Order, deliver: Callable[[Event], None]) -> None:
        """`deliver` gets every event, numbered from 0."""
        self._deliver = deliver
        self._open = [task.id for task in order.open_tasks]
        self._known = set(order.known)
        self._speaks_of = self._open[0] if self._open else ""
        self._running = ""
        self._seq = 0
        self._greeted = False
        self._refused = False
        self._stopped = False
        self._over = False
        self._complaints = 0

    def hear(self, line: bytes) -> None:
        """Take one line; raises Unfit where the worker must not go on."""
        if self._over or self._refused:
            return
        if not line.endswith(b"\n"):
            self._complain(f"a message that was cut short or longer than {MAX_LINE} bytes", line)
            return
        try:
            event = read_event(line)
        except ValidationError:
            self._complain("a line that is no message", line)
            return
        if isinstance(event, Hello):
            self._greet(event)
        elif isinstance(event, Failed) and not event.task:
            raise Unfit(event.reason)
        elif self._greeted and self._expects(event) and _fits(event):
            self._take(event)
        else:
            self._complain("a message that does not belong here", line)

    def refuse(self, reason: str) -> None:
        """Nothing can be done with this worker: the first open task fails, with the reason."""
        self._refused = True
        self._pass(Failed(seq=0, task=self._blamed, reason=reason))

    def end(self, status: int, *, asked: bool, details: str = "") -> Ending:
        """The process has ended with this status; says what that means for the task that ran."""
        if self._complaints > COMPLAINTS:
            self._log(f"the worker sent {self._complaints - COMPLAINTS} more lines that were ignored")
        self._over = True
        if self._refused:
            return "failed"
        if self._greeted and not self._open:
            return "stopped" if self._stopped else "done"
        if asked:
            if self._running:
                self._pass(TaskStopped(seq=0, task=self._running))
            return "stopped"
        self._pass(Failed(seq=0, task=self._blamed, reason=self._obituary(status, details), died=True))
        return "died"

    @property
    def _blamed(self) -> str:
        return self._running or (self._open[0] if self._open else self._speaks_of)

    def _greet(self, hello: Hello) -> None:
        if hello.protocol != PROTOCOL:
            raise Unfit(
                f"the worker speaks protocol {hello.protocol} and this program speaks {PROTOCOL}: "
                "two versions of Plumbrule are mixed; install it afresh"
            )
        self._greeted = True
        self._pass(hello)

    def _expects(self, event: Event) -> bool:
        """Open tasks are spoken of; a known one is opened again by its start alone."""
        return event.task in self._open or (isinstance(event, Started) and event.task in self._known)

    def _take(self, event: Event) -> None:
        self._speaks_of = event.task
        if isinstance(event, Started):
            self._running = event.task
            if event.task not in self._open:
                self._known.remove(event.task)
                self._open.append(event.task)
        if isinstance(event, Finished | Failed | TaskStopped):
            self._open.remove(event.task)
            self._running = "" if self._running == event.task else self._running
            self._stopped = self._stopped or isinstance(event, TaskStopped)
        self._pass(event)

    def _pass(self, event: Event) -> None:
        self._deliver(event.model_copy(update={"seq": self._seq}))
        self._seq += 1

    def _complain(self, what: str, line: bytes) -> None:
        self._complaints += 1
        if self._complaints <= COMPLAINTS:
            begin = line[:80].decode("utf-8", "replace").strip()
            self._log(f"the worker sent {what}, which is ignored: {begin!r}")

    def _log(self, text: str) -> None:
        self._pass(Log(seq=0, task=self._running or self._speaks_of, text=text))

    def _obituary(self, status: int, details: str) -> str:
        see = f" (details in {details})" if details else ""
        if not self._greeted:
            return f"the worker could not start: it {_fate(status)}{see}"
        return f"the worker {_fate(status)}{see}; what was checkpointed is kept: press Run to carry on"


def _fits(event: Event) -> bool:
    return not isinstance(event, Finished) or event.result.task == event.task


_FATES = {
    "SIGKILL": "was killed (signal 9), perhaps because memory ran out",
    "SIGSEGV": "crashed inside a library (signal 11, memory that is not its own)",
    "SIGBUS": "crashed inside a library (signal 7, memory that is not there)",
    "SIGABRT": "was aborted by a library (signal 6)",
    "SIGTERM": "was ended from outside (signal 15)",
}


def _fate(status: int) -> str:
    if status >= 0:
        return f"ended without a word (exit status {status})"
    try:
        name = signal.Signals(-status).name
    except ValueError:
        return f"was ended by signal {-status}"
    return _FATES.get(name, f"was ended by signal {-status} ({name})")
