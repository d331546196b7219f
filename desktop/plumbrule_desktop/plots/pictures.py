"""Saving a plot as it is seen: SVG for print, PNG for the rest."""

import re
from pathlib import Path

from PySide6.QtCore import QPoint, QRect
from PySide6.QtGui import QPainter
from PySide6.QtSvg import QSvgGenerator
from PySide6.QtWidgets import QWidget

FILTER = "Drawing (*.svg);;Picture (*.png)"


def file_name(title: str) -> str:
    """A title as the name of a file."""
    return re.sub(r"[^\w.+()-]+", "_", title).strip("_")[:80] or "picture"


def save_picture(widget: QWidget, path: Path, title: str) -> None:
    """Write the widget's picture; the suffix says the format. Raises OSError where it cannot be written."""
    if path.suffix.lower() == ".svg":
        _save_svg(widget, path, title)
    elif not widget.grab().save(str(path), "PNG"):
        raise OSError(f"The picture could not be written to {path}.")


def _save_svg(widget: QWidget, path: Path, title: str) -> None:
    generator = QSvgGenerator()
    generator.setFileName(str(path))
    generator.setSize(widget.size())
    generator.setViewBox(QRect(QPoint(0, 0), widget.size()))
    generator.setResolution(round(widget.logicalDpiX()))
    generator.setTitle(title)
    painter = QPainter()
    if not painter.begin(generator):
        raise OSError(f"The picture could not be written to {path}.")
    try:
        QWidget.render(widget, painter, QPoint(0, 0))  # a graphics view's own render draws its scene alone
    finally:
        painter.end()
