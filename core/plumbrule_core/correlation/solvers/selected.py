"""Selected configuration interaction: only the determinants that weigh something, found as it goes.

A selection that starts from one determinant stays in its configuration: for ethylene twisted by 90 degrees
the one from Hartree-Fock ends in the wrong state (own measurement). So it starts from several states of a
small space around the gap, and the lowest is taken.
"""

from collections.abc import Mapping
from typing import Any

import numpy as np

from plumbrule_core.correlation.entropies import profile_of
from plumbrule_core.correlation.excitations import MAX_ORBITALS, reference_string
from plumbrule_core.correlation.protocol import Array, Problem, Solved, Tell
from plumbrule_core.correlation.solvers.exact import PENALTIES, Space, right_spin, states
from plumbrule_core.correlation.wave import Wave, coefficients_of, leading_of
from plumbrule_core.errors import PlumbruleError

SCOUT_CUTOFF = 3e-3
"""Selection by which the starts are compared: entropies are right to about 0.01 (own measurement)."""
FRONTIER = 6
"""Orbitals around the gap, at most, whose states are the starts."""
STARTS = 3
VECTORS = 40
"""Vectors of the selected space's size held at once."""
IMPURE = 0.05
"""Selected spaces are not closed under spin; <S2> further off than this is said."""


class SelectedCI:
    """Selected CI, for spaces beyond exact diagonalisation without DMRG, and for quick looks."""

    name = "selected CI"
    citation = (
        "B. Huron, J. P. Malrieu and P. Rancurel, J. Chem. Phys. 58, 5745 (1973); A. A. Holmes, N. M. Tubman "
        "and C. J. Umrigar, J. Chem. Theory Comput. 12, 3674 (2016)"
    )

    def __init__(self, cutoff: float = 5e-4) -> None:
        """`cutoff`: determinants that would come in with smaller coefficients are left out."""
        self.cutoff = cutoff

    def missing(self) -> str:
        """Always there."""
        return ""

    def reach(self, problem: Problem, memory_mb: float) -> str:
        """Orbitals of both spins must be the same, both be filled, and the integrals fit the memory."""
        if problem.unrestricted:
            return "selected CI takes orbitals shared by both spins alone"
        if not problem.beta:
            # The library's selection divides by the number of beta electrons.
            return "selected CI needs active electrons of both spins"
        if problem.size > MAX_ORBITALS:
            return f"{problem.size} orbitals are more than the {MAX_ORBITALS} that selected CI can take"
        needed = 4 * 8e-6 * problem.size**4
        if needed > memory_mb:
            return (
                f"the integrals of {problem.size} orbitals take about {needed:.0f} MB, and "
                f"{memory_mb:.0f} MB are there"
            )
        return ""

    def solve(self, problem: Problem, tell: Tell, *, threads: int, memory_mb: float) -> Solved:
        """The lowest state of the multiplicity within the selected space.

        Raises PlumbruleError where the selected space outgrows the memory, or Stopped.
        """
        from pyscf import lib

        if beyond := self.reach(problem, memory_mb):
            raise PlumbruleError(beyond)
        space = Space(problem, tell, threads, memory_mb)
        with lib.with_omp_threads(threads):
            found = [
                _selected(space, start, max(SCOUT_CUTOFF, self.cutoff), f"start {k}")
                for k, start in enumerate(_starts(space), 1)
            ]
            energy, vector, converged = min(found, key=lambda one: one[0])
            if self.cutoff < SCOUT_CUTOFF:
                energy, vector, converged = _selected(space, vector, self.cutoff, "final selection")
            return _described(space, energy, vector, converged)


