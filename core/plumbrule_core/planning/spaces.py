"""The active space of a recipe: what each task is asked for, and what is wrong with that at the door."""

from collections.abc import Iterator

import numpy as np

from plumbrule_core.basis_sets import Basis
from plumbrule_core.correlation.asked import space_asked
from plumbrule_core.correlation.protocol import Problem
from plumbrule_core.correlation.solvers import choose
from plumbrule_core.correlation.solvers.dmrg import DMRG
from plumbrule_core.correlation.window import OrbitalSet
from plumbrule_core.documents.active_space import Space, SpaceRequest
from plumbrule_core.documents.faults import Fault
from plumbrule_core.documents.plan import Machine
from plumbrule_core.documents.recipe import ActiveSpace, Recipe
from plumbrule_core.documents.species import Species
from plumbrule_core.errors import PlumbruleError
from plumbrule_core.planning.decisions import sets_of
from plumbrule_core.planning.sizes import explicit_electrons, frozen_of, functions_of
from plumbrule_core.rungs import RUNGS, stands_on_space

Counts = tuple[int, int, int]
WHERE = "recipe.active_space"
PLACES = ("electrons", "orbitals", "count")


def request_of(recipe: Recipe) -> SpaceRequest:
    """How tasks that work in an active space get it; a recipe that does not speak of one has it proposed."""
    asked = recipe.active_space
    if asked is None:
        return SpaceRequest()
    places = asked if asked.choice == "set" else ActiveSpace()
    return SpaceRequest(
        choice="set" if asked.choice == "set" else "propose",
        electrons=places.electrons,
        orbitals=places.orbitals,
        count=places.count,
        solver=asked.solver,
        bond_dimension=asked.bond_dimension,
        grow=asked.grow,
    )


def active_counts(species: Species, basis: Basis, frozen: int, request: SpaceRequest | None) -> Counts | None:
    """Active orbitals, alpha and beta electrons of a space that was set; None where it is proposed."""
    if request is None or request.choice != "set":
        return None
    space = space_asked(request, _orbitals(species, basis), frozen)
    alpha = (space.electrons + species.unpaired) // 2
    return len(space.orbitals), alpha, space.electrons - alpha


def space_faults(recipe: Recipe, species: tuple[Species, ...], machine: Machine) -> Iterator[Fault]:
    """Why the recipe's active space cannot be, with the key it stands at and what would be right."""
    users = [name for name in recipe.rungs if name in RUNGS and stands_on_space(name)]
    yield from _without_a_space(recipe, users)
    unclear = list(_unclear(recipe))
    yield from unclear
    if users and not unclear:
        yield from _beyond(recipe, species, machine, users)


def _without_a_space(recipe: Recipe, users: list[str]) -> Iterator[Fault]:
    if recipe.active_space is not None and recipe.active_space.choice == "none" and users:
        says = (
            f"{', '.join(users)} cannot do without an active space; use 'propose' or 'set', or leave it out"
        )
        yield Fault(where=f"{WHERE}.choice", says=says)


def _unclear(recipe: Recipe) -> Iterator[Fault]:
    asked = recipe.active_space
    if asked is None:
        return
    given = [key for key in PLACES if getattr(asked, key) is not None]
    if asked.choice != "set":
        if given:
            says = f"{' and '.join(given)} would have no effect; use choice = 'set', or leave them out"
            yield Fault(where=f"{WHERE}.{given[0]}", says=says)
        return
    if asked.electrons is None:
        says = "a set active space needs the number of its electrons, as electrons = 6"
        yield Fault(where=f"{WHERE}.electrons", says=says)
    if (asked.orbitals is None) == (asked.count is None):
        both = "either orbitals or count is to be given, not both" if asked.count is not None else ""
        says = (
            both or "a set active space needs its orbitals, as orbitals = [5, 6], or count = 6 around the gap"
        )
        yield Fault(where=f"{WHERE}.orbitals", says=says)


def _beyond(
    recipe: Recipe, species: tuple[Species, ...], machine: Machine, users: list[str]
) -> Iterator[Fault]:
    if missing := DMRG().missing():
        if "DMRG" in users:
            yield Fault(where="recipe.rungs", says=f"DMRG cannot run here: {missing}; CASCI needs no engine")
        elif recipe.active_space is not None and recipe.active_space.solver == "DMRG":
            yield Fault(where=f"{WHERE}.solver", says=f"{missing}; use 'auto' or 'exact'")
    request = request_of(recipe)
    if request.choice == "set":
        for one in species:
            if says := next(filter(None, (_wrong(recipe, one, s, machine) for s in sets_of(recipe))), ""):
                yield Fault(where=WHERE, says=f"{one.name}: {says}")


def _wrong(recipe: Recipe, species: Species, basis: Basis, machine: Machine) -> str:
    """Why this species cannot have the space that was set; empty where it can."""
    request, frozen = request_of(recipe), frozen_of(species, basis) if recipe.core == "frozen" else 0
    try:
        space = space_asked(request, _orbitals(species, basis), frozen)
        choose(request.solver, _size(space, species), machine.memory_mb, request.bond_dimension)
    except PlumbruleError as error:
        return str(error)
    return ""


def _orbitals(species: Species, basis: Basis) -> OrbitalSet:
    """How many orbitals there are and which are filled; there are no coefficients before the run."""
    functions, electrons = functions_of(species, basis), explicit_electrons(species, basis)
    alpha = (electrons + species.unpaired) // 2
    return OrbitalSet(
        name="canonical",
        coefficients=np.zeros((0, functions)),
        energies=np.zeros(functions),
        core=0,
        alpha=alpha,
        beta=electrons - alpha,
        valence=0,
    )


def _size(space: Space, species: Species) -> Problem:
    n, alpha = len(space.orbitals), (space.electrons + species.unpaired) // 2
    return Problem(
        one=np.zeros((n, n)),
        two=np.zeros((1, 1, 1, 1)),
        alpha=alpha,
        beta=space.electrons - alpha,
        multiplicity=species.multiplicity,
    )
