"""A group that is closed until somebody opens it: its title is a button."""

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QToolButton, QVBoxLayout, QWidget


class Folded(QWidget):
    """`column` takes its content; the title tells how many of it are chosen, also while it is closed."""

    def __init__(self, title: str, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._title = title
        self.button = QToolButton()
        self.button.setProperty("role", "quiet")
        self.button.setCheckable(True)
        self.button.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.button.setToolButtonStyle(Qt.ToolButtonStyle.ToolButtonTextBesideIcon)
        self.button.toggled.connect(self._turn)
        self._content = QWidget()
        self.column = QVBoxLayout(self._content)
        self.column.setContentsMargins(0, 0, 0, 0)
        self.column.setSpacing(6)
        whole = QVBoxLayout(self)
        whole.setContentsMargins(0, 0, 0, 0)
        whole.setSpacing(6)
        whole.addWidget(self.button)
        whole.addWidget(self._content)
        self.show_count(0)
        self._turn(False)

    def show_count(self, chosen: int) -> None:
        """Tell how many of the content are chosen."""
        self.button.setText(f"{self._title} ({chosen} chosen)" if chosen else self._title)

    def _turn(self, opened: bool) -> None:
        self.button.setArrowType(Qt.ArrowType.DownArrow if opened else Qt.ArrowType.RightArrow)
        self.button.setAccessibleDescription("Press to close" if opened else "Press to open")
        self._content.setVisible(opened)
