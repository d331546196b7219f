"""The program with a window: `main` opens it and returns the exit status."""

import argparse
import os
import sys
import traceback
from collections.abc import Callable, Sequence
from pathlib import Path
from types import TracebackType

from PySide6.QtWidgets import QApplication

from plumbrule_desktop import look
from plumbrule_desktop.scene.three_d import PROBE_VARIABLE
from plumbrule_desktop.settings import Settings
from plumbrule_desktop.state.desk import Desk
from plumbrule_desktop.window import Window


def main(argv: Sequence[str] | None = None) -> int:
    """Open the window: empty, on the demo (`--demo`), or on a casebook. `argv` lacks the program's name."""
    arguments = list(sys.argv[1:] if argv is None else argv)
    if os.environ.get(PROBE_VARIABLE):
        from plumbrule_desktop.scene.probe import draw_one_frame

        return draw_one_frame()
    asked = _parser().parse_args(arguments)
    app = QApplication.instance() or QApplication(["plumbrule"])
    assert isinstance(app, QApplication)
    app.setApplicationName("Plumbrule")
    settings = Settings()
    look.wear(app, settings.scheme)
    window = Window(settings, _beginning(asked.demo, asked.casebook))
    sys.excepthook = _teller(window)
    window.show()
    status = app.exec()
    window.end()
    return status


def _parser() -> argparse.ArgumentParser:
    parser = argparse.ArgumentParser(prog="plumbrule", description="Open the window of Plumbrule.")
    parser.add_argument("casebook", nargs="?", type=Path, help="a casebook to open")
    parser.add_argument("--demo", action="store_true", help="open worked questions to try")
    return parser


def _beginning(demo: bool, casebook: Path | None) -> Callable[[Desk], None]:
    if demo:
        return Desk.open_demo
    if casebook is not None:
        return lambda desk: desk.open(casebook)
    return Desk.new


def _teller(window: Window) -> Callable[[type[BaseException], BaseException, TracebackType | None], None]:
    """What no part of the program expected is printed in full and said in the window, which goes on."""

    def tell(kind: type[BaseException], error: BaseException, trace: TracebackType | None) -> None:
        traceback.print_exception(kind, error, trace)
        window.banner.say(
            f"Something went wrong inside the program: {error}. The casebook is safe on disk.", "error"
        )

    return tell


if __name__ == "__main__":
    sys.exit(main())
