"""The lowest state of one spin in given orbitals, with its vector: where optimised orbitals start and end.

The library starts from the one cheapest determinant, and misses a ground state of another symmetry; here the
start is diagonal among many, and where it is cheap several states are followed.
"""

from dataclasses import dataclass
from typing import Any

import numpy as np

from plumbrule_core.errors import PlumbruleError
from plumbrule_core.rungs.active.counts import determinants, states_followed
from plumbrule_core.rungs.protocol import Given

TOLERANCE = 1e-11
"""Of the energy in hartree."""
MOST_ITERATIONS = 200
KEPT = 8
"""Trial vectors that the diagonalisation keeps."""
PENALTIES = (0.2, 1.0)
"""Hartree per unit of S squared that lift states of other spins; the second where the first does not."""
SPIN_ERROR = 1e-3
START = 400
"""Determinants in which the starting vectors are diagonal."""


@dataclass(frozen=True, slots=True, kw_only=True)
class State:
    """A state by its vector of alpha and beta strings; energies in hartree."""

    energy: float
    vector: np.ndarray
    penalty: float
    """What kept it to its spin."""
    gap: float | None = None
    """To the next state of the same spin; None where that was not looked for."""


def spin_solver(multiplicity: int, penalty: float, given: Given) -> Any:
    """The library's determinant solver, kept to one spin."""
    from pyscf.fci import addons, direct_spin1

    spin = (multiplicity - 1) / 2
    solver = addons.fix_spin(direct_spin1.FCI(), shift=penalty, ss=spin * (spin + 1))
    solver.conv_tol, solver.max_cycle, solver.max_space = TOLERANCE, MOST_ITERATIONS, KEPT
    solver.max_memory, solver.verbose = given.memory_mb, 0
    return solver


def lowest(field: Any, orbitals: np.ndarray, given: Given) -> State:
    """The lowest state of the species' spin in these orbitals (functions, orbitals) of a CASSCF object.

    Raises PlumbruleError where no state of this spin is found.
    """
    one, constant = field.get_h1eff(orbitals)
    two, size, electrons = field.get_h2eff(orbitals), field.ncas, field.nelecas
    multiplicity = given.spec.species.multiplicity
    for penalty in PENALTIES:
        solver = spin_solver(multiplicity, penalty, given)
        counted = determinants(size, *electrons)
        solver.nroots = min(states_followed(size, *electrons), counted)
        start = _starts(solver, one, two, size, electrons)
        energies, vectors = solver.kernel(one, two, size, electrons, ci0=start, ecore=constant)
        energies = np.atleast_1d(energies)
        vector = np.asarray(vectors if solver.nroots == 1 else vectors[0]).reshape(-1)
        if abs(solver.spin_square(vector, size, electrons)[0] - solver.ss_value) < SPIN_ERROR:
            gap = float(energies[1] - energies[0]) if len(energies) > 1 else None
            return State(energy=float(energies[0]), vector=vector, penalty=penalty, gap=gap)
    raise PlumbruleError(
        f"no state of multiplicity {multiplicity} was found in the {size} active orbitals of "
        f"{given.spec.species.name}: check the multiplicity, or choose other active orbitals"
    )


def _starts(solver: Any, one: Any, two: Any, size: int, electrons: tuple[int, int]) -> list[np.ndarray]:
    """The best states among the cheapest determinants, those of the wanted spin first."""
    from pyscf.fci import spin_op

    counted = determinants(size, *electrons)
    diagonal = solver.make_hdiag(one, two, size, electrons)
    address, small = solver.pspace(one, two, size, electrons, diagonal, min(START, counted))
    right: list[np.ndarray] = []
    wrong: list[np.ndarray] = []
    for state in np.linalg.eigh(small)[1].T[: 10 * solver.nroots]:
        vector = np.zeros(counted)
        vector[address] = state
        spin = spin_op.spin_square0(vector, size, electrons)[0]
        (right if abs(spin - solver.ss_value) < 0.5 else wrong).append(vector)
    return [*right, *wrong][: solver.nroots]
