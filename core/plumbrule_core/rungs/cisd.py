"""CISD: the best mixture of the reference with its single and double excitations."""

from typing import Any

import numpy as np

from plumbrule_core.documents.plan import Forecast, Machine
from plumbrule_core.rungs.correlated.reference import NO_PAIRS, correlated_used, has_pairs, reference_name
from plumbrule_core.rungs.correlated.solvers import configuration_interaction, integrals
from plumbrule_core.rungs.costs import iterated_forecast
from plumbrule_core.rungs.protocol import Given, Kind, Outcome, Published, Size, Tell
from plumbrule_core.rungs.published_systems import (
    HELIUMS,
    HYDROGEN,
    WATER_SIX_D_LONG,
)

MOST_ITERATIONS = 60


class CISD:
    """Variational, but two far molecules do not cost the sum of the two: a check, not an answer."""

    name = "CISD"
    says = "Shows how much weight the reference keeps; its energies do not add up for separate molecules."
    kind: Kind = "wave function"
    needs: tuple[str, ...] = ("HF",)
    rank = 20
    single_reference = True
    citation = "J. A. Pople, R. Seeger and R. Krishnan, Int. J. Quantum Chem. Symp. 11, 149 (1977)"
    published: tuple[Published, ...] = (
        HYDROGEN.gives(-1.137276),
        WATER_SIX_D_LONG.gives(-76.2198474486),
        HELIUMS.gives(3 * -2.8875948311 + 0.0013713590),
    )

    def forecast(self, size: Size, machine: Machine) -> Forecast:
        """As many iterations as CCSD, each a little cheaper."""
        return iterated_forecast(size, machine, iterations=12)

    def compute(self, given: Given, tell: Tell) -> Outcome:
        """The lowest root; leaves the CISD object with its vector on the bench."""
        bench = given.bench
        bench.configuration_interaction = None
        reference, energy, used = reference_name(bench), float(bench.mean_field.e_tot), correlated_used(given)
        if not has_pairs(bench):
            return Outcome(energy=energy, reference=reference, correlation=0.0, notes=(NO_PAIRS,), used=used)
        solver = configuration_interaction(given)
        iterations = diagonalise(solver, integrals(given), given, tell)
        bench.configuration_interaction = solver
        return Outcome(
            energy=energy + float(solver.e_corr),
            reference=reference,
            correlation=float(solver.e_corr),
            converged=bool(solver.converged),
            iterations=iterations,
            notes=() if solver.converged else (f"CISD did not converge in {iterations} iterations",),
            used=used,
        )


def diagonalise(solver: Any, eris: Any, given: Given, tell: Tell) -> int:
    """The lowest root by Davidson's method, told and checkpointed each iteration; returns their number."""
    from pyscf import lib

    diagonal = solver.make_diagonal(eris)
    diagonal -= diagonal[0]
    count = 0

    def watch(state: Any) -> None:
        nonlocal count
        count += 1
        given.shelf.save({"vector": np.asarray(state["x0"][0]), "orbitals": np.asarray(solver.mo_coeff)})
        tell.iteration(count, float(solver.e_hf + state["e"][0]), float(state["dx_norm"][0]))

    def precondition(residual: Any, value: float, *_: object) -> Any:
        gap = diagonal - value
        gap[np.abs(gap) < 1e-8] = 1e-8
        return residual / gap

    def product(left: Any, right: Any) -> Any:
        return (
            np.dot(left, right) if solver._dot is None else solver._dot(left, right, solver.nmo, solver.nocc)
        )

    solver.e_hf = solver.get_e_hf()
    converged, values, vectors = lib.davidson1(
        lambda xs: [solver.contract(x, eris) for x in xs],
        _start(solver, eris, given),
        precondition,
        tol=given.spec.settings.cc_tolerance / 10,
        max_cycle=MOST_ITERATIONS,
        max_memory=given.memory_mb,
        dot=product,
        callback=watch,
        verbose=0,
    )
    solver.converged, solver.e_corr, solver.ci = bool(converged[0]), float(values[0]), vectors[0]
    return count


def _start(solver: Any, eris: Any, given: Given) -> Any:
    stored = given.shelf.load() or {}
    if {"vector", "orbitals"} <= stored.keys() and np.array_equal(stored["orbitals"], solver.mo_coeff):
        return stored["vector"]
    return solver.get_init_guess(eris)[1]
