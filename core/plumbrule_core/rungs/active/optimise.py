"""The ladder of measures that optimises the orbitals of an active space, checkpointed and told."""

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

import numpy as np

from plumbrule_core.rungs.active.division import Division, restricted_field
from plumbrule_core.rungs.active.states import State, lowest, spin_solver
from plumbrule_core.rungs.protocol import Given, Shelf, Tell

ENERGY, GRADIENT = 1e-9, 1e-5
"""Tolerances of the energy (hartree) and of the norm of the orbital gradient."""
LOWER = 1e-6
"""Hartree by which another state must lie lower to be followed."""
MOST_FOLLOWED = 2


@dataclass(frozen=True, slots=True, kw_only=True)
class Measure:
    """One rung of the ladder; each starts from the orbitals that the one before has left."""

    name: str
    cycles: int
    step: float = 0.02
    """Largest rotation of orbitals in one step."""
    shift: float = 1e-8
    """Hartree added to the orbital Hessian."""
    second_order: bool = False


MEASURES = (
    Measure(name="usual steps", cycles=50),
    Measure(name="small shifted steps", cycles=60, step=0.005, shift=0.1),
    Measure(name="second order", cycles=60, second_order=True),
)


@dataclass(slots=True)
class Watch:
    """The library's callback: keeps each macro iteration's orbitals, tells it (may raise Stopped)."""

    shelf: Shelf
    tell: Tell
    start: str
    """Which orbitals it all began with."""
    begun_with: np.ndarray
    """(functions, orbitals): those."""
    iterations: int = 0
    stage: str = ""
    _seen: Any = field(default=None, repr=False)

    def begin(self, stage: str, orbitals: np.ndarray) -> None:
        """A new stage that starts from these orbitals."""
        self.stage, self._seen = stage, orbitals

    def __call__(self, state: Mapping[str, Any]) -> None:
        """Called after micro iterations too, which leave the orbitals as they are."""
        if state["mo"] is self._seen:
            return
        self._seen = state["mo"]
        self.iterations += 1
        self.keep(state["mo"])
        gradient = state.get("norm_gall", state.get("norm_gorb0"))
        self.tell.iteration(self.iterations, float(state["e_tot"]), float(gradient or 0.0), self.stage)

    def keep(self, orbitals: np.ndarray) -> None:
        """Put orbitals on the shelf, with what they began as."""
        self.shelf.save(
            {
                "orbitals": np.asarray(orbitals),
                "begun_with": self.begun_with,
                "start": np.array(self.start),
                "stage": np.array(self.stage),
                "iterations": np.array(self.iterations),
            }
        )


@dataclass(frozen=True, slots=True, kw_only=True)
class Optimised:
    """The library's object with converged orbitals and vector, how it got there, and the state it is in."""

    field: Any
    converged: bool
    measure: str
    state: State
    followed: tuple[str, ...] = ()


def optimise(division: Division, orbitals: np.ndarray, stage: str, given: Given, watch: Watch) -> Optimised:
    """Optimise from these orbitals, beginning with the measure named `stage` where one is.

    The lowest state in the final orbitals is looked for once more, and followed where it lies lower. Raises
    Stopped, and PlumbruleError where no state of the right spin is found.
    """
    field = casscf_object(division, given)
    state = lowest(field, orbitals, given)
    followed: list[str] = []
    for _ in range(MOST_FOLLOWED):
        measure = _climb(field, orbitals, stage, state, given, watch)
        orbitals = field.mo_coeff
        state = lowest(field, orbitals, given)
        drop = float(field.e_tot) - state.energy
        if not field.converged or drop < LOWER:
            break
        followed.append(f"a state {drop:.6f} hartree lower was found in the optimised orbitals and followed")
    watch.keep(orbitals)
    return Optimised(
        field=field,
        converged=bool(field.converged),
        measure=measure,
        state=state,
        followed=tuple(followed),
    )


def casscf_object(division: Division, given: Given) -> Any:
    """The library's CASSCF on this division, that has not run; kept to the spin of the species."""
    from pyscf import lib, mcscf

    lib.num_threads(given.threads)
    field = mcscf.CASSCF(
        restricted_field(given.bench), division.active, division.electrons, ncore=division.inactive
    )
    field.verbose, field.max_memory, field.chkfile = 0, given.memory_mb, None
    field.conv_tol, field.conv_tol_grad = ENERGY, GRADIENT
    return field


def _climb(field: Any, orbitals: np.ndarray, stage: str, state: State, given: Given, watch: Watch) -> str:
    """Measures from the one named `stage` on, until one converges; returns its name."""
    names = [measure.name for measure in MEASURES]
    first = names.index(stage) if stage in names else 0
    field.fcisolver = spin_solver(given.spec.species.multiplicity, state.penalty, given)
    vector = state.vector
    for measure in MEASURES[first:]:
        solver = field.newton() if measure.second_order else field
        solver.max_cycle_macro, solver.max_stepsize = measure.cycles, measure.step
        solver.ah_level_shift, solver.callback, solver.verbose = measure.shift, watch, 0
        watch.begin(measure.name, orbitals)
        solver.kernel(orbitals, vector)
        for name in ("converged", "e_tot", "e_cas", "mo_coeff", "mo_energy", "ci"):
            setattr(field, name, getattr(solver, name))
        field.callback = None
        if field.converged:
            break
        orbitals, vector = field.mo_coeff, field.ci
    return measure.name
