"""The library's CCSDT on our reference: its integrals, and iterations extrapolated, kept and told."""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np

from plumbrule_core.errors import PlumbruleError
from plumbrule_core.rungs.correlated.extrapolation import Extrapolation, space_for
from plumbrule_core.rungs.correlated.iterations import MOST_ITERATIONS
from plumbrule_core.rungs.correlated.reference import correlated_reference, fitting_of, is_unrestricted
from plumbrule_core.rungs.protocol import Given, Shelf, Tell


@dataclass(slots=True, kw_only=True)
class TripleIterations:
    """Stands in for the library's extrapolation, as `iterations.Iterations` does for CCSD."""

    solver: Any
    integrals: Any
    shelf: Shelf
    tell: Tell
    extrapolation: Extrapolation
    done: int = 0

    def __call__(self, amplitudes: Any, step: int, residual: float, *_: Any) -> Any:
        """One iteration ends: extrapolate, save, tell (which may raise Stopped)."""
        if not np.isfinite(residual):
            raise PlumbruleError(
                f"the CCSDT amplitudes ran away in iteration {self.done + 1}: one determinant is no start "
                "for this molecule, or the geometry is wrong"
            )
        vector = self.extrapolation(self.solver.amplitudes_to_vector(amplitudes))
        amplitudes = self.solver.vector_to_amplitudes(vector)
        self.done += 1
        energy = float(self.solver.e_hf + self.solver.energy(amplitudes, self.integrals))
        self.shelf.save({**self.extrapolation.state(), **self._where()})
        self.tell.iteration(self.done, energy, float(residual))
        return amplitudes

    def keep(self) -> None:
        """Store the converged amplitudes alone."""
        vector = self.solver.amplitudes_to_vector(self.solver.tamps)
        none = np.zeros((0, vector.size), dtype=np.float32)
        self.shelf.save({"amplitudes": vector, "vectors": none, "errors": none, **self._where()})

    def _where(self) -> dict[str, np.ndarray]:
        return {"orbitals": np.asarray(self.solver.mo_coeff), "iterations": np.array(self.done)}


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
    settings = given.spec.settings
    solver.conv_tol, solver.conv_tol_normt = settings.cc_tolerance, settings.cc_residual
    solver.max_cycle, solver.diis = MOST_ITERATIONS, False
    solver.e_hf = solver.get_e_hf()
    solver.unique_tamps_map = solver.build_unique_tamps_map()
    if stored is None:
        start = solver.amplitudes_to_vector(solver.init_amps(integrals)[1])
        extrapolation, done = Extrapolation(start, space_for(start.size, given.memory_mb)), 0
    else:
        space = space_for(stored["amplitudes"].size, given.memory_mb)
        extrapolation, done = Extrapolation.carried_on(stored, space), int(stored["iterations"])
    iterations = TripleIterations(
        solver=solver,
        integrals=integrals,
        shelf=given.shelf,
        tell=tell,
        extrapolation=extrapolation,
        done=done,
    )
    solver.run_diis = iterations
    solver.kernel(tamps=solver.vector_to_amplitudes(extrapolation.previous), eris=integrals)
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
