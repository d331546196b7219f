"""Where orders are worked off: the seam, and the executor that starts a worker process on this machine."""

import logging
import threading
from collections.abc import Callable, Sequence
from typing import Literal, Protocol

from plumbrule_core.documents.events import Event
from plumbrule_core.engine.child import Child, worker_command
from plumbrule_core.engine.hearing import Ending, Hearing, Unfit
from plumbrule_core.engine.order import Order

GRACE_SECONDS = 0.7
"""So long each step of stopping waits: asked, ended, killed; together below two seconds."""
LEFT_OVER_SECONDS = 5.0
"""So long what a dead worker has written may take to be heard."""

OnEvent = Callable[[Event], None]
OnEnd = Callable[[Ending], None]
Wish = Literal["stop", "kill"]

_log = logging.getLogger(__name__)


class Handle(Protocol):
    """One order that is being worked off."""

    def ask(self, wish: Wish) -> None:
        """`stop` asks, then insists, and is through within two seconds; `kill` does not ask. Never waits."""

    def wait(self, timeout: float | None = None) -> bool:
        """Wait for the end; False where `timeout` seconds were not enough."""

    @property
    def running(self) -> bool:
        """Whether the end is still to come."""

    @property
    def ending(self) -> Ending | None:
        """How it ended, None while it runs."""


class Executor(Protocol):
    """Where orders are worked off."""

    def submit(self, order: Order, on_event: OnEvent, on_end: OnEnd | None = None) -> Handle:
        """Start one order.

        `on_event` gets its events one by one, from a thread of the executor; `on_end` is called
        exactly once, after the last event and before `wait` returns, whatever happens.
        """


class LocalExecutor:
    """Starts each order in a worker process of its own on this machine."""

    def __init__(self, command: Sequence[str] | None = None) -> None:
        """`command` starts a worker; by default the one of this program."""
        self._command = tuple(command or worker_command())

    def submit(self, order: Order, on_event: OnEvent, on_end: OnEnd | None = None) -> "LocalHandle":
        """Start a worker; what goes wrong is told by events, never raised."""
        return LocalHandle(self._command, order, on_event, on_end)


class LocalHandle:
    """One worker process on its way."""

    def __init__(self, command: Sequence[str], order: Order, on_event: OnEvent, on_end: OnEnd | None) -> None:
        self._command = command
        self._order = order
        self._on_event = on_event
        self._on_end = on_end
        self._hearing = Hearing(order, self._deliver)
        self._child: Child | None = None
        self._asked = False
        self._lock = threading.Lock()
        self._ready, self._exited, self._ended = threading.Event(), threading.Event(), threading.Event()
        self._ending: Ending | None = None
        # The thread that starts the worker must outlive it: see Child.
        threading.Thread(target=self._live, name="plumbrule worker", daemon=True).start()
        self._ready.wait()

    @property
    def running(self) -> bool:
        """Whether the end is still to come."""
        return not self._ended.is_set()

    @property
    def ending(self) -> Ending | None:
        """How it ended, None while it runs."""
        return self._ending

    @property
    def pid(self) -> int | None:
        """The worker's process id, None where it could not be started."""
        return self._child.pid if self._child else None

    def wait(self, timeout: float | None = None) -> bool:
        """Wait for the end; False where `timeout` seconds were not enough."""
        return self._ended.wait(timeout)

    def ask(self, wish: Wish) -> None:
        """`stop` asks, then insists, and is through within two seconds; `kill` does not ask. Never waits."""
        with self._lock:
            first, self._asked = not self._asked, True
        if self._child is None:
            return
        if wish == "kill":
            self._child.kill()
        elif first:
            threading.Thread(
                target=self._insist, args=(self._child,), name="plumbrule stop", daemon=True
            ).start()

    def _insist(self, child: Child) -> None:
        child.ask_to_stop()
        for step in (child.end, child.kill):
            if self._exited.wait(GRACE_SECONDS):
                return
            step()

    def _live(self) -> None:
        ending: Ending = "failed"
        try:
            ending = self._work()
        except Exception as error:
            _log.exception("the supervision of a worker broke")
            if self._child is not None:
                self._child.kill()
                self._child.wait()
                self._child.close()
            self._hearing.refuse(f"the supervision of the worker broke: {error}")
        finally:
            self._ending = ending
            self._exited.set()
            self._ready.set()
            try:
                if self._on_end is not None:
                    self._on_end(ending)
            finally:
                self._ended.set()

    def _work(self) -> Ending:
        try:
            child = self._child = Child(self._command, self._order)
        except OSError as error:
            self._hearing.refuse(f"the worker cannot be started: {error}")
            return self._hearing.end(0, asked=False)
        self._ready.set()
        reader = threading.Thread(target=self._read, args=(child,), name="plumbrule reader", daemon=True)
        reader.start()
        child.send(self._order)
        status = child.wait()
        self._exited.set()
        reader.join(LEFT_OVER_SECONDS)
        details = child.close()
        return self._hearing.end(status, asked=self._asked, details=details)

    def _read(self, child: Child) -> None:
        try:
            for line in child.lines():
                self._hearing.hear(line)
        except Unfit as refusal:
            self._give_up(child, str(refusal))
        except Exception as error:
            _log.exception("the reading of a worker's messages broke")
            self._give_up(child, f"the worker's messages could not be read any more: {error}")

    def _give_up(self, child: Child, reason: str) -> None:
        self._hearing.refuse(reason)
        child.kill()

    def _deliver(self, event: Event) -> None:
        try:
            self._on_event(event)
        except Exception:
            # A listener that breaks must not leave a worker without its reader.
            _log.exception("an event could not be delivered: %s", event.event)
