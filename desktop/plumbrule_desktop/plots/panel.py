"""A plot with its title, its numbers as a table, and a button that saves its picture."""

from pathlib import Path
from typing import Protocol

from PySide6.QtCore import Qt
from PySide6.QtWidgets import (
    QAbstractItemView,
    QFileDialog,
    QHBoxLayout,
    QPushButton,
    QSizePolicy,
    QStackedWidget,
    QTableView,
    QVBoxLayout,
    QWidget,
)

from plumbrule_desktop.models.grid import GridModel
from plumbrule_desktop.plots.pictures import FILTER, file_name, save_picture
from plumbrule_desktop.plots.series import Numbers
from plumbrule_desktop.widgets.card import label

WIDEST_COLUMN = 210
"""In points; the tool tip of a cell says it in full."""
HINT = "Read off the numbers one by one with the arrow keys."


class Plot(Protocol):
    """What a panel needs of its plot; the plot is a QWidget with a signal `detail(str)`."""

    def numbers(self) -> Numbers:
        """The picture as a table."""

    def says(self) -> str:
        """The picture in words."""


def numbers_table(model: GridModel, name: str) -> QTableView:
    """A quiet table that can only be read."""
    table = QTableView()
    table.setModel(model)
    table.setAccessibleName(name)
    table.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
    table.setSelectionBehavior(QAbstractItemView.SelectionBehavior.SelectRows)
    table.setHorizontalScrollMode(QAbstractItemView.ScrollMode.ScrollPerPixel)
    table.setShowGrid(False)
    table.setTabKeyNavigation(False)
    table.setWordWrap(False)
    table.verticalHeader().hide()
    table.horizontalHeader().setStretchLastSection(True)
    table.horizontalHeader().setDefaultAlignment(Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter)
    return table


def fit_columns(table: QTableView) -> None:
    """Every column as wide as it needs, up to a limit; the last takes what is left."""
    table.resizeColumnsToContents()
    for column in range(table.model().columnCount()):
        table.setColumnWidth(column, min(table.columnWidth(column), WIDEST_COLUMN))


class PlotPanel(QWidget):
    """Shows the picture or its numbers; call `refresh` after the plot's data changed."""

    def __init__(self, title: str, plot: QWidget, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._title = title
        self._plot = plot
        self._model = GridModel(self)
        self.table = numbers_table(self._model, f"{title}: numbers")
        self._stack = QStackedWidget()
        self._stack.addWidget(plot)
        self._stack.addWidget(self.table)
        self._toggle = QPushButton("Numbers")
        self._toggle.setCheckable(True)
        self._toggle.setToolTip("Show the numbers as a table in place of the picture")
        self._toggle.toggled.connect(self._turn)
        self._save = QPushButton("Save picture\u2026")
        self._save.setToolTip("Save this picture as SVG or PNG")
        self._save.clicked.connect(self._ask_where)
        self._detail = label(HINT, "muted")
        self._detail.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Preferred)
        self._detail.setAlignment(Qt.AlignmentFlag.AlignTop)
        plot.detail.connect(lambda text: self._detail.setText(text or HINT))  # type: ignore[attr-defined]
        self._arrange()

    def _arrange(self) -> None:
        top = QHBoxLayout()
        top.addWidget(label(self._title, "heading"), 1)
        for button in (self._toggle, self._save):
            button.setAutoDefault(False)
            top.addWidget(button)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.addLayout(top)
        column.addWidget(self._stack, 1)
        column.addWidget(self._detail)

    @property
    def plot(self) -> QWidget:
        """The picture."""
        return self._plot

    @property
    def detail_text(self) -> str:
        """The line under the picture."""
        return self._detail.text()

    def name_picture(self, title: str) -> None:
        """What a saved picture is called from now on."""
        self._title = title

    def refresh(self) -> None:
        """The plot's data changed: bring the table up to date where it is seen."""
        if self._toggle.isChecked():
            self._fill()

    def _turn(self, numbers: bool) -> None:
        if numbers:
            self._fill()
        self._stack.setCurrentIndex(int(numbers))
        self._save.setEnabled(not numbers)
        self._detail.setText("" if numbers else HINT)

    def _fill(self) -> None:
        fresh = not self._model.numbers.header
        self._model.show(self._plot.numbers())  # type: ignore[attr-defined]
        if fresh:
            fit_columns(self.table)

    def _ask_where(self) -> None:
        chosen, kind = QFileDialog.getSaveFileName(
            self, "Save picture", f"{file_name(self._title)}.svg", FILTER
        )
        if chosen:
            path = Path(chosen)
            self.save(path if path.suffix else path.with_suffix(".png" if "png" in kind else ".svg"))

    def save(self, path: Path) -> None:
        """Save the picture, and say where it went or why it could not be saved."""
        try:
            save_picture(self._plot, path, self._title)
        except OSError as error:
            self._detail.setText(str(error))
            return
        self._detail.setText(f"Saved to {path}")
