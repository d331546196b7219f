"""Sentences above the pages: what stays true (read-only, damage) and what has just happened."""

from PySide6.QtCore import QTimer, Signal
from PySide6.QtWidgets import QFrame, QHBoxLayout, QToolButton, QVBoxLayout, QWidget

from plumbrule_core.documents.findings import Severity
from plumbrule_desktop.widgets.card import label
from plumbrule_desktop.widgets.mark import SeverityMark

NOTE_MS = 6000


class Strip(QFrame):
    """One sentence with its mark, and a button to put it away where it may be put away."""

    dismissed = Signal()

    def __init__(self, text: str, severity: Severity, lasting: bool, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setProperty("role", "strip")
        self.text = text
        self.setAccessibleName(text)
        row = QHBoxLayout(self)
        row.setContentsMargins(16, 6, 10, 6)
        row.setSpacing(10)
        row.addWidget(SeverityMark(severity))
        row.addWidget(label(text), 1)
        if not lasting:
            close = QToolButton()
            close.setText("\u2715")
            close.setProperty("role", "quiet")
            close.setAccessibleName("Put this message away")
            close.setToolTip("Put this message away")
            close.clicked.connect(self.dismissed)
            row.addWidget(close)


class Banner(QWidget):
    """Strips under one another; empty it takes no room."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._column = QVBoxLayout(self)
        self._column.setContentsMargins(0, 0, 0, 0)
        self._column.setSpacing(0)
        self._lasting: dict[str, Strip] = {}
        self._passing: Strip | None = None
        self._timer = QTimer(self, singleShot=True, interval=NOTE_MS)
        self._timer.timeout.connect(self.clear)

    @property
    def texts(self) -> tuple[str, ...]:
        """All sentences that are shown."""
        strips = [*self._lasting.values(), *([self._passing] if self._passing else [])]
        return tuple(strip.text for strip in strips)

    def keep(self, key: str, text: str, severity: Severity = "care") -> None:
        """Show a sentence as long as it is true; an empty one takes it away."""
        old = self._lasting.get(key)
        if old is not None and old.text == text:
            return
        if old is not None:
            self._drop(self._lasting.pop(key))
        if text:
            self._lasting[key] = Strip(text, severity, lasting=True)
            self._column.insertWidget(0, self._lasting[key])

    def say(self, text: str, kind: str) -> Strip:
        """Show what has just happened: notes go by themselves, errors stay until they are put away."""
        self.clear()
        self._passing = Strip(text, "stop" if kind == "error" else "note", lasting=False)
        self._passing.dismissed.connect(self.clear)
        self._column.addWidget(self._passing)
        if kind != "error":
            self._timer.start()
        return self._passing

    def clear(self) -> None:
        """Put the passing message away."""
        self._timer.stop()
        if self._passing is not None:
            strip, self._passing = self._passing, None
            self._drop(strip)

    def _drop(self, strip: Strip) -> None:
        self._column.removeWidget(strip)
        strip.hide()
        strip.deleteLater()
