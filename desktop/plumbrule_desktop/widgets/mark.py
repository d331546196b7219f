"""The mark of a severity: its shape says the same as its colour."""

from PySide6.QtCore import QPointF, QRectF, QSize, Qt
from PySide6.QtGui import QBrush, QColor, QPainter, QPaintEvent, QPen, QPolygonF
from PySide6.QtWidgets import QSizePolicy, QWidget

from plumbrule_core.documents.findings import Severity
from plumbrule_desktop.look import colours


class SeverityMark(QWidget):
    """A circle with i for a note, a triangle for care, an octagon for stop."""

    def __init__(self, severity: Severity, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._severity = severity
        self.setSizePolicy(QSizePolicy.Policy.Fixed, QSizePolicy.Policy.Fixed)

    def sizeHint(self) -> QSize:
        """A square of 18 points."""
        return QSize(18, 18)

    def paintEvent(self, event: QPaintEvent) -> None:
        """Draw the shape with its sign."""
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        c = colours(self)
        painter.setPen(Qt.PenStyle.NoPen)
        painter.setBrush(QBrush(QColor(c.severity(self._severity))))
        box = QRectF(1, 1, 16, 16)
        if self._severity == "note":
            painter.drawEllipse(box)
        else:
            painter.drawPolygon(_TRIANGLE if self._severity == "care" else _OCTAGON)
        font = painter.font()
        font.setPixelSize(11)
        font.setBold(True)
        painter.setFont(font)
        painter.setPen(QPen(QColor(c.surface)))
        sign = {"note": "i", "care": "!", "stop": "\u00d7"}[self._severity]
        painter.drawText(
            box.adjusted(0, 3 if self._severity == "care" else 0, 0, 0), Qt.AlignmentFlag.AlignCenter, sign
        )
        painter.end()


_TRIANGLE = QPolygonF([QPointF(9, 1), QPointF(17.5, 16.5), QPointF(0.5, 16.5)])
_OCTAGON = QPolygonF(
    [
        QPointF(*p)
        for p in ((5.7, 1), (12.3, 1), (17, 5.7), (17, 12.3), (12.3, 17), (5.7, 17), (1, 12.3), (1, 5.7))
    ]
)