def _starts(space: Space) -> list[Any]:
    """Low states of the orbitals around the gap, in the strings of the whole space."""
    from pyscf.fci import cistring, selected_ci

    problem = space.problem
    low, small = frontier(problem)
    inner = Space(small, space.tell, space.threads, space.memory_mb)
    _, vectors, _ = states(inner, PENALTIES[0])
    starts = []
    for vector in [found for found in vectors if right_spin(inner, found)][:STARTS]:
        strings = tuple(
            (np.asarray(cistring.make_strings(range(small.size), count), dtype=np.int64) << low)
            | reference_string(low)
            for count in inner.electrons
        )
        starts.append(selected_ci._as_SCIvector(np.ascontiguousarray(vector), strings))
    if not starts:
        raise PlumbruleError(
            f"no state of multiplicity {problem.multiplicity} was found in the orbitals around the gap; "
            "check the multiplicity"
        )
    return starts


def frontier(problem: Problem) -> tuple[int, Problem]:
    """How many orbitals are kept filled, and the problem of those around the gap in their field."""
    half = FRONTIER // 2
    low = max(0, min(problem.beta - half, problem.size - FRONTIER))
    high = min(problem.size, max(problem.alpha + half, low + FRONTIER))
    core, chosen = slice(low), slice(low, high)
    field = 2 * np.einsum("pqii->pq", problem.two[:, :, core, core])
    field -= np.einsum("piiq->pq", problem.two[:, core, core, :])
    return low, Problem(
        one=(problem.one + field)[chosen, chosen],
        two=problem.two[chosen, chosen, chosen, chosen],
        alpha=problem.alpha - low,
        beta=problem.beta - low,
        multiplicity=problem.multiplicity,
    )


def _selected(space: Space, start: Any, cutoff: float, stage: str) -> tuple[float, Any, bool]:
    """Energy (hartree, without the core's), vector and convergence of one selection."""
    from pyscf.fci import addons, selected_ci

    solver = selected_ci.SelectedCI()
    solver.verbose, solver.threads, solver.max_memory = 0, space.threads, space.memory_mb
    solver.select_cutoff = solver.ci_coeff_cutoff = cutoff
    solver = addons.fix_spin_(solver, shift=PENALTIES[0], ss=space.target)

    def report(state: Mapping[str, Any]) -> None:
        count = state["xs"][0].size
        if 8e-6 * VECTORS * count > space.memory_mb:
            raise PlumbruleError(
                f"the selected space has grown to {count:.2g} determinants, more than {space.memory_mb:.0f} "
                "MB can hold; use DMRG, or fewer active orbitals"
            )
        space.steps += 1
        energy, residual = float(np.min(state["e"])), float(np.max(state["dx_norm"]))
        space.tell.iteration(space.steps, energy + space.problem.core_energy, residual, stage)

    energy, vector = solver.kernel(
        space.one, space.two, space.problem.size, space.electrons, ci0=start, callback=report, tol=1e-10
    )
    return float(energy), vector, bool(np.all(solver.converged))


def _described(space: Space, energy: float, vector: Any, converged: bool) -> Solved:
    from pyscf.fci import selected_ci

    problem = space.problem
    spin_squared = float(selected_ci.spin_square(vector, problem.size, space.electrons)[0])
    alpha, beta = (np.asarray(strings, dtype=np.int64) for strings in vector._strs)
    plain: Array = np.array(vector, dtype=float).reshape(len(alpha), len(beta))
    wave = Wave(
        alpha_strings=alpha,
        beta_strings=beta,
        vector=plain / np.linalg.norm(plain),
        size=problem.size,
    )
    entropies, information = profile_of(wave)
    notes = [f"{plain.size} determinants were selected"]
    if abs(spin_squared - space.target) > IMPURE:
        notes.append(
            f"the selected state is not pure in spin: <S2> is {spin_squared:.2f}, not {space.target:.2f}"
        )
    return Solved(
        energy=energy + problem.core_energy,
        converged=converged,
        densities=np.array(selected_ci.make_rdm1s(vector, problem.size, space.electrons)),
        entropies=entropies,
        mutual_information=information,
        coefficients=coefficients_of(wave, problem.alpha, problem.beta),
        spin_squared=spin_squared,
        leading=leading_of(wave),
        notes=tuple(notes),
    )
