"""What the planner decides where the recipe says auto, and how it tells the user."""

from collections.abc import Iterator

from plumbrule_core.basis_sets import Basis, find
from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.questions import BondQuestion, EnergyQuestion
from plumbrule_core.documents.recipe import Recipe
from plumbrule_core.documents.species import Species, spin_words
from plumbrule_core.planning.sizes import elements_of, frozen_of, functions_of
from plumbrule_core.rungs import RUNGS, SPACE

FITTING_FROM = 300
"""Basis functions of the largest species from which density fitting is chosen: common practice, no source."""


def sets_of(recipe: Recipe) -> tuple[Basis, ...]:
    """The basis sets of a recipe whose names are known."""
    return tuple(basis for basis in map(find, recipe.basis) if basis is not None)


def fits_density(recipe: Recipe, species: tuple[Species, ...]) -> bool:
    """Whether the integrals are fitted: one decision, so that all energies stay comparable."""
    if recipe.density_fitting != "auto":
        return recipe.density_fitting == "yes"
    return _largest(recipe, species) > FITTING_FROM and not _unfitted(recipe, species)


def _largest(recipe: Recipe, species: tuple[Species, ...]) -> int:
    return max(functions_of(one, basis) for one in species for basis in sets_of(recipe))


def _unfitted(recipe: Recipe, species: tuple[Species, ...]) -> tuple[str, ...]:
    return tuple(s for s in elements_of(species) if not all(basis.fits((s,)) for basis in sets_of(recipe)))


def notes(
    brief: Brief, species: tuple[Species, ...], rungs: tuple[str, ...], fitting: bool
) -> tuple[str, ...]:
    """The decisions in words: what was added, proposed, chosen and left out."""
    return (
        *_added(brief.recipe, rungs),
        *_assumed(species),
        *_spin_states(brief, species),
        *_fitting(brief.recipe, species, fitting),
        *_active_space(brief.recipe, species, rungs),
        *_left_out(brief, species),
    )


def _added(recipe: Recipe, rungs: tuple[str, ...]) -> Iterator[str]:
    added = [name for name in rungs if name not in recipe.rungs]
    if added:
        yield f"{', '.join(added)} was added, because the rungs that were asked for stand on it."


def _assumed(species: tuple[Species, ...]) -> Iterator[str]:
    assumed = [f"{one.name} {_spin(one)}" for one in species if one.assumption]
    if assumed:
        yield (
            f"Multiplicity was not given, so the likely ground state was assumed: {', '.join(assumed)}. "
            "State it where that is not meant."
        )


def _spin(one: Species) -> str:
    return spin_words(one.multiplicity).split(",")[0]


def _spin_states(brief: Brief, species: tuple[Species, ...]) -> Iterator[str]:
    question = brief.question
    if not isinstance(question, BondQuestion) or not question.cut or question.fragment_multiplicities:
        return
    given = {one.content for one in brief.species}
    for one in species:
        if one.content not in given:
            spin = spin_words(one.multiplicity)
            yield f"{one.name} ({one.formula}) is taken as {spin}: its proposed ground state."


def _fitting(recipe: Recipe, species: tuple[Species, ...], fitting: bool) -> Iterator[str]:
    if fitting:
        why = (
            "as the recipe asks"
            if recipe.density_fitting == "yes"
            else f"above {FITTING_FROM} basis functions"
        )
        yield f"Density fitting is used throughout, {why}; it shifts total energies by about 2e-5 hartree."
    elif recipe.density_fitting == "auto" and _largest(recipe, species) > FITTING_FROM:
        yield f"No density fitting: there is no fitting set for {', '.join(_unfitted(recipe, species))}."


def _active_space(recipe: Recipe, species: tuple[Species, ...], rungs: tuple[str, ...]) -> Iterator[str]:
    asked = recipe.active_space
    if SPACE not in rungs:
        if asked is not None and asked.choice != "none":
            yield "No rung of this recipe works in an active space, so what it says of one has no effect."
    elif len(species) > 1 and (asked is None or asked.choice == "propose"):
        yield (
            "Each species gets its own active space, as its orbitals ask for it; make them equal with "
            "choice = 'set'."
        )


def _left_out(brief: Brief, species: tuple[Species, ...]) -> Iterator[str]:
    if not isinstance(brief.question, EnergyQuestion):
        yield "The answer is an electronic energy: zero-point and thermal energies are not included."
    frozen = any(frozen_of(one, basis) for one in species for basis in sets_of(brief.recipe))
    if brief.recipe.core == "frozen" and frozen and _correlates(brief.recipe):
        yield "Core electrons are left out of the correlation treatment (frozen core)."


def _correlates(recipe: Recipe) -> bool:
    """Whether any rung correlates electrons: Hartree-Fock and functionals leave no core out."""
    known = [RUNGS[name] for name in recipe.rungs if name in RUNGS]
    return any(rung.kind == "wave function" and rung.name != "HF" for rung in known)
