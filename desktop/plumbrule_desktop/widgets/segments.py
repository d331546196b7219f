"""A segmented control: a row of buttons of which one is on."""

from collections.abc import Iterable

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QButtonGroup, QFrame, QHBoxLayout, QToolButton, QWidget


class Segments(QFrame):
    """`chosen` carries the place of the button that was pressed."""

    chosen = Signal(int)

    def __init__(self, names: Iterable[str], accessible: str, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setProperty("role", "segments")
        self.setAccessibleName(accessible)
        row = QHBoxLayout(self)
        row.setContentsMargins(3, 3, 3, 3)
        row.setSpacing(2)
        self._group = QButtonGroup(self)
        for place, name in enumerate(names):
            button = QToolButton()
            button.setText(name)
            button.setCheckable(True)
            button.setProperty("role", "segment")
            button.setAccessibleName(name)
            self._group.addButton(button, place)
            row.addWidget(button)
            button.toggled.connect(lambda on, button=button: _reach(button, on))
            _reach(button, False)
        self._group.idClicked.connect(self.chosen)
        self._group.button(0).setChecked(True)

    @property
    def current(self) -> int:
        """The place of the button that is on."""
        return self._group.checkedId()

    def show_current(self, place: int) -> None:
        """Set the button that is on, without a signal."""
        self._group.button(place).setChecked(True)

    def button(self, place: int) -> QToolButton:
        """One of the buttons."""
        found = self._group.button(place)
        assert isinstance(found, QToolButton)
        return found


def _reach(button: QToolButton, on: bool) -> None:
    """Tab comes to the button that is on; from there the arrow keys go to the others."""
    button.setFocusPolicy(Qt.FocusPolicy.StrongFocus if on else Qt.FocusPolicy.ClickFocus)
