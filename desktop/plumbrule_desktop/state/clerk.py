"""The clerk: one thread that does what would take too long in the window's thread."""

from collections.abc import Callable
from concurrent.futures import Future, ThreadPoolExecutor
from typing import Any

from PySide6.QtCore import QObject, Qt, Signal

Work = Callable[[], Any]
Then = Callable[[Any], None]
Oops = Callable[[Exception], None]


class Clerk(QObject):
    """Runs jobs one after the other in a thread of its own and hands each outcome to the window's thread."""

    _post = Signal(object)

    def __init__(self, name: str, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._pool = ThreadPoolExecutor(max_workers=1, thread_name_prefix=name)
        self._open = True
        self._post.connect(self._deliver, Qt.ConnectionType.QueuedConnection)

    def do(self, work: Work, then: Then | None = None, oops: Oops | None = None) -> None:
        """Run `work` in the thread; then `then(result)`, or `oops(error)`, in the window's thread.

        An error nobody asked for is raised in the window's thread, where it is seen. Silent once closed.
        """
        if not self._open:
            return

        def ended(future: "Future[Any]") -> None:
            if future.cancelled():
                return
            error = future.exception()
            if isinstance(error, Exception):
                self.post(lambda: _raise(error) if oops is None else oops(error))
            elif then is not None:
                self.post(lambda: then(future.result()))

        self._pool.submit(work).add_done_callback(ended)

    def post(self, call: Callable[[], None]) -> None:
        """Have `call` run in the window's thread; may be called from any thread."""
        if self._open:
            self._post.emit(call)

    def close(self) -> None:
        """Finish the job in hand, drop what has not begun, end the thread."""
        self._open = False
        self._pool.shutdown(wait=True, cancel_futures=True)

    def _deliver(self, call: Callable[[], None]) -> None:
        if self._open:
            call()


def _raise(error: Exception) -> None:
    raise error
