"""The coupled-cluster iterations: extrapolated, checkpointed and told, one by one."""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any, ClassVar, TypeVar

import numpy as np

from plumbrule_core.errors import PlumbruleError
from plumbrule_core.rungs.correlated.extrapolation import Extrapolation, space_for
from plumbrule_core.rungs.correlated.reference import correlated_reference
from plumbrule_core.rungs.protocol import Bench, Given, Shelf, Tell

SAME_SPACE = 1e-8
"""Stored orbitals are of the same determinant where their occupied spaces overlap to within this of one."""
MOST_ITERATIONS = 100
Started = TypeVar("Started", bound="Iterations")


@dataclass(slots=True, kw_only=True)
class Iterations:
    """Stands in for the library's extrapolation, the one step that sees each iteration's residual."""

    solver: Any
    integrals: Any
    shelf: Shelf
    tell: Tell
    extrapolation: Extrapolation
    done: int = 0

    method: ClassVar[str] = "CCSD"

    def __call__(self, t1: Any, t2: Any, step: int, residual: float, *_: Any) -> tuple[Any, ...]:
        """One iteration ends: extrapolate, save, tell (which may raise Stopped)."""
        return self.ended((t1, t2), residual)

    def ended(self, amplitudes: tuple[Any, ...], residual: float) -> tuple[Any, ...]:
        """The next amplitudes after an iteration that gave these; raises PlumbruleError, Stopped."""
        if not np.isfinite(residual):
            raise PlumbruleError(
                f"the {self.method} amplitudes ran away in iteration {self.done + 1}: one determinant is no "
                "start for this molecule, or the geometry is wrong"
            )
        amplitudes = self.unpacked(self.extrapolation(self.solver.amplitudes_to_vector(*amplitudes)))
        self.done += 1
        energy = float(self.solver.e_hf + self.solver.energy(*amplitudes, self.integrals))
        self.shelf.save({**self.extrapolation.state(), **self._where()})
        self.tell.iteration(self.done, energy, float(residual))
        return amplitudes

    def unpacked(self, vector: np.ndarray) -> tuple[Any, ...]:
        """The amplitudes that a vector holds, as the library's functions take them."""
        return tuple(self.solver.vector_to_amplitudes(vector))

    def solution(self) -> tuple[Any, ...]:
        """The amplitudes that the solver ended with."""
        return self.solver.t1, self.solver.t2

    def keep(self) -> None:
        """Store the converged amplitudes alone."""
        vector = self.solver.amplitudes_to_vector(*self.solution())
        none = np.zeros((0, vector.size), dtype=np.float32)
        self.shelf.save({"amplitudes": vector, "vectors": none, "errors": none, **self._where()})

    def _where(self) -> dict[str, np.ndarray]:
        return {"orbitals": np.asarray(self.solver.mo_coeff), "iterations": np.array(self.done)}


def begun(
    kind: type[Started],
    given: Given,
    tell: Tell,
    solver: Any,
    integrals: Any,
    stored: Mapping[str, np.ndarray] | None,
) -> Started:
    """The iterations of a solver that has not run, put into it: from the checkpoint where one fits."""
    settings = given.spec.settings
    solver.conv_tol, solver.conv_tol_normt = settings.cc_tolerance, settings.cc_residual
    solver.max_cycle, solver.diis = MOST_ITERATIONS, False
    solver.e_hf = solver.get_e_hf()
    if stored is None:
        start = solver.amplitudes_to_vector(*solver.init_amps(integrals)[1:])
        extrapolation, done = Extrapolation(start, space_for(start.size, given.memory_mb)), 0
    else:
        space = space_for(stored["amplitudes"].size, given.memory_mb)
        extrapolation, done = Extrapolation.carried_on(stored, space), int(stored["iterations"])
    solver.run_diis = iterations = kind(
        solver=solver,
        integrals=integrals,
        shelf=given.shelf,
        tell=tell,
        extrapolation=extrapolation,
        done=done,
    )
    return iterations


def iterate(
    given: Given, tell: Tell, solver: Any, integrals: Any, stored: Mapping[str, np.ndarray] | None
) -> Iterations:
    """Run the solver to its end, from the checkpoint where one fits; raises Stopped, PlumbruleError."""
    iterations = begun(Iterations, given, tell, solver, integrals, stored)
    t1, t2 = iterations.unpacked(iterations.extrapolation.previous)
    solver.kernel(t1=t1, t2=t2, eris=integrals)
    iterations.keep()
    return iterations


def usable(given: Given) -> Mapping[str, np.ndarray] | None:
    """The checkpoint, where its orbitals are those on the bench or can be put there; else None.

    Amplitudes mean nothing without the orbitals they were made in. Where the orbitals on the bench describe
    the same determinant turned differently, the stored ones take their place.
    """
    stored = given.shelf.load()
    if stored is None or not {"amplitudes", "vectors", "errors", "orbitals", "iterations"} <= stored.keys():
        return None
    reference, orbitals = correlated_reference(given.bench), stored["orbitals"]
    if np.array_equal(orbitals, reference.mo_coeff):
        return stored
    if orbitals.shape != np.shape(reference.mo_coeff) or not _same_determinant(
        reference, orbitals, given.bench.frozen
    ):
        return None
    _adopt(given.bench, orbitals)
    return stored


def _same_determinant(reference: Any, orbitals: Any, frozen: int) -> bool:
    overlap = reference.get_ovlp()
    unrestricted = reference.istype("UHF")
    pairs = (
        zip(orbitals, reference.mo_coeff, strict=True) if unrestricted else [(orbitals, reference.mo_coeff)]
    )
    for (stored, present), occupation in zip(pairs, np.atleast_2d(reference.mo_occ), strict=True):
        filled = np.flatnonzero(occupation > 0)
        for block in (filled[:frozen], filled):
            turned = stored[:, block].T @ overlap @ present[:, block]
            if block.size and np.linalg.svd(turned, compute_uv=False).min() < 1 - SAME_SPACE:
                return False
    return True


def _adopt(bench: Bench, orbitals: np.ndarray) -> None:
    reference = correlated_reference(bench)
    reference.mo_coeff = orbitals
    fock = reference.get_fock()
    reference.mo_energy = np.einsum("...pi,...pq,...qi->...i", orbitals, fock, orbitals)
    bench.integrals = bench.perturbation = bench.configuration_interaction = None
