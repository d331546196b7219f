"""The field's checkpoints: the finished solution, with what was measured on it."""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np

from plumbrule_core.rungs.protocol import Shelf, Stability

STILL_CONVERGED = 1e-4
"""Largest norm of the orbital gradient at which stored orbitals are taken for the finished solution."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Solved:
    """A converged field, and how it was reached."""

    iterations: int
    guess: str
    measure: str
    stability: Stability
    notes: tuple[str, ...] = ()


def keep(shelf: Shelf, mean_field: Any, solved: Solved) -> None:
    """Store the finished solution, so that a later chain verifies it in one step in place of iterating."""
    found = solved.stability
    shelf.save(
        {
            "orbitals": np.asarray(mean_field.mo_coeff),
            "orbital_energies": np.asarray(mean_field.mo_energy),
            "occupations": np.asarray(mean_field.mo_occ),
            "iterations": np.array(solved.iterations),
            "words": np.array([solved.guess, solved.measure, *solved.notes]),
            "internal": np.array(found.internal),
            "external": np.array([] if found.external is None else [found.external], dtype=bool),
            "depth": np.array([] if found.depth is None else [found.depth], dtype=float),
            "natural_occupations": np.array(found.natural_occupations or (), dtype=float),
        }
    )


def finished(stored: Mapping[str, np.ndarray], mean_field: Any) -> tuple[Solved, float] | None:
    """Put a finished solution into the field: what was found then, and the gradient norm now.

    None where the checkpoint is of an unfinished run, of another molecule or basis, or no longer a solution.
    """
    if "words" not in stored or not fits(stored, mean_field):
        return None
    orbitals, occupations = stored["orbitals"], stored["occupations"]
    density = mean_field.make_rdm1(orbitals, occupations)
    fock = mean_field.get_fock(dm=density)
    gradient = float(np.linalg.norm(mean_field.get_grad(orbitals, occupations, fock)))
    if gradient > STILL_CONVERGED:
        return None
    mean_field.mo_coeff, mean_field.mo_occ = orbitals, occupations
    mean_field.mo_energy = stored["orbital_energies"]
    mean_field.e_tot, mean_field.converged = float(mean_field.energy_tot(dm=density)), True
    guess, measure, *notes = (str(word) for word in stored["words"])
    stability = Stability(
        internal=bool(stored["internal"]),
        external=next((bool(x) for x in stored["external"]), None),
        depth=next((float(x) for x in stored["depth"]), None),
        natural_occupations=tuple(float(n) for n in stored["natural_occupations"]) or None,
    )
    return Solved(
        iterations=int(stored["iterations"]),
        guess=guess,
        measure=measure,
        stability=stability,
        notes=tuple(notes),
    ), gradient


def fits(stored: Mapping[str, np.ndarray], mean_field: Any) -> bool:
    """Whether stored orbitals belong to this basis, kind of reference and number of electrons."""
    if not {"orbitals", "occupations"} <= stored.keys():
        return False
    orbitals, occupations = stored["orbitals"], stored["occupations"]
    functions = mean_field.mol.nao
    shape = (2, functions) if mean_field.istype("UHF") else (functions,)
    return bool(
        orbitals.shape[:-1] == shape
        and occupations.shape == (*shape[:-1], orbitals.shape[-1])
        and round(float(occupations.sum())) == mean_field.mol.nelectron
    )
