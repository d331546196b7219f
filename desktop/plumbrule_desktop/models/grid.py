"""A table of texts: what every `numbers as a table` view and the readings stand on."""

from typing import Any

from PySide6.QtCore import QAbstractTableModel, QModelIndex, QObject, QPersistentModelIndex, Qt

from plumbrule_desktop.plots.series import Numbers

Index = QModelIndex | QPersistentModelIndex


class GridModel(QAbstractTableModel):
    """Rows of text; rows that are appended or changed are announced as such, nothing is reset for them."""

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._numbers = Numbers(())

    @property
    def numbers(self) -> Numbers:
        """What is shown."""
        return self._numbers

    def show(self, fresh: Numbers) -> None:
        """Show these numbers."""
        old = self._numbers
        if fresh == old:
            return
        if fresh.header != old.header or len(fresh.rows) < len(old.rows):
            self.beginResetModel()
            self._numbers = fresh
            self.endResetModel()
            return
        if len(fresh.rows) > len(old.rows):
            self.beginInsertRows(QModelIndex(), len(old.rows), len(fresh.rows) - 1)
            self._numbers = fresh
            self.endInsertRows()
        self._numbers = fresh
        for row, (was, now) in enumerate(zip(old.rows, fresh.rows, strict=False)):
            if was != now:
                self.dataChanged.emit(self.index(row, 0), self.index(row, len(fresh.header) - 1))

    def rowCount(self, parent: Index = QModelIndex()) -> int:  # noqa: B008
        """So many rows."""
        return 0 if parent.isValid() else len(self._numbers.rows)

    def columnCount(self, parent: Index = QModelIndex()) -> int:  # noqa: B008
        """So many columns."""
        return 0 if parent.isValid() else len(self._numbers.header)

    def headerData(self, section: int, orientation: Qt.Orientation, role: int = 0) -> Any:
        """The header."""
        if role == Qt.ItemDataRole.DisplayRole and orientation == Qt.Orientation.Horizontal:
            return self._numbers.header[section] if section < len(self._numbers.header) else None
        return None

    def data(self, index: Index, role: int = Qt.ItemDataRole.DisplayRole) -> Any:
        """The text of a cell, which is its tool tip as well."""
        if not index.isValid() or role not in (Qt.ItemDataRole.DisplayRole, Qt.ItemDataRole.ToolTipRole):
            return None
        return self._numbers.rows[index.row()][index.column()]
