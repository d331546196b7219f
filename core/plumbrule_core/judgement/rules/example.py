"""Small cases by which a rule proves when it is quiet and when it is loud."""

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

from plumbrule_core.basis_sets import find
from plumbrule_core.documents.active_space import GrowthPoint, Space
from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.plan import Forecast, Machine, Plan, Settings, Task, TaskSpec
from plumbrule_core.documents.results import Reading, ReadingValue, Result
from plumbrule_core.documents.species import Atom, Species
from plumbrule_core.judgement.case import Case, Standing
from plumbrule_core.rungs import SPACE, stands_on_space

LADDER = ("HF", "MP2", "CCSD", "CCSD(T)")
LIGHT = Forecast(seconds=10.0, seconds_low=5.0, seconds_high=20.0, memory_mb=200.0)
MACHINE = Machine(cores=2, memory_mb=8000.0, disk_mb=50000.0)

CALM: Mapping[str, Mapping[str, bool | float]] = {
    "HF": {"stable": True, "stable_external": True},
    "MP2": {"mp2_largest_t2": 0.05},
    "CISD": {"c0_squared": 0.96},
    "CCSD": {"T1": 0.01, "largest_t2": 0.05},
    "CCSD(T)": {"triples": -0.01},
}
"""What each rung reads of a molecule without peculiarities."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Molecule:
    """One species with what was computed for it; `xyz` in angstrom, energies in hartree by rung.

    Energies without any reading are those of a molecule without peculiarities.
    """

    xyz: str = "N 0 0 0; N 0 0 1.1"
    charge: int = 0
    multiplicity: int = 1
    origin: str = "optimised with CCSD(T)/cc-pVTZ"
    energies: Mapping[str, float] = field(default_factory=dict)
    readings: Mapping[str, ReadingValue] = field(default_factory=dict)
    notes: tuple[str, ...] = ()
    """Of Hartree-Fock, or of the rung that finds the active space where the example has it."""
    converged: bool = True
    space: Space | None = None
    growth: tuple[GrowthPoint, ...] = ()

    def species(self, name: str) -> Species:
        """The species, named."""
        rows = [line.split() for line in self.xyz.split(";")]
        atoms = tuple(Atom(symbol=s, x=float(x), y=float(y), z=float(z)) for s, x, y, z in rows)
        return Species(
            name=name, atoms=atoms, charge=self.charge, multiplicity=self.multiplicity, origin=self.origin
        )


@dataclass(frozen=True, slots=True, kw_only=True)
class Example:
    """A brief with its results. Without a question it asks for the energy of the first species."""

    molecules: Mapping[str, Molecule] = field(default_factory=lambda: {"n2": Molecule()})
    question: Mapping[str, Any] = field(default_factory=dict)
    recipe: Mapping[str, Any] = field(default_factory=dict)
    forecast: Forecast = LIGHT
    standing: Standing | None = None
    failed: Mapping[str, str] = field(default_factory=dict)
    """Rungs of every molecule that failed, each with the reason."""


def measured(**readings: ReadingValue) -> Example:
    """A nitrogen molecule with these readings."""
    return Example(molecules={"n2": Molecule(readings=readings)})


def case_of(example: Example) -> Case:
    """The case that a rule sees."""
    species = [one.species(name) for name, one in example.molecules.items()]
    question: dict[str, Any] = {"kind": "energy", "within": 4.0, **example.question}
    if question["kind"] == "energy":
        question["species"] = species[0].name
    recipe: dict[str, Any] = {"basis": ["cc-pVTZ"], "rungs": list(LADDER), **example.recipe}
    brief = Brief.from_data(
        {
            "question": question,
            "species": [one.to_data() for one in species],
            "recipe": recipe,
        }
    )
    tasks = tuple(
        _task(one, rung, Settings(basis=_known(basis), core=brief.recipe.core), example.forecast)
        for basis in brief.recipe.basis
        for one in _needed(brief)
        for rung in brief.recipe.rungs
    )
    results = {task.id: _result(task, found) for task in tasks if (found := _molecule(task, example))}
    failed = {task.id: why for task in tasks if (why := example.failed.get(task.spec.rung))}
    kept = {key: result for key, result in results.items() if key not in failed}
    return Case(brief, Plan(tasks=tasks), kept, MACHINE, example.standing, failed)


def _known(name: str) -> str:
    basis = find(name)
    return basis.name if basis else name


def _needed(brief: Brief) -> tuple[Species, ...]:
    if brief.question is None or brief.faults():
        return brief.species
    parts = brief.question.parts(brief.by_name)
    return tuple({part.species.content: part.species for part in parts}.values())


def _task(species: Species, rung: str, settings: Settings, forecast: Forecast) -> Task:
    spec = TaskSpec(species=species, rung=rung, settings=settings, versions="example")
    return Task(id=spec.identity, spec=spec, chain=f"{species.name} {settings.basis}", forecast=forecast)


def _molecule(task: Task, example: Example) -> Molecule | None:
    found = example.molecules.get(task.spec.species.name)
    if found is None or (not found.energies and not found.readings):
        return None
    return found if not found.energies or task.spec.rung in found.energies else None


def _result(task: Task, found: Molecule) -> Result:
    rung = task.spec.rung
    calm = CALM.get(rung, {}) if found.energies and not found.readings else {}
    return Result(
        task=task.id,
        species=task.spec.species.name,
        rung=rung,
        basis=task.spec.settings.basis,
        level=task.spec.settings.level,
        energy=found.energies.get(rung, -100.0),
        converged=found.converged or rung == "HF",
        seconds=1.0,
        memory_mb=100.0,
        reference="RHF" if found.multiplicity == 1 else "UHF",
        readings=tuple(Reading(name=name, value=value) for name, value in {**calm, **found.readings}.items()),
        notes=found.notes if rung == (SPACE if found.space else "HF") else (),
        space=found.space if stands_on_space(rung) else None,
        growth=found.growth if stands_on_space(rung) else (),
    )
