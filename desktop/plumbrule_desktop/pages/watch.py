"""The Watch page: the plan as a list of tasks, the chosen task in detail, the run as a whole."""

import importlib
import time

from PySide6.QtCore import QItemSelectionModel, QModelIndex, Qt, QTimer, Signal
from PySide6.QtGui import QCloseEvent, QResizeEvent
from PySide6.QtWidgets import (
    QCheckBox,
    QHBoxLayout,
    QProgressBar,
    QPushButton,
    QSplitter,
    QVBoxLayout,
    QWidget,
)

from plumbrule_core.documents.plan import Plan
from plumbrule_core.documents.run_state import TaskState
from plumbrule_desktop.models.tasks import TASK_ROLE, TaskModel, branches
from plumbrule_desktop.pages.watch_list import TaskList
from plumbrule_desktop.pages.watch_task import TaskView
from plumbrule_desktop.plots.pace import Pace
from plumbrule_desktop.state.clerk import Clerk
from plumbrule_desktop.state.desk import Desk
from plumbrule_desktop.state.difference import fault_words
from plumbrule_desktop.state.progress import Overall, Stopwatch, overall
from plumbrule_desktop.state.wording import duration, forecast_words
from plumbrule_desktop.widgets.card import Card, label
from plumbrule_desktop.widgets.scrolling import scroll_down

CLOCK_MS = 1000
NARROW = 860
"""Below this width, in points, the chosen task stands under the list."""


