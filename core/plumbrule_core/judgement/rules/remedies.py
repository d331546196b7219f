"""The actions that findings offer. Every remedy with edits leads to something that is built."""

from collections.abc import Iterable
from itertools import islice
from typing import Any

from plumbrule_core.basis_sets import BASES, Basis, nearest
from plumbrule_core.documents.findings import Edit, Remedy
from plumbrule_core.judgement.case import Case
from plumbrule_core.rungs import RUNGS

ACTIVE_SPACE_RUNGS = ("NEVPT2", "TCCSD(T)")
"""The rungs that describe more than one determinant; what they stand on comes by itself."""


def change(label: str, path: str, value: Any, then_run: bool = False) -> Remedy:
    """One edit of the brief."""
    return Remedy(label=label, edits=(Edit(path=path, value=value),), then_run=then_run)


def advice(label: str) -> Remedy:
    """Something that the program cannot do for the user."""
    return Remedy(label=label)


def add_rungs(case: Case, wanted: Iterable[str], label: str) -> tuple[Remedy, ...]:
    """Add those rungs that are built and not yet asked for; nothing where there is none."""
    new = [name for name in wanted if name in RUNGS and name not in case.recipe.rungs]
    if not new:
        return ()
    return (change(label, "recipe.rungs", [*case.recipe.rungs, *new], then_run=True),)


def active_space(case: Case) -> tuple[Remedy, ...]:
    """More than one determinant: the rungs for it, and a recipe that lets them have a space."""
    new = [name for name in ACTIVE_SPACE_RUNGS if name not in case.recipe.rungs]
    asked = case.recipe.active_space
    allowed = (Edit(path="recipe.active_space", value=None),) if asked and asked.choice == "none" else ()
    label = f"Add an active space, {' and '.join(new)}, and run"
    return tuple(
        one.model_copy(update={"edits": (*one.edits, *allowed)}) for one in add_rungs(case, new, label)
    )


def larger_basis(case: Case) -> tuple[Remedy, ...]:
    """The next basis set up: a pair to extrapolate where the family has one, else the next one alone."""
    largest = case.largest
    if largest is None or largest.zeta >= 5:
        return ()
    if largest.cardinal is None:
        return _first_covering(
            case, ("cc-pVTZ", "def2-TZVPP") if largest.zeta < 3 else ("cc-pVQZ", "def2-QZVPP")
        )
    if largest.larger is None or BASES[largest.larger].missing(_symbols(case)):
        return ()
    if largest.cardinal >= 3:
        label = f"Extrapolate from {largest.name} and {largest.larger} and run"
        return (change(label, "recipe.basis", [largest.name, largest.larger], then_run=True),)
    return (_take(BASES[largest.larger]),)


def _first_covering(case: Case, names: Iterable[str]) -> tuple[Remedy, ...]:
    fitting = (BASES[name] for name in names if not BASES[name].missing(_symbols(case)))
    return tuple(_take(basis) for basis in islice(fitting, 1))


def _take(basis: Basis) -> Remedy:
    return change(f"Use {basis.name} and run", "recipe.basis", [basis.name], then_run=True)


def _symbols(case: Case) -> tuple[str, ...]:
    return tuple(dict.fromkeys(atom.symbol for one in case.species for atom in one.atoms))


def with_diffuse(case: Case) -> tuple[Remedy, ...]:
    """Every basis of the recipe exchanged for its partner with diffuse functions, where all have one."""
    partners = [basis.diffuse_partner for basis in case.bases]
    names = [name for name in partners if name is not None]
    if not names or len(names) != len(partners):
        return (advice("Choose a basis set with diffuse functions, such as aug-cc-pVTZ"),)
    return (change(f"Use {' and '.join(names)} and run", "recipe.basis", names, then_run=True),)


def covering(case: Case) -> tuple[Remedy, ...]:
    """The nearest sets that have every element of the question."""
    if not case.recipe.basis:
        return ()
    found = nearest(case.recipe.basis[-1], _symbols(case), limit=2)
    return tuple(change(f"Use {basis.name}", "recipe.basis", [basis.name]) for basis in found)


def restricted_open_shell(case: Case) -> tuple[Remedy, ...]:
    """The same recipe on a spin-clean reference."""
    if case.recipe.reference == "ROHF":
        return ()
    return (change("Repeat with a restricted open-shell reference (ROHF)", "recipe.reference", "ROHF", True),)


def spin_state(case: Case, name: str, multiplicity: int, label: str) -> tuple[Remedy, ...]:
    """Another multiplicity for a species that the user can change; nothing for a fragment made by a cut."""
    if name not in case.brief.by_name:
        return (advice(f"{label}: give the fragment as a species of its own"),)
    return (change(label, f"species.{name}.multiplicity", multiplicity),)
