"""Take the README's pictures: the demo is run for real, then each page is grabbed at 1280 by 800.

QT_QPA_PLATFORM=offscreen .venv/bin/python packaging/screenshots.py docs [light|dark]
"""

import sys
import time
from collections.abc import Callable
from pathlib import Path

from PySide6.QtGui import QAction
from PySide6.QtWidgets import QApplication

from plumbrule_desktop import look
from plumbrule_desktop.settings import Settings
from plumbrule_desktop.state.desk import Desk
from plumbrule_desktop.window import Window

PAGES = ("Build", "Watch", "Judge", "Report")


def main(folder: Path, scheme: str) -> None:
    """Open the demo, run its first question, and write one picture a page into the folder."""
    app = QApplication(["plumbrule"])
    look.wear(app, scheme)
    window = Window(Settings(), Desk.open_demo)
    window.resize(1280, 800)
    window.show()
    desk = window.desk
    _until(app, lambda: desk.plan is not None, 60)
    _pass(app, 3)
    actions = {action.text().replace("&", ""): action for action in window.findChildren(QAction)}
    actions["Run"].trigger()
    _until(
        app,
        lambda: desk.judgement is not None and not desk.running and desk.judgement.answer is not None,
        600,
    )
    for page in PAGES:
        actions[page].trigger()
        _pass(app, 3)
        window.grab().save(str(folder / f"{page.lower()}.png"))
    window.close()
    _pass(app, 1)
    window.end()


def _pass(app: QApplication, seconds: float) -> None:
    end = time.monotonic() + seconds
    _until(app, lambda: time.monotonic() > end, seconds + 5)


def _until(app: QApplication, ready: Callable[[], bool], seconds: float) -> None:
    end = time.monotonic() + seconds
    while not ready():
        if time.monotonic() > end:
            sys.exit("The window did not come to the state that was to be pictured.")
        app.processEvents()
        time.sleep(0.01)


if __name__ == "__main__":
    main(Path(sys.argv[1]), sys.argv[2] if len(sys.argv) > 2 else "light")