class WatchPage(QWidget):
    """`page_wanted` asks the window to show another page, by its name."""

    page_wanted = Signal(str)

    def __init__(self, desk: Desk, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._desk = desk
        self._watch = Stopwatch()
        self._shown_id: int | None = None
        self.model = TaskModel(self)
        self.list = TaskList(self.model)
        self.list.selectionModel().currentChanged.connect(self._picked)
        self.task = TaskView()
        self.headline = label("", "title")
        self.line = label("", "muted")
        self.bar = QProgressBar(minimum=0, maximum=1000, textVisible=False)
        self.bar.setAccessibleName("Progress of the run")
        self.button = QPushButton()
        self.button.setProperty("role", "primary")
        self.button.clicked.connect(self._act)
        self.follow = QCheckBox("Follow the running task")
        self.follow.setChecked(True)
        self.follow.toggled.connect(self.refresh)
        self._arrange()
        self._pace = Pace(self, self._refresh)
        self._clock = QTimer(self, interval=CLOCK_MS)
        self._clock.timeout.connect(self.refresh)
        for signal in (desk.brief_changed, desk.plan_changed, desk.run_changed):
            signal.connect(self._moved)
        self._clerk = Clerk("plumbrule-plots", self)
        self._plots_asked = False
        self._moved()

    def _prepare(self) -> None:
        """Do now, in two pieces, what would hold up the window when the page is first shown during a run."""
        self.task.prepare()
        QTimer.singleShot(0, self, self._polish)

    def _polish(self) -> None:
        self._refresh()
        for part in self.findChildren(QWidget):
            part.ensurePolished()

    def closeEvent(self, event: QCloseEvent) -> None:
        """End the thread that fetches the plots."""
        self._clerk.close()
        super().closeEvent(event)

    def _arrange(self) -> None:
        head = Card()
        row = QHBoxLayout()
        words = QVBoxLayout()
        words.addWidget(self.headline)
        words.addWidget(self.line)
        row.addLayout(words, 1)
        row.addWidget(self.button, 0, Qt.AlignmentFlag.AlignVCenter)
        head.column.addLayout(row)
        head.column.addWidget(self.bar)
        left = QWidget()
        column = QVBoxLayout(left)
        column.setContentsMargins(0, 0, 0, 0)
        column.addWidget(self.list, 1)
        column.addWidget(self.follow)
        self.splitter = QSplitter(Qt.Orientation.Horizontal)
        self.splitter.setChildrenCollapsible(False)
        self.splitter.setHandleWidth(12)
        self.splitter.addWidget(left)
        self.splitter.addWidget(self.task)
        self.splitter.setSizes([640, 460])
        self.splitter.setStretchFactor(0, 4)
        self.splitter.setStretchFactor(1, 3)
        column = QVBoxLayout()
        column.setContentsMargins(16, 12, 16, 12)
        column.setSpacing(10)
        column.addWidget(head)
        column.addWidget(self.splitter, 1)
        column.addStretch(0)
        scroll_down(self, column)

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Side by side where there is room."""
        narrow = event.size().width() < NARROW
        self.splitter.setOrientation(Qt.Orientation.Vertical if narrow else Qt.Orientation.Horizontal)
        super().resizeEvent(event)

    def refresh(self) -> None:
        """Bring the page up to date, at a calm pace."""
        self._pace.ask()

    def _moved(self) -> None:
        """Take the time of what began or ended, also while the page is not seen."""
        desk = self._desk
        if desk.brief_id != self._shown_id:
            self._shown_id = desk.brief_id
            self._watch.forget()
        self._watch.follow(desk.state, self._running, time.monotonic())
        if desk.plan is not None and not self._plots_asked:
            self._plots_asked = True
            self._clerk.do(_import_plots, lambda _: self._prepare())
        if self._running and not self._clock.isActive():
            self._clock.start()
        elif not self._running:
            self._clock.stop()
        self.refresh()

    @property
    def _running(self) -> bool:
        return self._desk.running and self._desk.running_id == self._desk.brief_id

    def _refresh(self) -> None:
        plan = self._desk.plan
        now = time.monotonic()
        self.model.show(branches(plan or Plan(), self._desk.state, self._watch, now))
        self._show_head(plan, now)
        if self.follow.isChecked():
            self._choose_running()
        self._show_chosen(now)

    # the run as a whole

    def _show_head(self, plan: Plan | None, now: float) -> None:
        can_run = plan is not None and bool(plan.tasks) and not self._desk.faults
        self.bar.setVisible(can_run)
        self.splitter.setVisible(can_run)
        if plan is None or not can_run:
            self.button.hide()
            self._say(*_no_plan(plan, tuple(fault_words(fault) for fault in self._desk.faults)))
            return
        whole = overall(plan, self._desk.state, self._watch, now, self._running)
        self.bar.setValue(round(1000 * whole.fraction))
        self.bar.setAccessibleDescription(whole.words)
        self._say(_headline(whole), _line(plan, whole))
        self.button.setVisible(True)
        stopping = self._running and self._desk.stopping
        self.button.setText("Stopping\u2026" if stopping else _button(whole))
        self.button.setEnabled(not stopping and not (self._desk.running and not self._running))

    def _say(self, headline: str, line: str) -> None:
        self.headline.setText(headline)
        self.line.setText(line)

    def _act(self) -> None:
        if self._running:
            self._desk.stop()
            return
        states = self._desk.state.tasks.values()
        if states and all(one.state in ("done", "reused") for one in states):
            self.page_wanted.emit("judge")
        else:
            self._desk.run()

    # the chosen task

    def _picked(self, index: QModelIndex) -> None:
        if index.isValid() and self.list.hasFocus():
            self.follow.setChecked(False)
        self._show_chosen(time.monotonic())

    def _choose_running(self) -> None:
        states = self._desk.state.tasks
        wanted = next((key for key, one in states.items() if one.state == "running"), None)
        if wanted is None and not self._chosen():
            wanted = next(iter(states), None)
        if wanted is not None and wanted != self._chosen():
            self.choose(wanted)

    def choose(self, task: str) -> None:
        """Show one task."""
        index = self.model.index_of(task)
        flags = QItemSelectionModel.SelectionFlag.ClearAndSelect | QItemSelectionModel.SelectionFlag.Rows
        if index.isValid():
            self.list.selectionModel().setCurrentIndex(index, flags)

    def _chosen(self) -> str:
        return self.list.currentIndex().data(TASK_ROLE) or ""

    def _show_chosen(self, now: float) -> None:
        plan, key = self._desk.plan, self._chosen()
        task = next((one for one in plan.tasks if one.id == key), None) if plan else None
        if task is None:
            self.task.clear()
            return
        state = self._desk.state.tasks.get(key) or TaskState(task=key)
        self.task.show_task(task, state, self._watch.used(state, now))


def _import_plots() -> None:
    """In a thread: the plotting library takes most of a second to load."""
    importlib.import_module("plumbrule_desktop.plots.convergence")


def _no_plan(plan: Plan | None, faults: tuple[str, ...]) -> tuple[str, str]:
    if faults:
        return "This question cannot be run yet", "\n".join(faults)
    if plan is None:
        return "Working out what has to be computed\u2026", ""
    return "There is nothing to compute yet", "Put a molecule in and ask a question on the Build page."


def _headline(whole: Overall) -> str:
    if whole.running:
        return "Running, slower than the forecast" if whole.slipping else "Running"
    if whole.answered == whole.tasks:
        return "All tasks are done"
    if whole.troubled:
        many = "1 task" if whole.troubled == 1 else f"{whole.troubled} tasks"
        return f"{many} did not finish"
    return "Not everything is computed yet" if whole.answered else "Ready to run"


def _line(plan: Plan, whole: Overall) -> str:
    if whole.running or whole.answered or whole.troubled:
        return f"{whole.words}." + (
            "" if whole.running or not whole.left else f" About {duration(whole.left)} of computing is left."
        )
    forecast = plan.forecast
    species = len({task.spec.species.content for task in plan.tasks})
    tasks = "1 task" if len(plan.tasks) == 1 else f"{len(plan.tasks)} tasks"
    words = f"{tasks} on {species} species" + (f": {forecast_words(forecast)}." if forecast else ".")
    return "\n".join((words, *plan.notes))


def _button(whole: Overall) -> str:
    if whole.running:
        return "Stop"
    if whole.answered == whole.tasks:
        return "See the judgement"
    return "Run"
