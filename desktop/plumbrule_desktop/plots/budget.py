"""The budget as bars: each cause with its size, how it was found, its source, and a known shift beside it."""

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QBrush, QColor, QFontMetricsF, QPainter, QPen, QPolygonF
from PySide6.QtWidgets import QWidget

from plumbrule_core.documents.findings import BudgetLine
from plumbrule_core.units import convert
from plumbrule_desktop.look import Colours
from plumbrule_desktop.plots.rows import AXIS_HEIGHT, LEFT, RowPlot
from plumbrule_desktop.plots.series import Budget, Numbers, shift_words
from plumbrule_desktop.state.amounts import energy, number, signed, unit_words

ROW = 62.0


class BudgetPlot(RowPlot):
    """One row a cause: name and size, the bar with the sum as a mark, how it was found."""

    grid = False

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__("Budget of the uncertainty", ROW, parent)
        self._data = Budget("kJ/mol")

    def show_data(self, data: Budget) -> None:
        """Show this budget."""
        if data != self._data:
            self._data = data
            self.refresh()

    def count(self) -> int:
        """One row a cause."""
        return len(self._data.lines)

    def says(self) -> str:
        """The picture in words."""
        return self._data.says()

    def numbers(self) -> Numbers:
        """The picture as a table."""
        return self._data.numbers()

    def row_words(self, row: int) -> str:
        """One cause in words, with its source."""
        line = self._data.lines[row]
        source = f" Source: {line.source}." if line.source else ""
        return f"{line.cause}: {energy(line.size, line.unit)}{shift_words(line)}. {line.how}{source}"

    def span(self) -> tuple[float, float]:
        """From nothing, or the lowest shift, to the largest bar, shift or sum."""
        values = [self._in_unit(line, line.size) for line in self._data.lines]
        values += [self._in_unit(line, line.shift) for line in self._data.lines if line.shift is not None]
        values += [self._data.total or 0.0, 0.0]
        low, high = min(values), max(values)
        room = 0.06 * (high - low) or 1.0
        return low - (room if low < 0 else 0.0), high + room

    def axis_title(self) -> str:
        """The scale in words, with the sum."""
        title = f"contribution to the uncertainty, {unit_words(self._data.unit)}"
        if self._data.total is None:
            return title
        together = number(self._data.total, self._data.unit, self._data.total)
        return f"{title}; dashed: together {together}"

    def lane(self) -> QRectF:
        """The whole width; names and sizes stand above each bar."""
        return QRectF(
            LEFT + 4,
            self.top_of(0),
            self.width() - 2 * LEFT - 8,
            self.height() - AXIS_HEIGHT - self.top_of(0),
        )

    def _in_unit(self, line: BudgetLine, value: float) -> float:
        return convert(value, line.unit, self._data.unit)

    def draw_rows(self, painter: QPainter, c: Colours, lane: QRectF) -> None:
        """Every cause."""
        for row, line in enumerate(self._data.lines):
            self._draw_row(painter, c, lane, self.top_of(row), line)

    def _draw_row(self, painter: QPainter, c: Colours, lane: QRectF, top: float, line: BudgetLine) -> None:
        metrics = QFontMetricsF(painter.font())
        size = energy(line.size, line.unit)
        if line.shift is not None:
            size = f"{size}; known shift {signed(line.shift, line.unit)}"
        wide = min(metrics.horizontalAdvance(size) + 1, lane.width() * 0.65)
        head = QRectF(lane.left(), top + 3, lane.width(), 18)
        _write(
            painter,
            c.text,
            QRectF(head.right() - wide, head.top(), wide, 18),
            size,
            Qt.AlignmentFlag.AlignRight,
        )
        name = QRectF(head.left(), head.top(), head.width() - wide - 10, 18)
        _write(painter, c.text, name, line.cause, Qt.AlignmentFlag.AlignLeft)
        self._draw_bar(painter, c, lane, top + 24, line)
        how = f"{line.how} ({line.source})" if line.source else line.how
        _write(
            painter, c.muted, QRectF(lane.left(), top + 41, lane.width(), 17), how, Qt.AlignmentFlag.AlignLeft
        )

    def _draw_bar(self, painter: QPainter, c: Colours, lane: QRectF, top: float, line: BudgetLine) -> None:
        zero, end = self.x_of(0.0, lane), self.x_of(self._in_unit(line, line.size), lane)
        painter.setPen(Qt.PenStyle.NoPen)
        painter.setBrush(QColor(c.accent))
        painter.drawRoundedRect(QRectF(zero, top, max(end - zero, 2.0), 9), 3, 3)
        if self._data.total is not None:
            x = self.x_of(self._data.total, lane)
            painter.setPen(QPen(QColor(c.text), 1.5, Qt.PenStyle.DashLine))
            painter.drawLine(QPointF(x, top - 2), QPointF(x, top + 15))
        if line.shift is None:
            return
        tip = self.x_of(self._in_unit(line, line.shift), lane)
        ahead = 6.0 if tip >= zero else -6.0
        top += 7.5
        painter.setPen(QPen(QColor(c.text), 1.6))
        painter.drawLine(QPointF(zero, top + 5.5), QPointF(tip, top + 5.5))
        painter.setBrush(QBrush(QColor(c.text)))
        painter.drawPolygon(
            QPolygonF(
                [QPointF(tip, top + 5.5), QPointF(tip - ahead, top + 1.5), QPointF(tip - ahead, top + 9.5)]
            )
        )


def _write(painter: QPainter, colour: str, place: QRectF, text: str, side: Qt.AlignmentFlag) -> None:
    painter.setPen(QColor(colour))
    shown = QFontMetricsF(painter.font()).elidedText(text, Qt.TextElideMode.ElideRight, place.width())
    painter.drawText(place, side | Qt.AlignmentFlag.AlignVCenter, shown)
