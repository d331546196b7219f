"""The answers of all rungs beside each other, relative to the one the answer stands on."""

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QFontMetricsF, QPainter, QPen, QPolygonF
from PySide6.QtWidgets import QWidget

from plumbrule_desktop.look import Colours
from plumbrule_desktop.plots.rows import AXIS_HEIGHT, LEFT, RowPlot
from plumbrule_desktop.plots.series import Comparison, Numbers, Point, remark
from plumbrule_desktop.state.amounts import energy, signed, unit_words

OUTLIER = 6.0
"""A point so many times further out than the next is drawn as an arrow at the edge."""
CAP = 5.0


class ComparisonPlot(RowPlot):
    """One row a rung: name, point with its bar, value. The band is the accuracy needed."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__("Comparison of the rungs", 30.0, parent)
        self._data = Comparison("kJ/mol")

    def show_data(self, data: Comparison) -> None:
        """Show this comparison."""
        if data != self._data:
            self._data = data
            self.refresh()

    def count(self) -> int:
        """One row a rung."""
        return len(self._data.points)

    def says(self) -> str:
        """The picture in words."""
        return self._data.says()

    def numbers(self) -> Numbers:
        """The picture as a table."""
        return self._data.numbers()

    def row_words(self, row: int) -> str:
        """One rung in words."""
        point, unit = self._data.points[row], self._data.unit
        name = f"{point.rung}/{point.basis}" if point.basis else point.rung
        away = f"{signed(point.from_best, unit)} from the best rung"
        words = f"{name}: {energy(point.value, unit, point.bar)}, {away}"
        return f"{words}; {remark(point)}" if remark(point) else words

    def span(self) -> tuple[float, float]:
        """The points with their bars and the band; an outlier does not stretch the scale."""
        reach = sorted(abs(point.from_best) + (point.bar or 0.0) for point in self._data.points)
        floor = max([self._data.within or 0.0, *(point.bar or 0.0 for point in self._data.points)])
        limit = max(reach[-2] if len(reach) > 1 else 0.0, floor) or reach[-1]
        limit = reach[-1] if reach[-1] <= OUTLIER * limit else limit
        limit = max(limit, floor) * 1.15 or 1.0
        lowest = min(point.from_best - (point.bar or 0.0) for point in self._data.points)
        highest = max(point.from_best + (point.bar or 0.0) for point in self._data.points)
        low = -limit if lowest < -floor else -floor * 1.3
        high = limit if highest > floor else floor * 1.3
        return (low, high) if high > low else (-1.0, 1.0)

    def axis_title(self) -> str:
        """The scale in words."""
        return f"distance from the best rung, {unit_words(self._data.unit)}"

    def lane(self) -> QRectF:
        """Between the names and the values."""
        metrics = QFontMetricsF(self.font())
        names = max((metrics.horizontalAdvance(self._name(p)) for p in self._data.points), default=0.0)
        values = max((metrics.horizontalAdvance(self._value(p)) for p in self._data.points), default=0.0)
        left = LEFT + min(names, self.width() * 0.32) + 14
        right = self.width() - LEFT - min(values, self.width() * 0.4) - 14
        top = self.top_of(0)
        return QRectF(left, top, max(right - left, 40.0), self.height() - AXIS_HEIGHT - top)

    def _name(self, point: Point) -> str:
        same = len({one.basis for one in self._data.points}) == 1
        return point.rung if same or not point.basis else f"{point.rung}/{point.basis}"

    def _value(self, point: Point) -> str:
        text = energy(point.value, self._data.unit, point.bar)
        return f"{text}, not reliable" if point.stopped else text

    def draw_rows(self, painter: QPainter, c: Colours, lane: QRectF) -> None:
        """The band of the accuracy needed, then every rung."""
        if self._data.within:
            band = QColor(c.accent)
            band.setAlpha(36)
            left, right = (self.x_of(side * self._data.within, lane) for side in (-1, 1))
            painter.fillRect(QRectF(left, lane.top(), right - left, lane.height()), band)
        zero = round(self.x_of(0.0, lane))
        painter.setPen(QPen(QColor(c.muted), 1, Qt.PenStyle.DashLine))
        painter.drawLine(zero, round(lane.top()), zero, round(lane.bottom()))
        for row, point in enumerate(self._data.points):
            self._draw_row(painter, c, lane, self.top_of(row), point)

    def _draw_row(self, painter: QPainter, c: Colours, lane: QRectF, top: float, point: Point) -> None:
        ink = QColor(c.muted if point.stopped else c.text)
        metrics = QFontMetricsF(painter.font())
        font = painter.font()
        font.setBold(point.best)
        painter.setFont(font)
        painter.setPen(ink)
        name = metrics.elidedText(self._name(point), Qt.TextElideMode.ElideRight, lane.left() - LEFT - 8)
        left, right = Qt.AlignmentFlag.AlignLeft, Qt.AlignmentFlag.AlignRight
        middle = Qt.AlignmentFlag.AlignVCenter
        painter.drawText(QRectF(LEFT, top, lane.left() - LEFT, 30), left | middle, name)
        font.setBold(False)
        painter.setFont(font)
        room = QRectF(lane.right() + 8, top, self.width() - LEFT - lane.right() - 8, 30)
        value = metrics.elidedText(self._value(point), Qt.TextElideMode.ElideRight, room.width())
        painter.drawText(room, right | middle, value)
        self._draw_point(painter, c, lane, top + 15.0, point)

    def _draw_point(self, painter: QPainter, c: Colours, lane: QRectF, y: float, point: Point) -> None:
        x = self.x_of(point.from_best, lane)
        colour = QColor(c.muted if point.stopped else c.accent if point.best else c.text)
        painter.setPen(QPen(colour, 2))
        if not lane.left() - 1 <= x <= lane.right() + 1:
            _draw_arrow(
                painter, colour, QPointF(lane.left() if x < lane.left() else lane.right(), y), x < lane.left()
            )
            return
        if point.bar:
            low, high = (self.x_of(point.from_best + side * point.bar, lane) for side in (-1, 1))
            painter.drawLine(QPointF(low, y), QPointF(high, y))
            for end in (low, high):
                painter.drawLine(QPointF(end, y - CAP), QPointF(end, y + CAP))
        if point.stopped:
            painter.drawLine(QPointF(x - 4, y - 4), QPointF(x + 4, y + 4))
            painter.drawLine(QPointF(x - 4, y + 4), QPointF(x + 4, y - 4))
            return
        painter.setBrush(colour if point.best else QColor(c.surface))
        painter.drawEllipse(QPointF(x, y), 4.5, 4.5)


def _draw_arrow(painter: QPainter, colour: QColor, tip: QPointF, left: bool) -> None:
    back = 9.0 if left else -9.0
    painter.setBrush(colour)
    painter.drawPolygon(QPolygonF([tip, tip + QPointF(back, -5), tip + QPointF(back, 5)]))
