"""The clerk: one thread that does what would take too long in the window's thread."""

from collections.abc import Callable
from queue import SimpleQueue
from threading import Event, Thread
from typing import Any

from PySide6.QtCore import QObject, Qt, Signal

Work = Callable[[], Any]
Then = Callable[[Any], None]
Oops = Callable[[Exception], None]

CLOSE_SECONDS = 10.0
"""So long a job in hand is waited for: an import cut off by the end of the program could crash it."""


class Clerk(QObject):
    """Runs jobs one after the other in a thread of its own and hands each outcome to the window's thread.

    The thread begins with the first job. It is a daemon, so that a job that never ends cannot keep the
    program from ending.
    """

    _post = Signal(object)

    def __init__(self, name: str, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._name = name
        self._jobs: SimpleQueue[Callable[[], None] | None] = SimpleQueue()
        self._thread: Thread | None = None
        self._open = True
        self._late = Event()
        self._post.connect(self._deliver, Qt.ConnectionType.QueuedConnection)

    def do(self, work: Work, then: Then | None = None, oops: Oops | None = None) -> None:
        """Run `work` in the thread; then `then(result)`, or `oops(error)`, in the window's thread.

        An error nobody asked for is raised in the window's thread, where it is seen. Silent once closed.
        """
        if not self._open:
            return

        def job() -> None:
            try:
                outcome = work()
            except Exception as error:
                trouble = error
                self.post(lambda: _raise(trouble) if oops is None else oops(trouble))
            else:
                if then is not None:
                    self.post(lambda: then(outcome))

        self._jobs.put(job)
        if self._thread is None:
            self._thread = Thread(target=self._work, name=self._name, daemon=True)
            self._thread.start()

    def _work(self) -> None:
        while (job := self._jobs.get()) is not None:
            if not self._late.is_set():
                job()

    def post(self, call: Callable[[], None]) -> None:
        """Have `call` run in the window's thread; may be called from any thread."""
        if self._open:
            self._post.emit(call)

    def close(self, seconds: float = CLOSE_SECONDS) -> bool:
        """Do what was asked and end the thread; after `seconds` what has not begun is dropped.

        Never waits longer. False where a job is still in hand: its thread ends by itself, behind it.
        """
        self._open = False
        if self._thread is None:
            return True
        self._jobs.put(None)
        self._thread.join(seconds)
        self._late.set()
        return not self._thread.is_alive()

    def _deliver(self, call: Callable[[], None]) -> None:
        if self._open:
            call()


def _raise(error: Exception) -> None:
    raise error
