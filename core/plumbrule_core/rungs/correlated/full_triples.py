"""The library's CCSDT on our reference: its integrals, and iterations extrapolated, kept and told."""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any, ClassVar

import numpy as np

from plumbrule_core.rungs.correlated.iterations import Iterations, begun
from plumbrule_core.rungs.correlated.reference import correlated_reference, fitting_of, is_unrestricted
from plumbrule_core.rungs.protocol import Given, Tell


@dataclass(slots=True, kw_only=True)
class TripleIterations(Iterations):
    """The same for CCSDT, whose amplitudes the library hands over as one object."""

    method: ClassVar[str] = "CCSDT"

    def __call__(self, amplitudes: Any, step: int, residual: float, *_: Any) -> Any:  # type: ignore[override]
        """One iteration ends: extrapolate, save, tell (which may raise Stopped)."""
        (following,) = self.ended((amplitudes,), residual)
        return following

    def unpacked(self, vector: np.ndarray) -> tuple[Any, ...]:
        """The one object that holds them all."""
        return (self.solver.vector_to_amplitudes(vector),)

    def solution(self) -> tuple[Any, ...]:
        """The amplitudes that the solver ended with."""
        return (self.solver.tamps,)


def full_triples(given: Given) -> Any:
    """A CCSDT object that has not run, restricted or unrestricted as the reference."""
    from pyscf import lib
    from pyscf.cc import rccsdt, uccsdt

    lib.num_threads(given.threads)
    reference = correlated_reference(given.bench)
    kind = uccsdt.UCCSDT if is_unrestricted(reference) else rccsdt.RCCSDT
    solver = kind(reference, frozen=given.bench.frozen or None)
    solver.verbose, solver.max_memory, solver.einsum_backend = 0, given.memory_mb, "numpy"
    return solver


def triple_integrals(solver: Any, given: Given) -> Any:
    """All integrals in memory as CCSDT wants them: <pq|rs>, over correlated orbitals."""
    from pyscf.cc import rccsdt, uccsdt

    if not is_unrestricted(solver._scf):
        found = rccsdt._PhysicistsERIs()
        found._common_init_(solver, solver.mo_coeff)
        found.pppp = _repulsion(given, found.mo_coeff, found.mo_coeff)
        return found
    found = uccsdt._PhysicistsERIs()
    found._common_init_(solver, solver.mo_coeff)
    alpha, beta = found.mo_coeff
    found.pppp = _repulsion(given, alpha, alpha)
    found.pPpP = _repulsion(given, alpha, beta)
    found.PPPP = _repulsion(given, beta, beta)
    return found


def iterate_triples(
    given: Given, tell: Tell, solver: Any, integrals: Any, stored: Mapping[str, np.ndarray] | None
) -> TripleIterations:
    """Run CCSDT to its end, from the checkpoint where one fits; raises Stopped, PlumbruleError."""
    solver.unique_tamps_map = solver.build_unique_tamps_map()
    iterations = begun(TripleIterations, given, tell, solver, integrals, stored)
    (amplitudes,) = iterations.unpacked(iterations.extrapolation.previous)
    solver.kernel(tamps=amplitudes, eris=integrals)
    iterations.keep()
    return iterations


def _repulsion(given: Given, first: np.ndarray, second: np.ndarray) -> np.ndarray:
    from pyscf import ao2mo

    field, four = correlated_reference(given.bench), (first, first, second, second)
    if given.spec.settings.density_fitting:
        found = fitting_of(given).ao2mo(four, compact=False)
    else:
        found = ao2mo.general(field.mol if field._eri is None else field._eri, four, compact=False)
    a, b = first.shape[1], second.shape[1]
    return np.ascontiguousarray(np.asarray(found).reshape(a, a, b, b).transpose(0, 2, 1, 3))
