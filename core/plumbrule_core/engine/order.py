"""What a worker is told to do: the tasks of one chain, and where its files are."""

import re
from collections.abc import Collection, Iterator, Mapping
from pathlib import Path
from types import MappingProxyType
from typing import Annotated

from pydantic import Field, field_validator

from plumbrule_core.documents.base import Document, FrozenMap
from plumbrule_core.documents.plan import Task
from plumbrule_core.documents.results import Result

MAX_ORDER = 1 << 26
"""Longest order in bytes; a chain of the largest molecules stays far below it."""

_FILE_NAME = re.compile(r"[A-Za-z0-9_-]{1,80}")


def because_of(failed: Task) -> str:
    """Why a task that stands on a failed one was not run."""
    return f"not run because {failed.label} failed"


class Known(Document):
    """What an earlier run found for a task, in hartree, and what the rungs below had then."""

    energy: float
    stands_on: FrozenMap[str, float] = Field(default_factory=dict)

    @classmethod
    def of(cls, result: Result) -> "Known":
        """What a worker must know of a stored result."""
        return cls(energy=result.energy, stands_on=result.stands_on)


class Order(Document):
    """The tasks of one chain in the order they are run; `known` are answered already, by their ids.

    A known task is computed again, silently and from its checkpoint, where a later one needs it. Where it
    ends elsewhere than before, it is told anew, and so is what stands on it.
    An order without tasks only loads the library: it warms the disk and shows how long a start takes.
    """

    tasks: tuple[Task, ...] = ()
    known: FrozenMap[str, Known] = Field(default_factory=dict)
    threads: Annotated[int, Field(ge=1, le=1024)] = 1
    memory_mb: Annotated[float, Field(gt=0)] = 2000.0
    shelf: str
    """Folder of the checkpoints and of the workers' logs."""
    blobs: str
    """Folder of the results' arrays."""

    @field_validator("tasks")
    @classmethod
    def _ids_name_files(cls, tasks: tuple[Task, ...]) -> tuple[Task, ...]:
        for task in tasks:
            if not _FILE_NAME.fullmatch(task.id):
                raise ValueError(f"the task id '{task.id}' must be letters and digits, as it names a file")
        return tasks

    @property
    def open_tasks(self) -> tuple[Task, ...]:
        """The tasks that are to be answered."""
        return tuple(task for task in self.tasks if task.id not in self.known)

    @property
    def log_file(self) -> Path:
        """Where everything goes that is no event: tracebacks and what libraries print."""
        return Path(self.shelf) / f"{self.digest}.log"

    def needs(self, task: Task) -> Iterator[Task]:
        """The tasks of this chain that one task stands on, in the order they are run."""
        return (other for other in self.tasks if other.spec.rung in task.needs)

    def without(self, lost: Collection[str], found: Mapping[str, Known]) -> "Order":
        """The order again with what was found meanwhile, less the tasks that are lost and all upon them."""
        gone = set(lost) | {task.id for task in self.upon(lost)}
        return self.model_copy(
            update={
                "tasks": tuple(task for task in self.tasks if task.id not in gone),
                "known": MappingProxyType({**self.known, **found}),
            }
        )

    def upon(self, lost: Collection[str]) -> tuple[Task, ...]:
        """The tasks that stand on these, directly or not."""
        gone, found = set(lost), []
        for task in self.tasks:
            if task.id not in gone and any(need.id in gone for need in self.needs(task)):
                gone.add(task.id)
                found.append(task)
        return tuple(found)
