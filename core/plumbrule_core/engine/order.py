"""What a worker is told to do: the tasks of one chain, and where its files are."""

import re
from collections.abc import Iterator
from pathlib import Path
from typing import Annotated

from pydantic import Field, field_validator

from plumbrule_core.documents.base import Document
from plumbrule_core.documents.plan import Task

MAX_ORDER = 1 << 26
"""Longest order in bytes; a chain of the largest molecules stays far below it."""

_FILE_NAME = re.compile(r"[A-Za-z0-9_-]{1,80}")


class Order(Document):
    """The tasks of one chain in the order they are run; `known` are answered already.

    A known task is computed again, silently and from its checkpoint, where a later one needs it.
    An order without tasks only loads the library: it warms the disk and shows how long a start takes.
    """

    tasks: tuple[Task, ...] = ()
    known: tuple[str, ...] = ()
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
