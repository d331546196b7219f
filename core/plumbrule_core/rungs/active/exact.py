"""Exact diagonalisation in a space of orbitals: the lowest state of one spin, told iteration by iteration."""

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from plumbrule_core.errors import PlumbruleError
from plumbrule_core.rungs.active.counts import KEPT, determinants
from plumbrule_core.rungs.protocol import Given

TOLERANCE = 1e-11
"""Of the energy in hartree."""
MOST_ITERATIONS = 200
SPIN_PENALTIES = (0.2, 1.0)
"""Energy in hartree per unit of S squared that lifts states of other spins; the second where one is no help."""
SPIN_ERROR = 1e-3
SEARCHED_BELOW = 300_000
"""Determinants up to which several states are followed, so that one of another symmetry is not missed."""
STATES = 3
START = 400
"""Determinants in which the starting vectors are diagonal."""

Look = Callable[[int, float, float, np.ndarray], None]
"""Called after each iteration with its number, energy, residual norm and vector."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Hamiltonian:
    """`one` (n, n), `two` packed as the library likes it; energies in hartree."""

    one: np.ndarray
    two: np.ndarray
    constant: float
    orbitals: int
    electrons: tuple[int, int]
    multiplicity: int


@dataclass(frozen=True, slots=True, kw_only=True)
class State:
    """The lowest state: its vector by alpha and beta strings, and how far the next of its spin lies above."""

    energy: float
    vector: np.ndarray
    converged: bool
    iterations: int
    spin_squared: float
    gap: float | None = None
    """To the next state in hartree; None where it was not looked for."""


def spin_solver(multiplicity: int, penalty: float, given: Given) -> Any:
    """The library's determinant solver, kept to one spin."""
    from pyscf import fci

    spin = (multiplicity - 1) / 2
    solver = fci.addons.fix_spin(fci.direct_spin1.FCI(), shift=penalty, ss=spin * (spin + 1))
    solver.conv_tol, solver.max_cycle, solver.max_space = TOLERANCE, MOST_ITERATIONS, KEPT
    # The library takes what it finds beyond this to a scratch file; the count was refused before that.
    solver.max_memory, solver.verbose = given.memory_mb, 0
    return solver


def lowest(
    hamiltonian: Hamiltonian, given: Given, look: Look | None = None, start: np.ndarray | None = None
) -> State:
    """The lowest state of the wanted spin.

    Raises PlumbruleError where no state of this spin is found, and whatever `look` raises.
    """
    for penalty in SPIN_PENALTIES:
        state = _diagonalised(hamiltonian, penalty, given, look, start)
        spin = (hamiltonian.multiplicity - 1) / 2
        if abs(state.spin_squared - spin * (spin + 1)) < SPIN_ERROR:
            return state
    raise PlumbruleError(
        f"no state of multiplicity {hamiltonian.multiplicity} was found in the space of {hamiltonian.orbitals} "
        f"orbitals: the lowest had an S squared of {state.spin_squared:.3f}. Choose a larger space"
    )


def _diagonalised(
    hamiltonian: Hamiltonian, penalty: float, given: Given, look: Look | None, start: np.ndarray | None
) -> State:
    h, counted = hamiltonian, determinants(hamiltonian.orbitals, *hamiltonian.electrons)
    solver = spin_solver(h.multiplicity, penalty, given)
    solver.nroots = min(STATES, counted) if counted <= SEARCHED_BELOW else 1
    vectors = _starts(solver, h, given, start)
    done = 0

    def callback(state: Any) -> None:
        nonlocal done
        done += 1
        if look is not None:
            energy = float(state["e"][0]) + h.constant
            look(done, energy, float(np.max(state["dx_norm"])), np.asarray(state["x0"][0]))

    energies, found = solver.kernel(
        h.one,
        h.two,
        h.orbitals,
        h.electrons,
        ci0=vectors,
        ecore=h.constant,
        callback=callback,
        max_memory=given.memory_mb,
    )
    energies = np.atleast_1d(energies)
    vector = np.asarray(found if solver.nroots == 1 else found[0])
    return State(
        energy=float(energies[0]),
        vector=vector,
        converged=bool(np.atleast_1d(solver.converged)[0]),
        iterations=done,
        spin_squared=float(solver.spin_square(vector, h.orbitals, h.electrons)[0]),
        gap=float(energies[1] - energies[0]) if len(energies) > 1 else None,
    )


def _starts(solver: Any, h: Hamiltonian, given: Given, start: np.ndarray | None) -> list[np.ndarray]:
    """Starting vectors: the best states among the cheapest determinants, with spins as the penalty wants."""
    from pyscf.fci import spin_op

    counted = determinants(h.orbitals, *h.electrons)
    if start is not None and start.size == counted and solver.nroots == 1:
        return [start.ravel()]
    diagonal = solver.make_hdiag(h.one, h.two, h.orbitals, h.electrons)
    cheapest = min(START, counted)
    address, small = solver.pspace(h.one, h.two, h.orbitals, h.electrons, diagonal, cheapest)
    _, states = np.linalg.eigh(small)
    wanted = solver.ss_value
    vectors: list[np.ndarray] = []
    leftover: list[np.ndarray] = []
    for state in states.T[: 10 * solver.nroots]:
        vector = np.zeros(counted)
        vector[address] = state
        spin = spin_op.spin_square0(vector, h.orbitals, h.electrons)[0]
        (vectors if abs(spin - wanted) < 0.5 else leftover).append(vector)
    return [*vectors, *leftover][: solver.nroots]


def leading(
    vector: np.ndarray, orbitals: int, electrons: Sequence[int], most: int = 3
) -> tuple[tuple[float, str], ...]:
    """The heaviest determinants: weight, and occupation of each orbital as `2`, `u`, `d` or `0`."""
    from pyscf.fci import cistring

    weights = np.asarray(vector).reshape(-1) ** 2
    beta_strings = cistring.num_strings(orbitals, electrons[1])
    found = []
    for place in np.argsort(weights)[::-1][:most]:
        alpha, beta = divmod(int(place), beta_strings)
        ups, downs = (
            int(cistring.addr2str(orbitals, count, address))
            for count, address in zip(electrons, (alpha, beta), strict=True)
        )
        found.append((float(weights[place]), _occupations(ups, downs, orbitals)))
    return tuple(found)


def _occupations(ups: int, downs: int, orbitals: int) -> str:
    return "".join("0ud2"[(ups >> k & 1) + 2 * (downs >> k & 1)] for k in range(orbitals))
