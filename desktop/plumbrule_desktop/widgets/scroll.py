"""A column that scrolls."""

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QFrame, QScrollArea, QVBoxLayout, QWidget


def column_in_scroll(spacing: int = 8) -> tuple[QScrollArea, QVBoxLayout]:
    """A scroll area without a frame, and the layout of the column in it, which ends in a stretch."""
    area = QScrollArea()
    area.setWidgetResizable(True)
    area.setFrameShape(QFrame.Shape.NoFrame)
    area.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
    area.setFocusPolicy(Qt.FocusPolicy.NoFocus)
    ground = QWidget()
    ground.setProperty("role", "ground")
    column = QVBoxLayout(ground)
    column.setContentsMargins(0, 0, 4, 0)
    column.setSpacing(spacing)
    column.addStretch(1)
    area.setWidget(ground)
    area.viewport().setAutoFillBackground(False)
    ground.setAutoFillBackground(False)
    return area, column
