"""The list of tasks, with a progress bar drawn in each line."""

from PySide6.QtCore import QModelIndex, QPersistentModelIndex, QRectF, QSize, Qt
from PySide6.QtGui import QColor, QPainter, QPen
from PySide6.QtWidgets import (
    QAbstractItemView,
    QHeaderView,
    QStyle,
    QStyledItemDelegate,
    QStyleOptionViewItem,
    QTreeView,
    QWidget,
)

from plumbrule_desktop.look import Colours, colours
from plumbrule_desktop.models.tasks import FRACTION_ROLE, STATE_ROLE, TASK_ROLE, Column, TaskModel

Index = QModelIndex | QPersistentModelIndex
BAR_HEIGHT = 8.0
CALM = frozenset({"waiting", "running", "done", "reused"})
WIDEST_NAME = 165
"""A longer name is cut to so many points; its tool tip says it in full."""


def state_colour(c: Colours, state: str) -> str:
    """The colour of a state; its words always stand beside it."""
    return {
        "done": c.sound,
        "reused": c.sound,
        "running": c.accent,
        "slipping": c.care,
        "stopped": c.care,
        "failed": c.stop,
        "died": c.stop,
    }.get(state, c.unknown)


class NameDelegate(QStyledItemDelegate):
    """Chains in bold."""

    def initStyleOption(self, option: QStyleOptionViewItem, index: Index) -> None:
        """A chain has no task of its own."""
        super().initStyleOption(option, index)
        option.font.setBold(not index.data(TASK_ROLE))

    def sizeHint(self, option: QStyleOptionViewItem, index: Index) -> QSize:
        """A little air."""
        size = super().sizeHint(option, index)
        return QSize(size.width() + 8, max(size.height() + 6, 26))


class StateDelegate(QStyledItemDelegate):
    """What did not finish, or runs late, in its colour."""

    def initStyleOption(self, option: QStyleOptionViewItem, index: Index) -> None:
        """A chosen line keeps the colour of the choice."""
        super().initStyleOption(option, index)
        state = index.data(STATE_ROLE)
        if state in CALM or option.state & QStyle.StateFlag.State_Selected:
            return
        option.palette.setColor(
            option.palette.ColorRole.Text, QColor(state_colour(colours(option.widget), state))
        )


class ProgressDelegate(QStyledItemDelegate):
    """Draws the fraction as a bar with its percentage."""

    def paint(self, painter: QPainter, option: QStyleOptionViewItem, index: Index) -> None:
        """The ground of the line, then the bar."""
        self.initStyleOption(option, index)
        text, option.text = option.text, ""
        style = option.widget.style() if option.widget else None
        if style is not None:
            style.drawControl(QStyle.ControlElement.CE_ItemViewItem, option, painter, option.widget)
        self._draw(painter, option, index, text)

    def _draw(self, painter: QPainter, option: QStyleOptionViewItem, index: Index, text: str) -> None:
        c = colours(option.widget)
        chosen = bool(option.state & QStyle.StateFlag.State_Selected)
        wide = option.fontMetrics.horizontalAdvance("100%") + 8
        room = QRectF(option.rect).adjusted(6, 0, -wide - 4, 0)
        bar = QRectF(room.left(), room.center().y() - BAR_HEIGHT / 2, max(room.width(), 8.0), BAR_HEIGHT)
        painter.save()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.setPen(QPen(QColor(c.on_accent if chosen else c.line), 1))
        painter.setBrush(QColor(c.raised))
        painter.drawRoundedRect(bar, 4, 4)
        done = QRectF(bar)
        done.setWidth(bar.width() * float(index.data(FRACTION_ROLE)))
        if done.width() >= 1:
            painter.setPen(Qt.PenStyle.NoPen)
            painter.setBrush(QColor(state_colour(c, index.data(STATE_ROLE))))
            painter.drawRoundedRect(done, 4, 4)
        painter.setPen(QColor(c.on_accent if chosen else c.muted))
        place = QRectF(option.rect.right() - wide - 2, option.rect.top(), wide, option.rect.height())
        painter.drawText(place, Qt.AlignmentFlag.AlignVCenter | Qt.AlignmentFlag.AlignRight, text)
        painter.restore()


class TaskList(QTreeView):
    """The plan's tasks grouped by chain."""

    def __init__(self, model: TaskModel, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setModel(model)
        self.setItemDelegateForColumn(Column.TASK, NameDelegate(self))
        self.setItemDelegateForColumn(Column.STATE, StateDelegate(self))
        self.setItemDelegateForColumn(Column.PROGRESS, ProgressDelegate(self))
        self.setAccessibleName("Tasks of the plan")
        self.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
        self.setSelectionBehavior(QAbstractItemView.SelectionBehavior.SelectRows)
        self.setHorizontalScrollMode(QAbstractItemView.ScrollMode.ScrollPerPixel)
        self.setVerticalScrollMode(QAbstractItemView.ScrollMode.ScrollPerPixel)
        self.setUniformRowHeights(True)
        self.setIndentation(14)
        self.setMinimumSize(260, 170)
        header = self.header()
        header.setStretchLastSection(True)
        header.setMinimumSectionSize(60)
        for column, width in ((Column.TASK, 140), (Column.STATE, 136), (Column.PROGRESS, 98)):
            header.resizeSection(column, width)
        header.setSectionResizeMode(Column.TASK, QHeaderView.ResizeMode.Interactive)
        model.modelReset.connect(self.unfold)

    def unfold(self) -> None:
        """Show every task, and as much of each column as it needs."""
        self.expandAll()
        for column in (Column.TASK, Column.TIME):
            self.resizeColumnToContents(column)
        self.setColumnWidth(Column.TASK, min(self.columnWidth(Column.TASK), WIDEST_NAME))
