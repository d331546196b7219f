"""From a brief to a plan: which tasks answer the question, in which order, at what price."""

from collections.abc import Mapping
from dataclasses import replace
from importlib import metadata
from platform import python_version

from plumbrule_core import __version__
from plumbrule_core.basis_sets import BASES
from plumbrule_core.documents.base import digest_of
from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.plan import Machine, Plan, Settings, Task, TaskSpec
from plumbrule_core.documents.questions import QuestionBase
from plumbrule_core.documents.recipe import Recipe
from plumbrule_core.documents.species import Species
from plumbrule_core.planning.decisions import fits_density, notes, sets_of
from plumbrule_core.planning.recipe_faults import recipe_faults
from plumbrule_core.planning.sizes import size_of, tables_of
from plumbrule_core.planning.solutions import standing, unmixed
from plumbrule_core.planning.spaces import active_counts, request_of, space_faults
from plumbrule_core.rungs import RUNGS, stands_on_space
from plumbrule_core.rungs.protocol import Size

__all__ = [
    "closed",
    "make_plan",
    "needed_species",
    "recipe_faults",
    "standing",
    "unmixed",
    "versions",
    "versions_that_matter",
]

RUNGS_VERSION = 2
"""Raised whenever a rung's numbers change, so that stored results of older rungs are not reused."""
READINGS_VERSION = 1
"""Raised whenever a reading changes, so that results that were read by older code are computed again."""

LIBRARIES = ("pyscf", "numpy", "scipy", "h5py", "rdkit", "pydantic")


def versions() -> Mapping[str, str]:
    """What computes, by name and version; imports none of it."""
    found = {"plumbrule": __version__, "python": python_version()}
    return found | {name: _version(name) for name in LIBRARIES}


def _version(name: str) -> str:
    try:
        return metadata.version(name)
    except metadata.PackageNotFoundError:
        return "not installed"


def versions_that_matter() -> str:
    """The versions that every number depends on, as a task's identity holds them."""
    return f"plumbrule rungs {RUNGS_VERSION}, readings {READINGS_VERSION}, pyscf {_version('pyscf')}"


def make_plan(brief: Brief, machine: Machine) -> Plan:
    """The tasks of a brief with their forecasts; where it cannot run, all of its faults instead."""
    asked = brief.faults()
    species = needed_species(brief) if not asked else brief.species
    faults = asked + recipe_faults(brief.recipe, species)
    faults += tuple(space_faults(brief.recipe, species if not faults else (), machine))
    if faults or brief.question is None:
        return Plan(faults=faults)
    fitting = fits_density(brief.recipe, species)
    rungs = closed(brief.recipe.rungs)
    tasks = tuple(
        _task(one, rung, _settings(brief.recipe, basis.name, fitting), brief.recipe, machine)
        for basis in sets_of(brief.recipe)
        for one in species
        for rung in rungs
    )
    return Plan(tasks=tasks, notes=notes(brief, species, rungs, fitting))


def needed_species(brief: Brief) -> tuple[Species, ...]:
    """The species that the question's sum stands on, each content once; call only where nothing is wrong."""
    question: QuestionBase | None = brief.question
    parts = question.parts(brief.by_name) if question is not None else ()
    return tuple({part.species.content: part.species for part in reversed(parts)}.values())[::-1]


def closed(rungs: tuple[str, ...]) -> tuple[str, ...]:
    """The rungs with all that they need, what is needed first; no rung twice."""
    ordered: list[str] = []

    def add(name: str) -> None:
        for need in RUNGS[name].needs:
            add(need)
        if name not in ordered:
            ordered.append(name)

    for name in rungs:
        add(name)
    return tuple(ordered)


def _settings(recipe: Recipe, basis: str, fitting: bool) -> Settings:
    return Settings(
        basis=basis,
        core=recipe.core,
        reference=recipe.reference,
        density_fitting=fitting,
        relativity=recipe.relativity,
    )


def _task(species: Species, rung: str, settings: Settings, recipe: Recipe, machine: Machine) -> Task:
    versions = f"{versions_that_matter()}, tables {tables_of(species, settings)}"
    space = request_of(recipe) if stands_on_space(rung) else None
    spec = TaskSpec(species=species, rung=rung, settings=settings, versions=versions, space=space)
    return Task(
        id=spec.identity,
        spec=spec,
        needs=tuple(need for need in closed((rung,)) if need != rung),
        chain=digest_of([species.content, settings.to_data()]),
        forecast=RUNGS[rung].forecast(_size(spec), machine),
    )


def _size(spec: TaskSpec) -> Size:
    size = size_of(spec.species, spec.settings)
    return replace(
        size, active=active_counts(spec.species, BASES[spec.settings.basis], size.frozen, spec.space)
    )
