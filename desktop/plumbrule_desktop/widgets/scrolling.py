"""A page that scrolls down where the window is lower than its content, and never sideways."""

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QFrame, QLayout, QScrollArea, QVBoxLayout, QWidget


def scroll_down(page: QWidget, content: QLayout) -> QScrollArea:
    """Fill a page with content that scrolls."""
    ground = QWidget()
    ground.setProperty("role", "ground")
    ground.setLayout(content)
    area = QScrollArea()
    area.setWidgetResizable(True)
    area.setFrameShape(QFrame.Shape.NoFrame)
    area.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
    area.setFocusPolicy(Qt.FocusPolicy.NoFocus)
    area.setWidget(ground)
    whole = QVBoxLayout(page)
    whole.setContentsMargins(0, 0, 0, 0)
    whole.addWidget(area)
    return area
