"""A layout that sets widgets one after the other and breaks the line where the width ends."""

from PySide6.QtCore import QPoint, QRect, QSize, Qt
from PySide6.QtWidgets import QLayout, QLayoutItem, QWidget


class FlowLayout(QLayout):
    """Widgets in lines, centred on each line's height."""

    def __init__(
        self, parent: QWidget | None = None, spacing: int = 6, line_spacing: int | None = None
    ) -> None:
        super().__init__(parent)
        self._items: list[QLayoutItem] = []
        self._gap = spacing
        self._line_gap = spacing if line_spacing is None else line_spacing
        self._heights: dict[int, int] = {}
        self.setContentsMargins(0, 0, 0, 0)

    def addItem(self, item: QLayoutItem) -> None:
        """Take an item at the end."""
        self._items.append(item)
        self.invalidate()

    def count(self) -> int:
        """How many items there are."""
        return len(self._items)

    def itemAt(self, index: int) -> QLayoutItem | None:
        """The item at a place, or None."""
        return self._items[index] if 0 <= index < len(self._items) else None

    def takeAt(self, index: int) -> QLayoutItem | None:
        """Give the item back."""
        return self._items.pop(index) if 0 <= index < len(self._items) else None

    def expandingDirections(self) -> Qt.Orientation:
        """None: it takes what it needs."""
        return Qt.Orientation(0)

    def hasHeightForWidth(self) -> bool:
        """Fewer points of width need more of height."""
        return True

    def heightForWidth(self, width: int) -> int:
        """The height of all lines at this width."""
        if width not in self._heights:
            self._heights[width] = self._arrange(QRect(0, 0, width, 0), move=False)
        return self._heights[width]

    def invalidate(self) -> None:
        """A widget came, went or changed its size: heights are counted anew."""
        self._heights.clear()
        super().invalidate()

    def setGeometry(self, rect: QRect) -> None:
        """Place every widget."""
        super().setGeometry(rect)
        self._arrange(rect, move=True)

    def sizeHint(self) -> QSize:
        """All in one line."""
        hints = [item.sizeHint() for item in self._items if not item.isEmpty()]
        width = sum(hint.width() for hint in hints) + self._gap * max(0, len(hints) - 1)
        return QSize(width, max((hint.height() for hint in hints), default=0))

    def minimumSize(self) -> QSize:
        """The largest widget."""
        sizes = [item.minimumSize() for item in self._items if not item.isEmpty()]
        return QSize(max((s.width() for s in sizes), default=0), max((s.height() for s in sizes), default=0))

    def _arrange(self, rect: QRect, move: bool) -> int:
        y = rect.y()
        for line in self._lines(rect.width()):
            height = max(item.sizeHint().height() for item in line)
            x = rect.x()
            for item in line:
                size = item.sizeHint().boundedTo(QSize(rect.width(), 10000))
                if item.hasHeightForWidth():
                    size.setHeight(item.heightForWidth(size.width()))
                if move:
                    item.setGeometry(QRect(QPoint(x, y + (height - size.height()) // 2), size))
                x += size.width() + self._gap
            y += height + self._line_gap
        return max(0, y - self._line_gap - rect.y())

    def _lines(self, width: int) -> list[list[QLayoutItem]]:
        lines: list[list[QLayoutItem]] = []
        used = 0
        for item in self._items:
            if item.isEmpty():
                continue
            wide = item.sizeHint().width()
            if lines and used + self._gap + wide <= width:
                lines[-1].append(item)
                used += self._gap + wide
            else:
                lines.append([item])
                used = wide
        return lines
