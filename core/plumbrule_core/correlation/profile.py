"""The profile of a window: how strongly each orbital, and each pair, is correlated, and whether that is
settled.

Published practice (C. J. Stein and M. Reiher, J. Chem. Theory Comput. 12, 1760 (2016)): a cheap
solution of a wide window is good enough to rank orbitals, where it is the right state. So it is exact
where the window is small; else it is computed twice, at two settings of one solver, and the two are
compared.
"""

from collections.abc import Iterator
from dataclasses import dataclass, field

import numpy as np

from plumbrule_core.correlation.protocol import Array, Problem, Solved, Solver
from plumbrule_core.correlation.solvers.dmrg import DMRG, reference_energy
from plumbrule_core.correlation.solvers.exact import Exact, determinants
from plumbrule_core.correlation.window import Window
from plumbrule_core.errors import PlumbruleError

QUICK = 50_000
"""Determinants up to which the window is solved exactly: about ten seconds."""
BOND_DIMENSION = 64
"""Of the DMRG solution, which compares it with half as much (own measurements: 64 is right within 1e-4 of
an entropy for ten orbitals, within 0.015 for 26)."""
SETTLED = 0.05
"""Largest change of an entropy between two settings at which the ranking is settled (own measurements: right
states differ by 0.015 at most, wrong ones by 0.4 to 0.96)."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Profile:
    """The orbitals of a window, each list in their order; energies in hartree, entropies and I in nat."""

    orbitals: tuple[int, ...]
    """Numbers, from 1."""
    energies: Array
    reference: tuple[int, ...]
    """Electrons that the reference determinant has in each: 2, 1 or 0."""
    valence: tuple[bool, ...]
    occupations: Array
    """Electrons that the solution has in each."""
    entropies: Array
    mutual_information: Array
    energy: float
    """Of the solution, core and nuclei included."""
    c0_squared: float
    method: str
    """How it was solved: `exact`, `DMRG` ..."""
    settled: bool
    change: float
    """Largest change of an entropy between the two settings; 0 where the solution is exact."""
    narrow: Array | None = None
    """Entropies at the cheaper setting."""
    notes: tuple[str, ...] = field(default=())

    @property
    def largest(self) -> float:
        """The largest entropy; 0 for an empty window."""
        return float(np.max(self.entropies, initial=0.0))

    @property
    def zs1(self) -> float:
        """Zs(1): the mean entropy of the valence orbitals over its largest value, ln 4.

        C. J. Stein and M. Reiher, Mol. Phys. 115, 2110 (2017), who take it over the full valence space.
        """
        members = self.entropies[list(self.valence)] if any(self.valence) else self.entropies
        return float(np.mean(members) / np.log(4)) if len(members) else 0.0


def cheap_solver(problem: Problem, memory_mb: float) -> Solver:
    """Exact diagonalisation where it is quick; else DMRG with a narrow bond.

    Without DMRG exact diagonalisation takes what it can reach. Raises PlumbruleError where nothing does.
    """
    exact, narrow = Exact(), DMRG(bond_dimension=BOND_DIMENSION)
    unreached = exact.reach(problem, memory_mb)
    if determinants(problem) <= QUICK and not unreached:
        return exact
    beyond = narrow.missing() or narrow.reach(problem, memory_mb)
    if not beyond:
        return narrow
    if unreached:
        raise PlumbruleError(f"the orbitals cannot be looked at: {unreached}; {beyond}")
    return exact


def profile_from(window: Window, problem: Problem, solved: Solved, method: str) -> Profile:
    """The profile from a solution that is exact, or that holds the entropies of two settings."""
    narrow = solved.narrow_entropies
    change = 0.0 if narrow is None else float(np.max(np.abs(solved.entropies - narrow), initial=0.0))
    doubts = tuple(_doubts(problem, solved, change))
    return Profile(
        orbitals=window.orbitals,
        energies=window.energies,
        reference=window.reference,
        valence=window.valence,
        occupations=np.einsum("sii->i", solved.densities),
        entropies=solved.entropies,
        mutual_information=solved.mutual_information,
        energy=solved.energy,
        c0_squared=solved.reference_weight,
        method=method,
        settled=not doubts,
        change=change,
        narrow=narrow,
        notes=(*solved.notes, *doubts),
    )


def _doubts(problem: Problem, solved: Solved, change: float) -> Iterator[str]:
    """Why the solution may not be the right state, in words.

    Two settings that agree say more than the last sweep's change of the energy, which is what "converged"
    means there.
    """
    if not solved.converged and solved.narrow_entropies is None:
        yield "the solution of the window did not converge"
    if solved.energy > reference_energy(problem) + 1e-6:
        yield "the solution of the window lies above its reference determinant, so it is a wrong state"
    if change > SETTLED:
        yield f"an entropy changed by {change:.2f} between the two settings"
