"""What a start loads, and how long the shell takes, in a fresh process."""

import json
import os
import subprocess
import sys

HEAVY = ("vtk", "vtkmodules", "pyscf", "scipy", "rdkit", "matplotlib", "pyqtgraph", "h5py", "block2")
SCRIPT = """
import json, sys, time
begun = time.perf_counter()
from PySide6.QtCore import QEvent, QObject
from PySide6.QtWidgets import QApplication
from plumbrule_desktop import look
from plumbrule_desktop.settings import Settings
from plumbrule_desktop.window import Window

app = QApplication([])
settings = Settings()
look.wear(app, "light")
seen = {}
window = Window(settings)


class FirstPaint(QObject):
    def eventFilter(self, watched, event):
        if event.type() == QEvent.Type.Paint and "paint" not in seen:
            seen["paint"] = sorted({name.partition(".")[0] for name in sys.modules})
            seen["seconds"] = time.perf_counter() - begun
        return False


first = FirstPaint()
window.centralWidget().installEventFilter(first)
window.show()
limit = time.monotonic() + 90
while not (window.furnished and window.desk.plan is not None) and time.monotonic() < limit:
    app.processEvents()
    time.sleep(0.002)
seen["furnished"] = window.furnished
seen["later"] = sorted({name.partition(".")[0] for name in sys.modules})
window.leave()
print(json.dumps(seen))
"""


def test_the_shell_is_painted_before_anything_heavy_is_loaded_and_pyscf_never_is() -> None:
    done = subprocess.run(
        [sys.executable, "-c", SCRIPT],
        capture_output=True,
        text=True,
        timeout=200,
        env=dict(os.environ),
        check=False,
    )
    assert done.returncode == 0, done.stderr
    seen = json.loads(done.stdout.splitlines()[-1])
    assert [name for name in HEAVY if name in seen["paint"]] == []
    assert seen["furnished"]
    assert "pyscf" not in seen["later"]
    assert "block2" not in seen["later"]
    assert seen["seconds"] < 10, "far beyond one second even on a busy machine"


MAIN = """
import sys
from PySide6.QtCore import QTimer
from PySide6.QtWidgets import QApplication
from plumbrule_desktop.app import main

app = QApplication([])
said = []


def look():
    for window in app.topLevelWidgets():
        desk = getattr(window, "desk", None)
        if desk is not None and desk.plan is not None and window.furnished:
            said.append(len(desk.entries))
            timer.stop()
            app.quit()


timer = QTimer(interval=100)
timer.timeout.connect(look)
timer.start()
QTimer.singleShot(90_000, app.quit)
status = main(sys.argv[1:])
print(said)
sys.exit(status)
"""


def test_the_program_opens_the_demo_when_asked_and_ends_with_status_0() -> None:
    done = subprocess.run(
        [sys.executable, "-c", MAIN, "--demo"], capture_output=True, text=True, timeout=200, check=False
    )
    assert done.returncode == 0, done.stderr
    (questions,) = json.loads(done.stdout.splitlines()[-1])
    assert questions >= 2
    assert "Traceback" not in done.stderr


def test_a_word_that_is_no_option_is_refused_with_status_2() -> None:
    done = subprocess.run(
        [sys.executable, "-c", MAIN, "--no-such"], capture_output=True, text=True, timeout=200, check=False
    )
    assert done.returncode == 2
    assert "--no-such" in done.stderr


def test_the_program_started_as_the_probe_draws_one_frame_and_opens_no_window() -> None:
    done = subprocess.run(
        [sys.executable, "-m", "plumbrule_desktop.app"],
        capture_output=True,
        text=True,
        timeout=200,
        check=False,
        env={**os.environ, "PLUMBRULE_PROBE_3D": "1"},
    )
    assert done.returncode in (0, 1), done.stderr
