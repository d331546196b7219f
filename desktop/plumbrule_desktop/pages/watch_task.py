"""The chosen task: what it is doing, its convergence as live plots, its log, its readings."""

from PySide6.QtCore import Qt
from PySide6.QtGui import QTextCursor
from PySide6.QtWidgets import QPlainTextEdit, QTabWidget, QVBoxLayout, QWidget

from plumbrule_core.documents.amounts import memory
from plumbrule_core.documents.plan import Task
from plumbrule_core.documents.run_state import TaskState
from plumbrule_desktop.models.grid import GridModel
from plumbrule_desktop.models.readings import task_readings
from plumbrule_desktop.plots.panel import PlotPanel, numbers_table
from plumbrule_desktop.plots.series import convergence
from plumbrule_desktop.state.task_words import state_words, trouble_words
from plumbrule_desktop.state.wording import duration
from plumbrule_desktop.widgets.card import Card, label


class TaskView(Card):
    """Everything that is known of one task."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._shown: TaskState | None = None
        self._panel: PlotPanel | None = None
        self.title = label("Choose a task to see how it converges.", "title")
        self.state = label("")
        self.trouble = label("", "fault")
        self.trouble.setTextInteractionFlags(
            Qt.TextInteractionFlag.TextSelectableByMouse | Qt.TextInteractionFlag.TextSelectableByKeyboard
        )
        self.cost = label("", "muted")
        self._place = QWidget()
        self._column = QVBoxLayout(self._place)
        self._column.setContentsMargins(0, 6, 0, 0)
        self._no_trace = label("", "muted")
        self._column.addWidget(self._no_trace)
        self._column.addStretch(0)
        self.log = QPlainTextEdit(readOnly=True)
        self.log.setAccessibleName("Log of the chosen task")
        self.log.setPlaceholderText("Nothing has been said yet.")
        self.log.setUndoRedoEnabled(False)
        self.log.setMaximumBlockCount(2000)
        self._readings = GridModel(self)
        self.readings = numbers_table(self._readings, "Readings of the chosen task")
        self._tabs = QTabWidget()
        self._tabs.setDocumentMode(True)
        self._tabs.addTab(self._place, "Convergence")
        self._tabs.addTab(self.log, "Log")
        self._tabs.addTab(self.readings, "Readings")
        for part in (self.title, self.state, self.trouble, self.cost):
            self.column.addWidget(part)
        self.column.addWidget(self._tabs, 1)
        self.column.addStretch(0)
        self.clear()

    @property
    def panel(self) -> PlotPanel | None:
        """The plots, once there was something to draw."""
        return self._panel

    def clear(self) -> None:
        """No task is chosen."""
        self._shown = None
        self.title.setText("Choose a task to see how it converges.")
        for part in (self.state, self.trouble, self.cost, self._tabs):
            part.hide()

    def show_task(self, task: Task, state: TaskState, used: float | None) -> None:
        """Show this task; only what differs is touched."""
        self.title.setText(task.label)
        self.state.setText(_first_upper(state_words(state)))
        self.cost.setText(_cost(task, state, used))
        trouble = trouble_words(state)
        self.trouble.setText(trouble)
        self.trouble.setVisible(bool(trouble))
        for part in (self.state, self.cost, self._tabs):
            part.show()
        before = self._shown
        if before is not None and before == state:
            return
        self._shown = state
        another = before is None or before.task != state.task
        if another or before is None or before.trace != state.trace or not state.trace:
            self._show_trace(task, state)
        if another or before is None or before.log != state.log:
            self._show_log(state.log, None if another or before is None else before.log)
        self._readings.show(task_readings(state))
        if another:
            self.readings.resizeColumnToContents(0)
        self._tabs.setTabText(2, f"Readings ({len(state.readings)})" if state.readings else "Readings")

    def _show_trace(self, task: Task, state: TaskState) -> None:
        if not state.trace:
            self._no_trace.setText(_why_no_trace(state))
            self._no_trace.show()
            if self._panel is not None:
                self._panel.hide()
            return
        self._no_trace.hide()
        panel = self._panel or self._make_panel()
        panel.show()
        panel.name_picture(f"Convergence of {task.label}")
        panel.plot.show_data(convergence(state.trace, task.spec.settings, task.spec.rung))  # type: ignore[attr-defined]
        panel.refresh()

    def prepare(self) -> None:
        """Make the plots before they are needed, so that the first trace does not hold up the window."""
        if self._panel is None:
            self._make_panel().hide()

    def _make_panel(self) -> PlotPanel:
        from plumbrule_desktop.plots.convergence import ConvergencePlot

        self._panel = PlotPanel("Change of energy and residual", ConvergencePlot())
        self._column.insertWidget(1, self._panel, 1)
        return self._panel

    def _show_log(self, lines: tuple[str, ...], before: tuple[str, ...] | None) -> None:
        if before is not None and lines[: len(before)] == before:
            for line in lines[len(before) :]:
                self.log.appendPlainText(line)
            return
        self.log.setPlainText("\n".join(lines))
        self.log.moveCursor(QTextCursor.MoveOperation.End)


def _why_no_trace(state: TaskState) -> str:
    if state.state == "waiting":
        return "This task waits for its turn."
    if state.state in ("done", "reused"):
        return "This method has no iterations to draw, or they were not kept."
    return "No iteration yet."


def _cost(task: Task, state: TaskState, used: float | None) -> str:
    forecast = task.forecast
    ends = dict.fromkeys((duration(forecast.seconds_low), duration(forecast.seconds_high)))
    time = f"forecast {' to '.join(ends)}"
    if used is not None:
        time = f"{duration(used)} used, {time}"
    size = f"forecast {memory(forecast.memory_mb)}"
    if state.result is not None:
        size = f"{memory(state.result.memory_mb)} used, {size}"
    resumed = f"\nCarried on from {state.resumed_from}." if state.resumed_from else ""
    return f"Time: {time}. Memory: {size}.{resumed}"


def _first_upper(text: str) -> str:
    return text[:1].upper() + text[1:]
