"""A card: a quiet framed surface that holds one thing."""

from PySide6.QtWidgets import QFrame, QLabel, QVBoxLayout, QWidget


class Card(QFrame):
    """A frame with a rounded border; `column` takes its content."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setProperty("role", "card")
        self.column = QVBoxLayout(self)
        self.column.setContentsMargins(12, 10, 12, 10)
        self.column.setSpacing(6)


def label(text: str = "", role: str = "", wrap: bool = True) -> QLabel:
    """A label; `role` is empty, `muted`, `heading`, `title`, `number` or `fault`."""
    made = QLabel(text)
    made.setWordWrap(wrap)
    if role:
        made.setProperty("role", role)
    return made
