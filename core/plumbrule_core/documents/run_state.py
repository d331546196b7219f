"""The state of a run, as the events tell it: a value that the fold makes and the window shows."""

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


class RunState(Document):
    """Where a plan stands; `seq` is the number of the last event folded in."""

    tasks: FrozenMap[str, TaskState] = Field(default_factory=dict)
    seq: int = -1
