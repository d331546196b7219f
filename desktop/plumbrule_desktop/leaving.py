"""Leaving a casebook without losing anything: what is asked, and the wait for a run to stop."""

from collections.abc import Callable

from PySide6.QtCore import QObject, Qt, QTimer
from PySide6.QtWidgets import QMessageBox, QWidget

from plumbrule_desktop.state.desk import Desk

POLL_MS = 100
Then = Callable[[], None]


class Leaving(QObject):
    """Asks before a run is stopped or an unsaved casebook is dropped; never holds up the window.

    `save` asks where a copy goes and calls what it is given once the copy is written.
    """

    def __init__(self, window: QWidget, desk: Desk, save: Callable[[Then], None]) -> None:
        super().__init__(window)
        self._window = window
        self._desk = desk
        self._save = save

    @property
    def loses(self) -> bool:
        """Whether something would be lost if the window closed now."""
        return self._desk.running or self._desk.unsaved_work

    def ask_to_close(self, leave: Then) -> None:
        """Ask, and call `leave` where the person agrees. What was computed is asked for after a stop."""
        if self._desk.running:
            self._ask_stop()
        else:
            self._ask_keep("It is gone when the window closes, unless you save it.", "Close", leave)

    def replace(self, then: Then) -> None:
        """Call `then`, which opens another casebook; where the open one would be lost, ask first."""
        if self._desk.running or not self._desk.unsaved_work:
            then()  # during a run the desk itself says why no other casebook can be opened
        else:
            self._ask_keep("It is gone when another one is opened, unless you save it.", "Go on", then)

    def _ask_stop(self) -> None:
        box = self._box("A run is under way.", "Stop it and close? What was computed stays in the casebook.")
        stop = box.addButton("Stop and close", QMessageBox.ButtonRole.AcceptRole)
        box.addButton("Keep running", QMessageBox.ButtonRole.RejectRole)
        stop.clicked.connect(self.stop_and_close)
        box.open()

    def _ask_keep(self, says: str, act: str, then: Then) -> None:
        box = self._box("This casebook is not saved.", says)
        save = box.addButton("Save a copy\u2026", QMessageBox.ButtonRole.AcceptRole)
        drop = box.addButton(f"{act} without saving", QMessageBox.ButtonRole.DestructiveRole)
        box.addButton("Cancel", QMessageBox.ButtonRole.RejectRole)
        save.clicked.connect(lambda: self._save(then))
        drop.clicked.connect(lambda: then())
        box.open()

    def _box(self, headline: str, says: str) -> QMessageBox:
        box = QMessageBox(QMessageBox.Icon.NoIcon, "Plumbrule", headline, parent=self._window)
        box.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        box.setInformativeText(says)
        return box

    def stop_and_close(self) -> None:
        """Stop the run, wait for its end without holding up the window, then close."""
        desk = self._desk
        if desk.running:
            if not desk.stopping:
                desk.stop()
                desk.message.emit("Stopping the run; the window closes by itself.", "note")
            QTimer.singleShot(POLL_MS, self, self.stop_and_close)
        else:
            self._window.close()
