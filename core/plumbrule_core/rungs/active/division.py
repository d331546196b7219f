"""How an active space divides the orbitals: inactive, active, virtual; checked before anything runs."""

from dataclasses import dataclass
from typing import Any

import numpy as np

from plumbrule_core.correlation.integrals import problem_from
from plumbrule_core.correlation.protocol import Problem
from plumbrule_core.documents.active_space import Space
from plumbrule_core.errors import PlumbruleError
from plumbrule_core.rungs.correlated.reference import fitting_of
from plumbrule_core.rungs.protocol import Bench, Given


@dataclass(frozen=True, slots=True, kw_only=True)
class Division:
    """`coefficients` (functions, orbitals): inactive orbitals first, then active, then virtual ones."""

    space: Space
    coefficients: np.ndarray
    inactive: int
    electrons: tuple[int, int]
    """Active electrons of the two spins, alpha first."""

    @property
    def active(self) -> int:
        """The number of active orbitals."""
        return len(self.space.orbitals)

    @property
    def virtual(self) -> int:
        """The number of virtual orbitals."""
        return int(self.coefficients.shape[1]) - self.inactive - self.active

    @property
    def block(self) -> slice:
        """The columns of the active orbitals."""
        return slice(self.inactive, self.inactive + self.active)

    @property
    def used(self) -> dict[str, str]:
        """The space as the report names it."""
        numbers = ", ".join(map(str, self.space.orbitals)) or "none"
        return {"active space": f"{self.space.label}, orbitals {numbers}"}


def division_of(given: Given) -> Division:
    """The orbitals on the bench, divided by the space on the bench; raises PlumbruleError.

    Where one determinant describes the molecule the space is empty; single electrons are active even then.
    """
    bench, name = given.bench, given.spec.species.name
    if bench.mean_field is None or bench.orbitals is None or bench.space is None:
        raise PlumbruleError(f"no active space has been chosen for {name}, and this method works in one")
    alpha, beta = (int(count) for count in bench.mean_field.mol.nelec)
    space, coefficients = _with_single_electrons(bench.space, alpha, beta), np.asarray(bench.orbitals)
    _check(space, coefficients.shape[1], alpha, beta, name)
    chosen = [number - 1 for number in sorted(space.orbitals)]
    inactive = [k for k in range(beta) if k not in chosen]
    rest = [k for k in range(coefficients.shape[1]) if k not in chosen and k not in inactive]
    return Division(
        space=space,
        coefficients=coefficients[:, [*inactive, *chosen, *rest]],
        inactive=len(inactive),
        electrons=(alpha - len(inactive), beta - len(inactive)),
    )


def problem_of(division: Division, given: Given, coefficients: np.ndarray | None = None) -> Problem:
    """The Hamiltonian of the active electrons in these orbitals, in the field of the inactive ones."""
    block = division.block
    return problem_from(
        given.bench.mean_field,
        division.coefficients if coefficients is None else coefficients,
        range(division.inactive),
        range(block.start, block.stop),
        given.spec.species.multiplicity,
        fitting_of(given) if given.spec.settings.density_fitting else None,
    )


def restricted_field(bench: Bench) -> Any:
    """A restricted mean field for the library's integrals; its own orbitals are not meant to be used."""
    field = bench.mean_field
    return field.to_rhf() if field.istype("UHF") else field


def determinant_energy(division: Division, given: Given) -> float:
    """The energy in hartree of the closed shell that is left where no orbital is active."""
    field, filled = restricted_field(given.bench), division.coefficients[:, : division.inactive]
    return float(field.energy_tot(dm=2 * filled @ filled.T))


def _with_single_electrons(space: Space, alpha: int, beta: int) -> Space:
    if space.orbitals or alpha == beta:
        return space
    return Space(electrons=alpha - beta, orbitals=tuple(range(beta + 1, alpha + 1)), why=space.why)


def _check(space: Space, count: int, alpha: int, beta: int, name: str) -> None:
    numbers = space.orbitals
    said = f"the active space {space.label} of {name} with orbitals {', '.join(map(str, numbers)) or 'none'}"
    if len(set(numbers)) < len(numbers) or any(number > count for number in numbers):
        raise PlumbruleError(f"{said} cannot be: it needs different orbitals, numbered from 1 to {count}")
    lone = [number for number in range(beta + 1, alpha + 1) if number not in numbers]
    if lone:
        raise PlumbruleError(f"{said} leaves out orbital {lone[0]}, which holds a single electron: add it")
    held = sum((number <= alpha) + (number <= beta) for number in numbers)
    if held != space.electrons:
        raise PlumbruleError(
            f"{said} cannot be: these orbitals hold {held} electrons in the reference, not {space.electrons}"
        )
