"""What is wrong with a recipe for these species: every fault, with its key and what would be right."""

import difflib
from collections.abc import Iterator

from plumbrule_core.documents.faults import Fault
from plumbrule_core.documents.recipe import Recipe
from plumbrule_core.documents.species import Species, spin_words
from plumbrule_core.planning.basis_faults import basis_faults
from plumbrule_core.planning.decisions import sets_of
from plumbrule_core.planning.sizes import frozen_of
from plumbrule_core.rungs import RUNGS

LATER = (
    *("CISD", "CCSDT", "CCSDT(Q)", "CASCI", "CASSCF", "NEVPT2", "FCI", "DMRG", "TCCSD", "TCCSD(T)"),
    *("B3LYP", "PBE", "PBE0", "TPSS", "TPSSh", "M06-2X", "wB97X-V", "wB97M-V", "r2SCAN"),
)
"""Rungs that a recipe may ask for; those that RUNGS does not have are said to be not built yet."""

NOT_BUILT = "not built yet in this version"


def recipe_faults(recipe: Recipe, species: tuple[Species, ...]) -> tuple[Fault, ...]:
    """Everything that keeps this recipe from being run for these species."""
    return (
        *_rung_faults(recipe),
        *basis_faults(recipe, species),
        *_reference_faults(recipe, species),
        *_closed_shell_faults(recipe, species),
        *_later_faults(recipe),
    )


def _rung_faults(recipe: Recipe) -> Iterator[Fault]:
    for name in dict.fromkeys(recipe.rungs):
        if name not in RUNGS:
            yield Fault(where="recipe.rungs", says=_about_rung(name))


def _about_rung(name: str) -> str:
    there_is = f"there is {', '.join(RUNGS)}"
    if name in LATER:
        return f"{name} is {NOT_BUILT}; {there_is}"
    near = _spelt_like(name)
    return f"there is no rung '{name}'; {f'did you mean {near}? ' if near else ''}{there_is}"


def _spelt_like(name: str) -> str | None:
    known = {one.casefold(): one for one in (*RUNGS, *LATER)}
    found = difflib.get_close_matches(name.casefold(), list(known), n=1)
    return known[found[0]] if found else None


def _reference_faults(recipe: Recipe, species: tuple[Species, ...]) -> Iterator[Fault]:
    if recipe.reference != "RHF":
        return
    for one in species:
        if one.multiplicity > 1:
            says = (
                f"RHF pairs every electron, but {one.name} is a {spin_words(one.multiplicity)}; "
                "use reference = 'auto' or 'UHF'"
            )
            yield Fault(where="recipe.reference", says=says)


def _closed_shell_faults(recipe: Recipe, species: tuple[Species, ...]) -> Iterator[Fault]:
    """Rungs that the library has for RHF alone; three electrons or fewer have no quadruples to miss."""
    asked = [name for name in recipe.rungs if getattr(RUNGS.get(name), "closed_shells_only", False)]
    for one in species:
        open_shell = one.multiplicity > 1 or recipe.reference in ("UHF", "ROHF")
        few = any(one.electrons - 2 * frozen_of(one, basis) < 4 for basis in sets_of(recipe))
        for name in asked if open_shell and not few else ():
            says = (
                f"{name} is for closed shells on RHF only, and {one.name} would stand on an open-shell "
                "reference; take CCSDT as the top rung"
            )
            yield Fault(where="recipe.rungs", says=says)


def _later_faults(recipe: Recipe) -> Iterator[Fault]:
    if recipe.geometry is not None:
        says = f"optimising first is {NOT_BUILT}; give optimised geometries and leave [recipe.geometry] out"
        yield Fault(where="recipe.geometry", says=says)
    for key, what in (
        ("zero_point", "the zero-point energy"),
        ("counterpoise", "the counterpoise correction"),
        ("core_valence", "the correction for the correlation of the core"),
    ):
        if getattr(recipe.corrections, key) is True:
            yield Fault(where=f"recipe.corrections.{key}", says=f"{what} is {NOT_BUILT}; use 'auto' or false")
