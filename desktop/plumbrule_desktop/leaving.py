"""Closing the window without losing anything: what is asked, and the wait for a run to stop."""

from typing import TYPE_CHECKING

from PySide6.QtCore import QObject, Qt, QTimer
from PySide6.QtWidgets import QMessageBox

if TYPE_CHECKING:
    from plumbrule_desktop.window import Window

POLL_MS = 100


class Leaving(QObject):
    """Asks before a run is stopped or an unsaved casebook is dropped; never holds up the window."""

    def __init__(self, window: "Window") -> None:
        super().__init__(window)
        self._window = window

    def asks(self) -> bool:
        """Whether the person has to be asked; if so, the question is on the screen now."""
        desk = self._window.desk
        if desk.running:
            self._ask_stop()
        elif desk.casebook.path is None and desk.casebook.undo_label is not None:
            self._ask_keep()
        else:
            return False
        return True

    def _ask_stop(self) -> None:
        box = self._box("A run is under way.", "Stop it and close? What was computed stays in the casebook.")
        stop = box.addButton("Stop and close", QMessageBox.ButtonRole.AcceptRole)
        box.addButton("Keep running", QMessageBox.ButtonRole.RejectRole)
        stop.clicked.connect(self.stop_and_close)
        box.open()

    def _ask_keep(self) -> None:
        box = self._box(
            "This casebook is not saved.", "It is gone when the window closes, unless you save it."
        )
        save = box.addButton("Save\u2026", QMessageBox.ButtonRole.AcceptRole)
        leave = box.addButton("Close without saving", QMessageBox.ButtonRole.DestructiveRole)
        box.addButton("Cancel", QMessageBox.ButtonRole.RejectRole)
        save.clicked.connect(lambda: self._window.ask_save(then=self.leave))
        leave.clicked.connect(self.leave)
        box.open()

    def _box(self, headline: str, says: str) -> QMessageBox:
        box = QMessageBox(QMessageBox.Icon.NoIcon, "Plumbrule", headline, parent=self._window)
        box.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        box.setInformativeText(says)
        return box

    def stop_and_close(self) -> None:
        """Stop the run, wait for its end without holding up the window, then close."""
        desk = self._window.desk
        if desk.running:
            if not desk.stopping:
                desk.stop()
                self._window.banner.say("Stopping the run; the window closes by itself.", "note")
            QTimer.singleShot(POLL_MS, self, self.stop_and_close)
        else:
            self._window.close()

    def leave(self) -> None:
        """Close without asking."""
        self._window.end()
        self._window.close()
