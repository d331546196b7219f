"""A painted plot of named rows on one horizontal scale: the ground of the comparison and of the budget."""

from abc import abstractmethod

from PySide6.QtCore import QRectF, QSize, Qt, Signal
from PySide6.QtGui import (
    QColor,
    QFocusEvent,
    QFontMetricsF,
    QKeyEvent,
    QMouseEvent,
    QPainter,
    QPaintEvent,
    QPen,
)
from PySide6.QtWidgets import QSizePolicy, QWidget

from plumbrule_desktop.look import Colours, colours
from plumbrule_desktop.plots.series import Numbers
from plumbrule_desktop.plots.ticks import step, tick_text, ticks

AXIS_HEIGHT = 44.0
LEFT = 12.0


class RowPlot(QWidget):
    """Rows are stepped through with the arrow keys or the mouse; `detail` says what the chosen one is."""

    detail = Signal(str)
    grid = True
    """Whether the scale's lines run through the rows."""

    def __init__(self, name: str, row_height: float, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._row_height = row_height
        self._current = -1
        self.setAccessibleName(name)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setMouseTracking(True)
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)

    @abstractmethod
    def count(self) -> int:
        """How many rows."""

    @abstractmethod
    def says(self) -> str:
        """The picture in words."""

    @abstractmethod
    def numbers(self) -> Numbers:
        """The picture as a table."""

    @abstractmethod
    def row_words(self, row: int) -> str:
        """One row in words."""

    @abstractmethod
    def span(self) -> tuple[float, float]:
        """The ends of the scale."""

    @abstractmethod
    def axis_title(self) -> str:
        """What the scale counts, with its unit."""

    @abstractmethod
    def lane(self) -> QRectF:
        """Where the scale lies, without its axis: left, top, width and height."""

    @abstractmethod
    def draw_rows(self, painter: QPainter, c: Colours, lane: QRectF) -> None:
        """Draw everything but the axis."""

    def refresh(self) -> None:
        """The data changed."""
        self._current = min(self._current, self.count() - 1)
        self.setAccessibleDescription(self.says())
        self.updateGeometry()
        self.update()

    @property
    def current(self) -> int:
        """The row stepped to, or -1."""
        return self._current

    def choose(self, row: int) -> None:
        """Step to a row."""
        row = max(-1, min(row, self.count() - 1))
        if row != self._current:
            self._current = row
            self.detail.emit(self.row_words(row) if row >= 0 else "")
            self.update()

    def top_of(self, row: int) -> float:
        """Where a row begins, in points from the top."""
        return 6.0 + row * self._row_height

    def x_of(self, value: float, lane: QRectF) -> float:
        """Where a value lies on the scale."""
        low, high = self.span()
        return lane.left() + (value - low) / (high - low or 1.0) * lane.width()

    def sizeHint(self) -> QSize:
        """As high as the rows need."""
        return QSize(480, round(self.top_of(self.count()) + AXIS_HEIGHT))

    def minimumSizeHint(self) -> QSize:
        """As high as the rows need, and wide enough for names and numbers."""
        return QSize(300, self.sizeHint().height())

    def paintEvent(self, event: QPaintEvent) -> None:
        """Ground, rows, axis, focus."""
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        c = colours(self)
        painter.setFont(self.font())
        painter.fillRect(self.rect(), QColor(c.surface))
        if self.count():
            self._draw_current(painter, c)
            lane = self.lane()
            self._draw_axis(painter, c, lane)
            self.draw_rows(painter, c, lane)
        if self.hasFocus():
            painter.setPen(QPen(QColor(c.accent), 2))
            painter.setBrush(Qt.BrushStyle.NoBrush)
            painter.drawRoundedRect(QRectF(self.rect()).adjusted(1, 1, -1, -1), 5, 5)
        painter.end()

    def _draw_current(self, painter: QPainter, c: Colours) -> None:
        if self._current >= 0:
            ground = QRectF(3, self.top_of(self._current), self.width() - 6, self._row_height)
            painter.setPen(Qt.PenStyle.NoPen)
            painter.setBrush(QColor(c.raised))
            painter.drawRoundedRect(ground, 4, 4)

    def _draw_axis(self, painter: QPainter, c: Colours, lane: QRectF) -> None:
        low, high = self.span()
        most = max(2, int(lane.width() // 70))
        size = step(high - low, most)
        painter.setPen(QPen(QColor(c.line), 1))
        painter.drawLine(lane.bottomLeft(), lane.bottomRight())
        metrics = QFontMetricsF(painter.font())
        for value in ticks(low, high, most):
            x = self.x_of(value, lane)
            painter.setPen(QPen(QColor(c.line), 1))
            top = lane.top() if self.grid else lane.bottom()
            painter.drawLine(round(x), round(top), round(x), round(lane.bottom() + 4))
            painter.setPen(QColor(c.muted))
            text = tick_text(value, size)
            wide = metrics.horizontalAdvance(text)
            left = min(max(x - wide / 2, 2.0), self.width() - wide - 2)
            painter.drawText(
                QRectF(left, lane.bottom() + 5, wide + 1, 16), Qt.AlignmentFlag.AlignCenter, text
            )
        title = metrics.elidedText(self.axis_title(), Qt.TextElideMode.ElideRight, self.width() - 2 * LEFT)
        place = QRectF(LEFT, lane.bottom() + 21, self.width() - 2 * LEFT, 18)
        painter.drawText(place, Qt.AlignmentFlag.AlignCenter, title)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Up and down step through the rows, Home and End jump, Escape lets go."""
        match event.key():
            case Qt.Key.Key_Down:
                self.choose(self._current + 1)
            case Qt.Key.Key_Up:
                self.choose(max(0, self._current - 1))
            case Qt.Key.Key_Home:
                self.choose(0)
            case Qt.Key.Key_End:
                self.choose(self.count() - 1)
            case Qt.Key.Key_Escape if self._current >= 0:
                self.choose(-1)
            case _:
                super().keyPressEvent(event)

    def mouseMoveEvent(self, event: QMouseEvent) -> None:
        """The row under the pointer."""
        row = int((event.position().y() - self.top_of(0)) // self._row_height)
        self.choose(row if 0 <= row < self.count() else -1)

    def focusInEvent(self, event: QFocusEvent) -> None:
        """Show the focus, and a row to begin with when the keyboard came here."""
        super().focusInEvent(event)
        if self._current < 0 and event.reason() in (
            Qt.FocusReason.TabFocusReason,
            Qt.FocusReason.BacktabFocusReason,
        ):
            self.choose(0)
