"""What a family of readings is: measured after one rung, from what that rung left on the bench."""

from collections.abc import Callable
from dataclasses import dataclass

from plumbrule_core.documents.plan import TaskSpec
from plumbrule_core.documents.results import Reading
from plumbrule_core.rungs.protocol import Bench


@dataclass(frozen=True, slots=True)
class Family:
    """One family: the rung it follows, the names it may yield, its sources, and how it measures."""

    after: str
    names: tuple[str, ...]
    citation: str
    measure: Callable[[Bench, TaskSpec], tuple[Reading, ...]]
