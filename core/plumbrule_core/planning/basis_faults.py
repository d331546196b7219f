"""What is wrong with a basis for these species, and which one would be right."""

from collections.abc import Iterator

from plumbrule_core.basis_sets import Basis, find, nearest
from plumbrule_core.documents.faults import Fault
from plumbrule_core.documents.recipe import Recipe
from plumbrule_core.documents.species import Species
from plumbrule_core.planning.sizes import elements_of, explicit_electrons, frozen_of, functions_of
from plumbrule_core.rungs import RUNGS

Many = tuple[Species, ...]


def basis_faults(recipe: Recipe, species: Many) -> Iterator[Fault]:
    """Unknown sets, missing elements, pairs that do not extrapolate, a core that the set cannot describe."""
    sets: list[Basis] = []
    for name in recipe.basis:
        basis = find(name)
        if basis is None:
            yield Fault(where="recipe.basis", says=_unknown(name, species))
        elif basis.missing(elements_of(species)):
            yield Fault(where="recipe.basis", says=_uncovered(basis, species))
        else:
            sets.append(basis)
            yield from _one_basis(basis, recipe, species)
    if len(sets) == 2:
        yield from _pair(*sets)


def _names(sets: tuple[Basis, ...]) -> str:
    return " or ".join(basis.name for basis in sets)


def _unknown(name: str, species: Many) -> str:
    near = _names(nearest(name, elements_of(species), limit=2))
    return f"there is no basis set '{name}' here{f'; the nearest is {near}' if near else ''}"


def _uncovered(basis: Basis, species: Many) -> str:
    near = _names(nearest(basis.name, elements_of(species), limit=1))
    right = (
        f"the nearest set that has all elements of the question is {near}"
        if near
        else "no set has all of them"
    )
    return f"{basis.name} has no functions for {', '.join(basis.missing(elements_of(species)))}; {right}"


def _one_basis(basis: Basis, recipe: Recipe, species: Many) -> Iterator[Fault]:
    yield from _too_small(basis, species)
    yield from _core(basis, recipe, species)
    yield from _relativity(basis, recipe, species)
    yield from _fitting(basis, recipe, species)


def _too_small(basis: Basis, species: Many) -> Iterator[Fault]:
    for one in species:
        occupied = (explicit_electrons(one, basis) + one.unpaired) // 2
        functions = functions_of(one, basis)
        if occupied > functions:
            says = (
                f"{basis.name} gives {one.name} {functions} orbitals, too few for the {occupied} it must fill"
            )
            yield Fault(where="recipe.basis", says=says)


def _core(basis: Basis, recipe: Recipe, species: Many) -> Iterator[Fault]:
    if recipe.core == "frozen" or basis.core_valence or not _correlates(recipe):
        return
    cored = [one.name for one in species if frozen_of(one, basis)]
    if cored:
        partner = f", or basis = '{basis.core_partner}'" if basis.core_partner else ""
        says = (
            f"'all' would correlate the core electrons of {', '.join(cored)}, but {basis.name} is made for "
            f"the valence alone and would describe them badly; use core = 'frozen'{partner}"
        )
        yield Fault(where="recipe.core", says=says)


def _correlates(recipe: Recipe) -> bool:
    return any(
        name in RUNGS and RUNGS[name].kind == "wave function" and name != "HF" for name in recipe.rungs
    )


def _relativity(basis: Basis, recipe: Recipe, species: Many) -> Iterator[Fault]:
    if basis.relativistic and recipe.relativity == "none":
        says = (
            f"{basis.name} is contracted for relativistic work; use relativity = 'X2C' or another basis set"
        )
        yield Fault(where="recipe.relativity", says=says)
    replaced = [symbol for symbol in elements_of(species) if basis.potential_electrons(symbol)]
    if recipe.relativity == "X2C" and replaced:
        says = (
            f"X2C needs every electron, but {basis.name} replaces the core of {', '.join(replaced)} by a "
            "potential that already holds the relativistic effects; use 'none' or a set without one"
        )
        yield Fault(where="recipe.relativity", says=says)


def _fitting(basis: Basis, recipe: Recipe, species: Many) -> Iterator[Fault]:
    lacking = [symbol for symbol in elements_of(species) if not basis.fits((symbol,))]
    if recipe.density_fitting == "yes" and lacking:
        says = (
            f"{basis.name} has no fitting set for {', '.join(lacking)}; use density_fitting = 'no' or 'auto'"
        )
        yield Fault(where="recipe.density_fitting", says=says)


def _pair(small: Basis, large: Basis) -> Iterator[Fault]:
    if small.cardinal is not None and large.cardinal is not None and small.larger == large.name:
        return
    if small.cardinal is None:
        right = f"{small.name} belongs to no family that extrapolates"
    elif small.larger is None:
        right = f"{small.name} has no larger neighbour"
    else:
        right = f"with {small.name} goes {small.larger}"
    says = (
        f"{small.name} and {large.name} cannot be extrapolated: a pair must be two neighbours of one "
        f"family, the smaller first; {right}"
    )
    yield Fault(where="recipe.basis", says=says)
