"""A card: a quiet framed surface that holds one thing."""

from PySide6.QtWidgets import QFrame, QLabel, QVBoxLayout, QWidget

from plumbrule_core.documents.findings import Level


class Card(QFrame):
    """A frame with a rounded border; `column` takes its content."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setProperty("role", "card")
        self.column = QVBoxLayout(self)
        self.column.setContentsMargins(12, 10, 12, 10)
        self.column.setSpacing(6)


def tint(made: QLabel, level: Level | None) -> None:
    """Write a label in the colour of a verdict, in whatever scheme the window wears; None for plain text."""
    made.setProperty("tint", level or "")
    made.style().unpolish(made)
    made.style().polish(made)


def label(text: str = "", role: str = "", wrap: bool = True) -> QLabel:
    """A label; `role` is empty, `muted`, `heading`, `title`, `number` or `fault`."""
    made = QLabel(text)
    made.setWordWrap(wrap)
    if role:
        made.setProperty("role", role)
    return made
