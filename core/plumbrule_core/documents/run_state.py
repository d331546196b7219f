"""The state of a run, as the events tell it: a value that the fold makes and the window shows."""

from collections.abc import Mapping
from typing import Literal

from pydantic import Field

from plumbrule_core.documents.base import Document, FrozenMap
from plumbrule_core.documents.results import Reading, Result

Progressing = Literal["waiting", "running", "done", "reused", "failed", "died", "stopped"]
TracePoint = tuple[int, float, float | None]
"""Iteration number, total energy in hartree, residual."""


class TaskState(Document):
    """Where one task stands."""

    task: str
    state: Progressing = "waiting"
    fraction: float = 0.0
    what: str = ""
    trace: tuple[TracePoint, ...] = ()
    log: tuple[str, ...] = ()
    readings: tuple[Reading, ...] = ()
    resumed_from: str = ""
    reason: str = ""
    result: Result | None = None

    @property
    def waiting(self) -> "TaskState":
        """The task as one that has yet to be told of, with the trace and the log of its last time."""
        return TaskState(task=self.task, trace=self.trace, log=self.log)


class RunState(Document):
    """Where a plan stands; `seq` is the number of the last event folded in."""

    tasks: FrozenMap[str, TaskState] = Field(default_factory=dict)
    seq: int = -1

    @property
    def failed(self) -> Mapping[str, str]:
        """The tasks that failed or died and are not under way again, with the reasons."""
        return {key: task.reason for key, task in self.tasks.items() if task.state in ("failed", "died")}
