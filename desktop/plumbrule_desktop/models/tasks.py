"""The plan as a tree: one branch for each chain (a species at one level), one leaf for each task."""

from dataclasses import dataclass
from enum import IntEnum
from typing import Any

from PySide6.QtCore import QAbstractItemModel, QModelIndex, QObject, QPersistentModelIndex, Qt

from plumbrule_core.documents.amounts import memory
from plumbrule_core.documents.plan import Plan, Task
from plumbrule_core.documents.run_state import Progressing, RunState, TaskState
from plumbrule_desktop.state.progress import ANSWERED, Stopwatch, is_slipping, share
from plumbrule_desktop.state.task_words import state_words, trouble_words
from plumbrule_desktop.state.wording import duration

Index = QModelIndex | QPersistentModelIndex
HEADER = ("Task", "State", "Progress", "Time / forecast", "Memory / forecast")
UNKNOWN = "\u2013"
TASK_ROLE = int(Qt.ItemDataRole.UserRole)
"""The task's identity, empty for a chain."""
FRACTION_ROLE = TASK_ROLE + 1
"""How far, 0 to 1."""
STATE_ROLE = TASK_ROLE + 2
"""The state's name, `slipping` where a running task is beyond its forecast."""

ROLES = frozenset(
    {
        int(Qt.ItemDataRole.DisplayRole),
        int(Qt.ItemDataRole.ToolTipRole),
        int(Qt.ItemDataRole.AccessibleTextRole),
        TASK_ROLE,
        FRACTION_ROLE,
        STATE_ROLE,
    }
)


class Column(IntEnum):
    """The columns of the list."""

    TASK = 0
    STATE = 1
    PROGRESS = 2
    TIME = 3
    MEMORY = 4


@dataclass(frozen=True, slots=True)
class Row:
    """What one line shows."""

    task: str
    texts: tuple[str, str, str, str, str]
    state: str
    fraction: float
    tip: str
    spoken: str


@dataclass(frozen=True, slots=True)
class Branch:
    """A chain with its tasks."""

    head: Row
    rows: tuple[Row, ...]


def branches(plan: Plan, state: RunState, watch: Stopwatch, now: float) -> tuple[Branch, ...]:
    """The tree's content at one moment."""
    chains: dict[str, list[Task]] = {}
    for task in plan.tasks:
        chains.setdefault(task.chain, []).append(task)
    return tuple(_branch(tasks, state, watch, now) for tasks in chains.values())


def _branch(tasks: list[Task], state: RunState, watch: Stopwatch, now: float) -> Branch:
    seen = [(task, state.tasks.get(task.id) or TaskState(task=task.id)) for task in tasks]
    rows = tuple(_row(task, one, watch.used(one, now)) for task, one in seen)
    done = sum(one.state in ANSWERED for _, one in seen)
    spec = tasks[0].spec
    weight = sum(task.forecast.seconds for task in tasks) or 1.0
    fraction = (
        sum(task.forecast.seconds * row.fraction for task, row in zip(tasks, rows, strict=True)) / weight
    )
    name = f"{spec.species.name} \u00b7 {spec.settings.basis}"
    words = f"{done} of {len(tasks)} done"
    time = _short(sum(task.forecast.seconds for task in tasks))
    peak = memory(max(task.forecast.memory_mb for task in tasks))
    head = Row(
        task="",
        texts=(
            name,
            words,
            f"{fraction:.0%}",
            f"{_sum_used(seen, watch, now)} / {time}",
            f"{UNKNOWN} / {peak}",
        ),
        state=_branch_state([one for _, one in seen]),
        fraction=fraction,
        tip=f"{spec.species.name}, {spec.species.formula}, {spec.settings.basis}",
        spoken=f"{name}, {words}",
    )
    return Branch(head, rows)


def _branch_state(states: list[TaskState]) -> Progressing:
    order: tuple[Progressing, ...] = ("failed", "died", "stopped", "running")
    for wanted in order:
        if any(one.state == wanted for one in states):
            return wanted
    return "done" if all(one.state in ANSWERED for one in states) else "waiting"


def _row(task: Task, state: TaskState, used: float | None) -> Row:
    words, fraction = state_words(state), share(task, state, used)
    slipping = is_slipping(task, state, used)
    tip = trouble_words(state)
    if slipping:
        tip = f"Slipping: the forecast's high end was {duration(task.forecast.seconds_high)}."
    return Row(
        task=task.id,
        texts=(task.spec.rung, words, f"{fraction:.0%}", _time(task, state, used), _memory(task, state)),
        state="slipping" if slipping else state.state,
        fraction=fraction,
        tip=tip or f"{task.label}: {words}",
        spoken=f"{task.label}, {words}, {fraction:.0%}{', slipping' if slipping else ''}",
    )


