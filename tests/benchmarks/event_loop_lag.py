"""How long the window's event loop is held up while a real job runs and every page is visited.

Opens the real window offscreen, runs a real question with `--threads` threads for about half a minute, shows
another page every second, and posts an event every 5 ms from another thread: the lag is the time from posting
to delivery. Prints p50, p99 and the longest, and what was on screen at the longest; exits 1 where p99 exceeds
`--limit` (50 ms).
"""

import argparse
import os
import sys
import tempfile
import threading
import time

import numpy as np
from PySide6.QtCore import QCoreApplication, QEvent, QObject
from PySide6.QtWidgets import QApplication

from plumbrule_desktop import look
from plumbrule_desktop.page_stack import PAGES
from plumbrule_desktop.settings import Settings
from plumbrule_desktop.state.desk import Desk
from plumbrule_desktop.window import Window

PERIOD = 0.005


def main() -> int:
    """Measure and print."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--threads", type=int, default=2)
    parser.add_argument("--seconds", type=float, default=40.0, help="stop the job after this long")
    parser.add_argument("--limit", type=float, default=50.0, help="milliseconds")
    asked = parser.parse_args()
    with tempfile.TemporaryDirectory() as folder:
        os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")
        os.environ.setdefault("VTK_DEFAULT_OPENGL_WINDOW", "vtkEGLRenderWindow")
        os.environ["PLUMBRULE_CACHE"] = folder
        os.environ["PLUMBRULE_SETTINGS"] = f"{folder}/settings.ini"
        ear = measure(asked.threads, asked.seconds)
    times = np.array([lag for lag, _ in ear.lags]) * 1000
    own = np.array(ear.own[1:]) * 1000
    p50, p99 = np.percentile(times, [50, 99])
    worst = sorted(ear.lags, reverse=True)[:5]
    print(f"{len(times)} events: p50 {p50:.1f} ms, p99 {p99:.1f} ms, longest {times.max():.1f} ms")
    print(f"own work between two events: p99 {np.percentile(own, 99):.1f} ms, longest {own.max():.1f} ms")
    print("longest:", "; ".join(f"{lag * 1000:.0f} ms ({where})" for lag, where in worst))
    return int(p99 > asked.limit)


class Beat(QEvent):
    """An event that knows when it was posted."""

    def __init__(self) -> None:
        super().__init__(QEvent.Type.User)
        self.posted = time.perf_counter()


class Ear(QObject):
    """Hears the beats: keeps each lag with what the window was doing, and its CPU time since the last.

    The lag holds what a busy machine adds; the CPU time is the window's own doing.
    """

    def __init__(self) -> None:
        super().__init__()
        self.doing = "start"
        self.lags: list[tuple[float, str]] = []
        self.own: list[float] = []
        self._used = time.thread_time()
        self._over = threading.Event()
        self._beater = threading.Thread(target=self._beat)

    def event(self, event: QEvent) -> bool:
        """Note the lag."""
        if isinstance(event, Beat):
            self.lags.append((time.perf_counter() - event.posted, self.doing))
            used = time.thread_time()
            self.own.append(used - self._used)
            self._used = used
            return True
        return super().event(event)

    def _beat(self) -> None:
        while not self._over.wait(PERIOD):
            QCoreApplication.postEvent(self, Beat())

    def __enter__(self) -> "Ear":
        self._beater.start()
        return self

    def __exit__(self, *_: object) -> None:
        self._over.set()
        self._beater.join()


def measure(threads: int, seconds: float) -> Ear:
    """What the ear heard while the job ran."""
    from plumbrule_core.session import Session

    plain_run = Session.run
    Session.run = lambda self, brief, hear: plain_run(self, brief, hear, threads=threads)  # type: ignore[method-assign]
    app = QApplication(["plumbrule"])
    settings = Settings()
    look.wear(app, settings.scheme)
    window = Window(settings, Desk.open_demo)
    window.show()

    def spin(seconds: float) -> None:
        until = time.perf_counter() + seconds
        while time.perf_counter() < until:
            app.processEvents()
            time.sleep(0.0005)

    while not (window.furnished and window.desk.plan is not None and window.desk.plan.tasks):
        spin(0.05)
    spin(2.0)
    with Ear() as ear:
        window.desk.run()
        began, turn = time.perf_counter(), 0
        while time.perf_counter() < began + seconds and (turn < 8 or window.desk.running):
            ear.doing = PAGES[turn % len(PAGES)]
            window.show_page(turn % len(PAGES))
            spin(1.0)
            turn += 1
        ear.doing = "stop"
        window.desk.stop()
        while window.desk.running:
            spin(0.05)
    app.processEvents()
    window.end()
    return ear


if __name__ == "__main__":
    sys.exit(main())
