"""Ctrl-C and a polite kill ask a run to stop, in place of tearing it down."""

import signal
import threading
from collections.abc import Iterator
from contextlib import contextmanager
from types import FrameType


@contextmanager
def stop_on_signals() -> Iterator[threading.Event]:
    """An event that is set once the user asks to stop; the old handlers come back at the end."""
    asked = threading.Event()
    if threading.current_thread() is not threading.main_thread():
        # Signals reach the main thread alone; whoever calls from another one stops the run in its own way.
        yield asked
        return

    def heard(number: int, frame: FrameType | None) -> None:
        asked.set()

    before = {number: signal.signal(number, heard) for number in (signal.SIGINT, signal.SIGTERM)}
    try:
        yield asked
    finally:
        for number, handler in before.items():
            signal.signal(number, handler)
