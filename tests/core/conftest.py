"""What the tests of rungs and readings share: a shelf in memory, an ear that can say stop, a way to climb."""

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

import numpy as np
import pytest

from plumbrule_core.documents.plan import Settings, TaskSpec
from plumbrule_core.documents.species import Atom, Species
from plumbrule_core.errors import Stopped
from plumbrule_core.judgement.readings import take
from plumbrule_core.rungs import RUNGS
from plumbrule_core.rungs.protocol import Bench, Given, Outcome


class MemoryShelf:
    """Keeps copies, as a file would."""

    def __init__(self) -> None:
        self.kept: dict[str, np.ndarray] | None = None
        self.saves = 0

    def load(self) -> Mapping[str, np.ndarray] | None:
        return None if self.kept is None else {name: array.copy() for name, array in self.kept.items()}

    def save(self, arrays: Mapping[str, np.ndarray]) -> None:
        self.kept = {name: np.array(array) for name, array in arrays.items()}
        self.saves += 1


@dataclass
class Ear:
    """Hears what a rung tells, and says stop at the iteration it was told to."""

    stop_at: int | None = None
    stop_stage: str = ""
    iterations: list[tuple[int, float, float | None, str]] = field(default_factory=list)
    progressed: list[float] = field(default_factory=list)
    notes: list[str] = field(default_factory=list)

    def iteration(self, n: int, energy: float, residual: float | None = None, stage: str = "") -> None:
        self.iterations.append((n, energy, residual, stage))
        if self.stop_at is not None and n >= self.stop_at and stage.startswith(self.stop_stage):
            raise Stopped

    def progress(self, fraction: float, what: str = "") -> None:
        self.progressed.append(fraction)

    def note(self, text: str) -> None:
        self.notes.append(text)

    def checkpoint(self, what: str) -> None:
        pass

    @property
    def stages(self) -> list[str]:
        return list(dict.fromkeys(stage for *_, stage in self.iterations))


@dataclass
class Climb:
    """One chain: a bench, a shelf for each rung, what came out and what was heard."""

    bench: Bench = field(default_factory=Bench)
    shelves: dict[str, MemoryShelf] = field(default_factory=dict)
    outcomes: dict[str, Outcome] = field(default_factory=dict)
    ears: dict[str, Ear] = field(default_factory=dict)
    readings: dict[str, Any] = field(default_factory=dict)
    """By name, over all rungs."""

    def energy(self, rung: str) -> float:
        return self.outcomes[rung].energy


def task(xyz: str, rung: str, **options: Any) -> TaskSpec:
    """A task on atom lines in angstrom, parted by line ends or semicolons."""
    rows = [line.split() for line in xyz.replace(";", "\n").strip().splitlines()]
    atoms = tuple(Atom(symbol=s, x=float(x), y=float(y), z=float(z)) for s, x, y, z in rows)
    charge, multiplicity = options.pop("charge", 0), options.pop("multiplicity", 1)
    space = options.pop("space", None)
    species = Species(name="sample", atoms=atoms, charge=charge, multiplicity=multiplicity)
    settings = Settings(**{"basis": "cc-pVDZ", **options})
    return TaskSpec(species=species, rung=rung, settings=settings, versions="test", space=space)


def with_needs(*rungs: str) -> list[str]:
    """These rungs and all that they stand on, in order."""
    found: list[str] = []
    for rung in rungs:
        found += [*with_needs(*RUNGS[rung].needs), rung]
    return list(dict.fromkeys(found))


@pytest.fixture
def climb():
    """Compute rungs of one chain: `climb(xyz, "CCSD", basis=...)`; carry on by giving `on` a former climb."""

    def run(
        xyz: str,
        *rungs: str,
        on: Climb | None = None,
        ears: Mapping[str, Ear] | None = None,
        memory_mb: float = 2000,
        **options: Any,
    ) -> Climb:
        climbed = Climb(shelves=on.shelves if on else {})
        for rung in with_needs(*rungs):
            _compute(climbed, task(xyz, rung, **options), (ears or {}).get(rung, Ear()), memory_mb)
        return climbed

    return run


def _compute(climbed: Climb, spec: TaskSpec, ear: Ear, memory_mb: float) -> None:
    climbed.ears[spec.rung] = ear
    shelf = climbed.shelves.setdefault(spec.rung, MemoryShelf())
    given = Given(spec=spec, bench=climbed.bench, shelf=shelf, threads=1, memory_mb=memory_mb)
    outcome = RUNGS[spec.rung].compute(given, ear)
    climbed.outcomes[spec.rung] = climbed.bench.outcomes[spec.rung] = outcome
    climbed.readings.update({reading.name: reading.value for reading in take(spec.rung, climbed.bench, spec)})


@pytest.fixture
def ear() -> type[Ear]:
    """The class of ears, to make one that says stop."""
    return Ear


@pytest.fixture
def make_task() -> Any:
    """`make_task(xyz, rung, **settings)`."""
    return task
