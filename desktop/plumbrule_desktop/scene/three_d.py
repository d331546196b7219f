"""Whether 3-D can be drawn here: asked once of a child process, and remembered."""

import os
import sys
from importlib import import_module
from importlib.metadata import PackageNotFoundError, version
from pathlib import Path

from PySide6.QtCore import QObject, QProcess, QProcessEnvironment, QTimer, Signal

from plumbrule_desktop.settings import Settings
from plumbrule_desktop.state.clerk import Clerk

YES = "yes"
PROBE_MS = 30_000
PROBE_VARIABLE = "PLUMBRULE_PROBE_3D"
"""A frozen program has no interpreter to hand the probe to: it is started again with this variable set."""


def force_software_path() -> None:
    """Without an X display, have VTK skip the attempt at one."""
    if sys.platform.startswith("linux") and not os.environ.get("DISPLAY"):
        os.environ.setdefault("VTK_DEFAULT_OPENGL_WINDOW", "vtkEGLRenderWindow")


class ThreeD(QObject):
    """Answers once with `known(answer)`: `yes`, or the reason why not."""

    known = Signal(str)

    def __init__(self, settings: Settings, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._settings = settings
        self._clerk = Clerk("plumbrule-3d", self)
        self._process: QProcess | None = None
        self._answer: str | None = None
        self._asked = False
        self._limit = QTimer(self, singleShot=True, interval=PROBE_MS)
        self._limit.timeout.connect(lambda: self._ended("drawing one frame took too long"))

    @property
    def answer(self) -> str | None:
        """The answer, or None while it is not known."""
        return self._answer

    def ask(self) -> None:
        """Answer from memory, or start the child process."""
        if self._asked:
            return
        self._asked = True
        force_software_path()
        kept = self._settings.three_d(_circumstances())
        if kept == YES:
            self._load()
            return
        self._process = QProcess(self)
        environment = QProcessEnvironment.systemEnvironment()
        environment.insert(PROBE_VARIABLE, "1")
        self._process.setProcessEnvironment(environment)
        self._process.finished.connect(self._finished)
        self._process.errorOccurred.connect(self._could_not_start)
        program, *arguments = _command()
        self._process.start(program, arguments)
        self._limit.start()

    def close(self) -> None:
        """End what still runs; nothing is announced afterwards."""
        self._end_process()
        self._clerk.close()

    def _end_process(self) -> None:
        self._limit.stop()
        process, self._process = self._process, None
        if process is not None and process.state() != QProcess.ProcessState.NotRunning:
            process.finished.disconnect()
            process.errorOccurred.disconnect()
            process.kill()
            process.waitForFinished(1000)

    def _could_not_start(self, error: QProcess.ProcessError) -> None:
        if error == QProcess.ProcessError.FailedToStart:
            self._ended("the test for it could not be started")

    def _finished(self, code: int, status: QProcess.ExitStatus) -> None:
        if status == QProcess.ExitStatus.CrashExit:
            self._ended("there is no OpenGL that works (the test ended abruptly)")
        else:
            self._ended(YES if code == 0 else "OpenGL draws nothing here")

    def _ended(self, answer: str) -> None:
        if self._process is None:
            return
        self._end_process()
        if answer == YES:
            self._settings.remember_three_d(_circumstances(), answer)
            self._load()
        else:
            self._announce(answer)

    def _load(self) -> None:
        """Import the library in a thread, module by module, so that the window goes on meanwhile."""
        self._clerk.do(
            lambda: import_module("plumbrule_desktop.scene.picture"),
            lambda _: self._announce(YES),
            self._not_loaded,
        )

    def _not_loaded(self, error: Exception) -> None:
        if not isinstance(error, ImportError):
            raise error
        self._announce(f"the library for it cannot be loaded ({error})")

    def _announce(self, answer: str) -> None:
        self._answer = answer
        self.known.emit(answer)


def _command() -> list[str]:
    if getattr(sys, "frozen", False):
        return [sys.executable]
    return [sys.executable, str(Path(__file__).with_name("probe.py"))]


def _circumstances() -> str:
    """A new library or another display asks anew; a refusal is never remembered."""
    try:
        library = version("vtk")
    except PackageNotFoundError:
        library = "unknown"
    display = "display" if os.environ.get("DISPLAY") else "none"
    return f"{library}-{display}".replace("/", "_")
