"""A plan: the tasks that a recipe needs for a question, with a forecast for each."""

from typing import Literal

from plumbrule_core.documents.active_space import SpaceRequest
from plumbrule_core.documents.base import Document, digest_of
from plumbrule_core.documents.faults import Fault
from plumbrule_core.documents.recipe import Core, Reference, Relativity
from plumbrule_core.documents.species import Species


class Forecast(Document):
    """Predicted cost: seconds as a likely value with its range, peak memory and scratch disk in MB."""

    seconds: float
    seconds_low: float
    seconds_high: float
    memory_mb: float
    disk_mb: float = 0.0
    sure: Literal["measured before", "counted", "a guess"] = "counted"

    def plus(self, other: "Forecast") -> "Forecast":
        """Two tasks one after the other: times add, memory is the larger."""
        return Forecast(
            seconds=self.seconds + other.seconds,
            seconds_low=self.seconds_low + other.seconds_low,
            seconds_high=self.seconds_high + other.seconds_high,
            memory_mb=max(self.memory_mb, other.memory_mb),
            disk_mb=max(self.disk_mb, other.disk_mb),
            sure=self.sure if self.sure == other.sure else "counted",
        )


class Machine(Document):
    """What this computer offers; `seconds_per_gigaflop` comes from a one-second calibration."""

    cores: int
    memory_mb: float
    disk_mb: float
    seconds_per_gigaflop: float = 0.1
    start_seconds: float = 1.5
    """Seconds that a worker needs before it computes."""


class Settings(Document):
    """What a rung needs to know beside the species: one value shared by all species of a plan."""

    basis: str
    core: Core = "frozen"
    reference: Reference = "auto"
    density_fitting: bool = False
    relativity: Relativity = "none"
    scf_tolerance: float = 1e-10
    cc_tolerance: float = 1e-8
    cc_residual: float = 1e-6

    @property
    def level(self) -> str:
        """Energies may be subtracted only where this digest is equal."""
        return digest_of(self.to_data())


class TaskSpec(Document):
    """Everything that determines a task's number."""

    species: Species
    rung: str
    settings: Settings
    versions: str
    space: SpaceRequest | None = None
    """How this task gets its active space; None for rungs that need none."""

    @property
    def identity(self) -> str:
        """The same identity has the same number: the stored result is reused."""
        space = {} if self.space is None else {"space": self.space.to_data()}
        return digest_of(
            {
                "species": self.species.content,
                "rung": self.rung,
                "settings": self.settings.to_data(),
                "versions": self.versions,
                **space,
            }
        )


class Task(Document):
    """One calculation on one species: what is run, stored and carried on. `id` is the spec's identity.

    Tasks with the same `chain` (one species at one level) run in one worker, one after the other,
    and share its integrals. `needs` names the rungs of the chain that this one stands on.
    """

    id: str
    spec: TaskSpec
    needs: tuple[str, ...] = ()
    chain: str
    forecast: Forecast

    @property
    def label(self) -> str:
        """`water: CCSD(T)/cc-pVTZ`."""
        return f"{self.spec.species.name}: {self.spec.rung}/{self.spec.settings.basis}"


class Plan(Document):
    """The tasks in an order that can be run, their sum, and what forbids running them."""

    tasks: tuple[Task, ...] = ()
    faults: tuple[Fault, ...] = ()
    notes: tuple[str, ...] = ()
    """What the planner decided and the user should know: density fitting, proposed spin states."""

    @property
    def forecast(self) -> Forecast | None:
        """The whole plan, or nothing where there is no task."""
        if not self.tasks:
            return None
        total = self.tasks[0].forecast
        for task in self.tasks[1:]:
            total = total.plus(task.forecast)
        return total

    def task(self, task_id: str) -> Task:
        """The task with this identity; raises KeyError."""
        for task in self.tasks:
            if task.id == task_id:
                return task
        raise KeyError(task_id)