def _time(task: Task, state: TaskState, used: float | None) -> str:
    known = state.state != "waiting" and used is not None
    return f"{_short(used) if known and used is not None else UNKNOWN} / {_short(task.forecast.seconds)}"


def _memory(task: Task, state: TaskState) -> str:
    forecast = memory(task.forecast.memory_mb)
    if state.result is None:
        return f"{UNKNOWN} / {forecast}"
    used = memory(state.result.memory_mb)
    same_unit = used[-2:] == forecast[-2:]
    return f"{used[:-3] if same_unit else used} / {forecast}"


def _sum_used(seen: list[tuple[Task, TaskState]], watch: Stopwatch, now: float) -> str:
    times = [watch.used(one, now) for _, one in seen if one.state != "waiting"]
    known = [time for time in times if time is not None]
    return _short(sum(known)) if known else UNKNOWN


def _short(seconds: float) -> str:
    return "< 1 s" if seconds < 1 else duration(seconds)


class TaskModel(QAbstractItemModel):
    """The branches as a Qt model; announces only the rows that differ."""

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._branches: tuple[Branch, ...] = ()

    def show(self, fresh: tuple[Branch, ...]) -> None:
        """Show these; the tree is rebuilt only where other tasks stand in it."""
        if _shape(fresh) != _shape(self._branches):
            self.beginResetModel()
            self._branches = fresh
            self.endResetModel()
            return
        before, self._branches = self._branches, fresh
        for place, (old, new) in enumerate(zip(before, fresh, strict=True)):
            if old.head != new.head:
                self._announce(QModelIndex(), place)
            for row, (was, now) in enumerate(zip(old.rows, new.rows, strict=True)):
                if was != now:
                    self._announce(self.index(place, 0), row)

    def _announce(self, parent: QModelIndex, row: int) -> None:
        self.dataChanged.emit(self.index(row, 0, parent), self.index(row, len(HEADER) - 1, parent))

    def index_of(self, task: str) -> QModelIndex:
        """Where a task stands; an invalid index where it does not."""
        for place, branch in enumerate(self._branches):
            for row, one in enumerate(branch.rows):
                if one.task == task:
                    return self.index(row, 0, self.index(place, 0))
        return QModelIndex()

    def index(self, row: int, column: int, parent: Index = QModelIndex()) -> QModelIndex:  # noqa: B008
        """The place of a cell; the internal id is 0 for a chain, else the chain's number from 1."""
        # the answers of `hasIndex`, without its two calls back into this model for every cell
        if not (0 <= row < self.rowCount(parent) and 0 <= column < len(HEADER)):
            return QModelIndex()
        return self.createIndex(row, column, parent.row() + 1 if parent.isValid() else 0)

    def parent(self, child: Index = QModelIndex()) -> QModelIndex:  # type: ignore[override]  # noqa: B008
        """The chain that a task belongs to."""
        if not child.isValid() or child.internalId() == 0:
            return QModelIndex()
        return self.createIndex(child.internalId() - 1, 0, 0)

    def rowCount(self, parent: Index = QModelIndex()) -> int:  # noqa: B008
        """Chains at the root, tasks below a chain."""
        if not parent.isValid():
            return len(self._branches)
        if parent.internalId() or parent.column():
            return 0
        return len(self._branches[parent.row()].rows)

    def columnCount(self, parent: Index = QModelIndex()) -> int:  # noqa: B008
        """Five."""
        return len(HEADER)

    def headerData(self, section: int, orientation: Qt.Orientation, role: int = 0) -> Any:
        """The names of the columns."""
        if orientation == Qt.Orientation.Horizontal and role == Qt.ItemDataRole.DisplayRole:
            return HEADER[section]
        return None

    def data(self, index: Index, role: int = Qt.ItemDataRole.DisplayRole) -> Any:
        """Text, tip, spoken text, and what the delegate draws from."""
        if role not in ROLES or not index.isValid():
            return None
        row = self._row(index)
        match role:
            case Qt.ItemDataRole.DisplayRole:
                return row.texts[index.column()]
            case Qt.ItemDataRole.ToolTipRole:
                return row.tip
            case Qt.ItemDataRole.AccessibleTextRole:
                return row.spoken if index.column() == Column.TASK else row.texts[index.column()]
            case int(value) if value == TASK_ROLE:
                return row.task
            case int(value) if value == FRACTION_ROLE:
                return row.fraction
            case int(value) if value == STATE_ROLE:
                return row.state
        return None

    def _row(self, index: Index) -> Row:
        if index.internalId() == 0:
            return self._branches[index.row()].head
        return self._branches[index.internalId() - 1].rows[index.row()]


def _shape(tree: tuple[Branch, ...]) -> tuple[tuple[str, ...], ...]:
    return tuple((branch.head.texts[0], *(row.task for row in branch.rows)) for branch in tree)
