"""Redrawing at a calm pace: at once, then at most ten times a second, and never while nobody can see it."""

from collections.abc import Callable

from PySide6.QtCore import QEvent, QObject, QTimer
from PySide6.QtWidgets import QWidget

REDRAW_MS = 100


class Pace(QObject):
    """Calls `redraw` for a widget when asked, with pauses; what was asked while hidden is done on show."""

    def __init__(self, widget: QWidget, redraw: Callable[[], None]) -> None:
        super().__init__(widget)
        self._widget = widget
        self._redraw = redraw
        self._wanted = False
        self._timer = QTimer(self, interval=REDRAW_MS, singleShot=True)
        self._timer.timeout.connect(self._again)
        widget.installEventFilter(self)

    def ask(self) -> None:
        """Something has changed."""
        self._wanted = True
        self._again()

    def eventFilter(self, watched: QObject, event: QEvent) -> bool:
        """Catch up when the widget comes into sight, before it is painted."""
        if event.type() == QEvent.Type.Show and watched is self._widget:
            self._again()
        return False

    def _again(self) -> None:
        if self._wanted and self._widget.isVisible() and not self._timer.isActive():
            self._wanted = False
            self._redraw()
            self._timer.start()
