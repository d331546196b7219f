"""How far a run has come and how long it will take, from the plan's forecasts and what was seen so far."""

from dataclasses import dataclass

from plumbrule_core.documents.plan import Plan, Task
from plumbrule_core.documents.run_state import Progressing, RunState, TaskState
from plumbrule_desktop.state.wording import duration

ENDED: frozenset[Progressing] = frozenset({"done", "reused", "failed", "died", "stopped"})
ANSWERED: frozenset[Progressing] = frozenset({"done", "reused"})
TROUBLED: frozenset[Progressing] = frozenset({"failed", "died", "stopped"})
GRACE = 3.0
"""Seconds that a task may take in any case before it is called late."""
ALMOST = 0.97
"""A running task that has used up its forecast is shown this far, never as finished."""


def left_of(plan: Plan, state: RunState) -> Plan:
    """The tasks of a plan that Run would compute: not answered yet, not converged or not checked."""
    over = {key: task.result for key, task in state.tasks.items() if task.state in ANSWERED}
    answered = {key for key, result in over.items() if result is None or result.settled}
    return Plan(tasks=tuple(task for task in plan.tasks if task.id not in answered))


class Stopwatch:
    """When each task was first seen running and when it ended, in seconds of a clock that never goes back."""

    def __init__(self) -> None:
        self._begun: dict[str, float] = {}
        self._ended: dict[str, float] = {}
        self._run: tuple[float, float | None] | None = None

    def follow(self, state: RunState, running: bool, now: float) -> None:
        """Note what began or ended since the last look."""
        if running and (self._run is None or self._run[1] is not None):
            self._run = (now, None)
            self._begun, self._ended = {}, {}
        elif not running and self._run is not None and self._run[1] is None:
            self._run = (self._run[0], now)
        for key, task in state.tasks.items():
            if task.state == "running":
                self._begun.setdefault(key, now)
            elif key in self._begun:
                self._ended.setdefault(key, now)

    def forget(self) -> None:
        """Another question is shown."""
        self._begun, self._ended, self._run = {}, {}, None

    def used(self, task: TaskState, now: float) -> float | None:
        """Seconds that a task took or has taken so far; None where nobody watched."""
        if task.result is not None and task.state in ANSWERED:
            return task.result.seconds
        begun = self._begun.get(task.task)
        return None if begun is None else self._ended.get(task.task, now) - begun

    def run_used(self, now: float) -> float | None:
        """Seconds since the run began, or that it took."""
        if self._run is None:
            return None
        begun, ended = self._run
        return (now if ended is None else ended) - begun


def share(task: Task, state: TaskState, used: float | None) -> float:
    """How far a task has come, 0 to 1: as it says itself, else by its time against the forecast."""
    if state.state in ANSWERED:
        return 1.0
    if state.fraction > 0 or used is None:
        return min(state.fraction, ALMOST)
    return min(used / max(task.forecast.seconds, 0.1), ALMOST)


def is_slipping(task: Task, state: TaskState, used: float | None) -> bool:
    """Whether a running task has gone beyond the high end of its forecast; a few seconds are no matter."""
    return state.state == "running" and used is not None and used > max(task.forecast.seconds_high, GRACE)


@dataclass(frozen=True, slots=True)
class Overall:
    """The whole run at one moment; times in seconds."""

    answered: int
    tasks: int
    troubled: int
    fraction: float
    used: float | None
    left: float
    slipping: bool
    running: bool

    @property
    def words(self) -> str:
        """`4 of 9 tasks done, 2 min so far, about 5 min left`."""
        parts = [f"{self.answered} of {self.tasks} {'task' if self.tasks == 1 else 'tasks'} done"]
        if self.troubled:
            parts.append(f"{self.troubled} not finished")
        if self.running and self.used is not None:
            parts.append(f"{duration(self.used)} so far")
            parts.append(self._left_words)
            parts.extend(["slipping beyond the forecast"] if self.slipping else [])
        elif self.used is not None and self.answered == self.tasks:
            parts.append(f"took {duration(self.used)}")
        return ", ".join(parts)

    @property
    def _left_words(self) -> str:
        return f"about {duration(self.left)} left" if self.left >= 1 else "almost there"


def overall(plan: Plan, state: RunState, watch: Stopwatch, now: float, running: bool) -> Overall:
    """The run as a whole; what is left is scaled by how the finished tasks compare with their forecasts."""
    seen = [(task, state.tasks.get(task.id) or TaskState(task=task.id)) for task in plan.tasks]
    taken = [(task, one, watch.used(one, now)) for task, one in seen]
    pace = _pace(taken)
    weight = sum(task.forecast.seconds for task in plan.tasks) or 1.0
    come = sum(task.forecast.seconds * share(task, one, used) for task, one, used in taken)
    left = pace * sum(_left(task, one, used) for task, one, used in taken)
    used_up = watch.run_used(now)
    high = sum(task.forecast.seconds_high for task, one in seen if one.state != "reused")
    late = used_up is not None and used_up + left > max(high, GRACE)
    return Overall(
        answered=sum(one.state in ANSWERED for _, one in seen),
        tasks=len(seen),
        troubled=sum(one.state in TROUBLED for _, one in seen),
        fraction=come / weight,
        used=used_up,
        left=left,
        slipping=running and late,
        running=running,
    )


def _left(task: Task, state: TaskState, used: float | None) -> float:
    if state.state in ENDED:
        return 0.0
    return task.forecast.seconds * (1.0 - share(task, state, used))


def _pace(taken: list[tuple[Task, TaskState, float | None]]) -> float:
    done = [
        (task.forecast.seconds, used) for task, one, used in taken if one.state == "done" and used is not None
    ]
    forecast, real = sum(pair[0] for pair in done), sum(pair[1] for pair in done)
    return min(max(real / forecast, 0.2), 5.0) if forecast > 1.0 else 1.0
