"""How long the window takes to appear and to be usable, warm: each repeat is a fresh process.

Painted: the shell was drawn. Usable: the Build page shows the first question and its forecast. Every page:
the others were made too.
Times count from the start of the process; the CPU times beside them are the process's own, whatever else the
machine does. Prints all repeats and their medians; exits 1 above `--limit`
(seconds to the painted shell, median).
"""

import argparse
import os
import statistics
import subprocess
import sys
import tempfile
import time

CHILD = """
import json, os, sys, time
began = float(os.environ["PLUMBRULE_BEGAN"])
from PySide6.QtCore import QEvent, QObject, QTimer
from PySide6.QtWidgets import QApplication
from plumbrule_desktop import look
from plumbrule_desktop.settings import Settings
from plumbrule_desktop.state.desk import Desk
from plumbrule_desktop.window import Window

app = QApplication(["plumbrule"])
settings = Settings()
look.wear(app, settings.scheme)
window = Window(settings, Desk.open_demo)
seen = {}

def note(what):
    seen.setdefault(what, time.time() - began)
    seen.setdefault(what + ", CPU", time.process_time())

class Watcher(QObject):
    def eventFilter(self, watched, event):
        if event.type() == QEvent.Type.Paint and "painted" not in seen:
            QTimer.singleShot(0, lambda: note("painted"))
        return False

watcher = Watcher()
window.centralWidget().installEventFilter(watcher)

def look_again():
    if "painted" in seen and "build" in window.pages and window.desk.plan is not None:
        note("usable")
    if "usable" in seen and window.furnished:
        note("every page")
        print(json.dumps(seen), flush=True)
        window.end()
        app.quit()

timer = QTimer(interval=5)
timer.timeout.connect(look_again)
timer.start()
window.show()
app.exec()
"""


def once(folder: str) -> dict[str, float]:
    """One start in a process of its own."""
    import json

    env = {
        **os.environ,
        "QT_QPA_PLATFORM": os.environ.get("QT_QPA_PLATFORM", "offscreen"),
        "VTK_DEFAULT_OPENGL_WINDOW": "vtkEGLRenderWindow",
        "PLUMBRULE_CACHE": folder,
        "PLUMBRULE_SETTINGS": f"{folder}/settings.ini",
        "PLUMBRULE_BEGAN": repr(time.time()),
    }
    done = subprocess.run([sys.executable, "-c", CHILD], env=env, capture_output=True, text=True, check=True)
    return json.loads(done.stdout.splitlines()[-1])


def main() -> int:
    """Measure and print."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--repeats", type=int, default=5)
    parser.add_argument("--limit", type=float, default=1.5)
    asked = parser.parse_args()
    with tempfile.TemporaryDirectory() as folder:
        once(folder)
        runs = [once(folder) for _ in range(asked.repeats)]
    for name in ("painted", "painted, CPU", "usable", "usable, CPU", "every page"):
        times = [run[name] for run in runs]
        print(f"{name}: median {statistics.median(times):.2f} s of", ", ".join(f"{t:.2f}" for t in times))
    return int(statistics.median(run["painted"] for run in runs) > asked.limit)


if __name__ == "__main__":
    sys.exit(main())
