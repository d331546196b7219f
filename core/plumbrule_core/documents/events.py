"""Events: what a worker says while it works, one JSON object a line.

Arrays never travel inside an event; a result names the digests of its arrays.
"""

from typing import Annotated, Literal

from pydantic import Field, TypeAdapter

from plumbrule_core.documents.base import Document, FrozenMap
from plumbrule_core.documents.results import Reading, Result, Seq

PROTOCOL = 1
MAX_LINE = 65536
"""Longest line in bytes; a longer one is a fault of the worker, not of the data."""


class EventBase(Document):
    """What every event carries: its number in the run and the task it speaks of."""

    seq: Seq
    task: str


class Hello(EventBase):
    """The first line of a worker: which protocol it speaks, with which library versions."""

    event: Literal["hello"] = "hello"
    task: str = ""
    protocol: int
    versions: FrozenMap[str, str]


class Started(EventBase):
    """A task begins; `resumed_from` says from where where it is carried on."""

    event: Literal["started"] = "started"
    resumed_from: str = ""


class Iteration(EventBase):
    """One iteration: total energy in hartree, and the residual where the method has one."""

    event: Literal["iteration"] = "iteration"
    n: int
    energy: float
    residual: float | None = None
    stage: str = ""
    """Which part of the task iterates, as `damped` or `second order`."""


class Progress(EventBase):
    """How far a task without iterations has come, from 0 to 1."""

    event: Literal["progress"] = "progress"
    fraction: Annotated[float, Field(ge=0, le=1)]
    what: str = ""


class Measured(EventBase):
    """A reading was taken."""

    event: Literal["reading"] = "reading"
    reading: Reading


class Log(EventBase):
    """A line for people."""

    event: Literal["log"] = "log"
    text: Annotated[str, Field(max_length=4000)]


class Checkpoint(EventBase):
    """What was computed so far is safe on disk."""

    event: Literal["checkpoint"] = "checkpoint"
    what: str


class Finished(EventBase):
    """A task is done; `reused` where the stored result of the same task was taken."""

    event: Literal["result"] = "result"
    result: Result
    reused: bool = False


class Failed(EventBase):
    """A task failed, and why. `died` where the worker process ended without a word."""

    event: Literal["failed"] = "failed"
    reason: str
    died: bool = False


class TaskStopped(EventBase):
    """The user stopped the task; what was checkpointed stays."""

    event: Literal["stopped"] = "stopped"


Event = Annotated[
    Hello | Started | Iteration | Progress | Measured | Log | Checkpoint | Finished | Failed | TaskStopped,
    Field(discriminator="event"),
]

_ADAPTER: TypeAdapter[Event] = TypeAdapter(Event)


def read_event(line: str | bytes) -> Event:
    """One line as an event; raises pydantic.ValidationError where it is none."""
    return _ADAPTER.validate_json(line)
