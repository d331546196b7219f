"""The ladder of measures that brings a field to convergence, cheapest first."""

import warnings
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any

import numpy as np

from plumbrule_core.errors import PlumbruleError
from plumbrule_core.rungs.scf.watch import Course, Watch, course_of

COURSES: dict[Course, str] = {
    "oscillating": "the energy swings between states",
    "drifting": "the energy keeps moving without settling",
    "slow": "the energy settles, but too slowly",
}
GRADIENT_TOLERANCE = 1e-6
"""Norm of the orbital gradient, so that coupled-cluster energies carry no trace of the field's residue."""
GRID_GRADIENT_TOLERANCE = 1e-5
"""The same for functionals, whose integration grid limits it."""


BROKEN = (RuntimeError, ValueError, ArithmeticError, np.linalg.LinAlgError)
"""What the library raises where a guess does not suit a molecule; another guess may still do."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Measure:
    """One rung of the ladder; a measure with a guess starts afresh, others from the best orbitals so far."""

    name: str
    guess: str = ""
    cycles: int = 50
    damping: float = 0.0
    level_shift: float = 0.0
    second_order: bool = False


def measures(first_guess: str, huckel: bool = True) -> Iterator[Measure]:
    """The measures in the order in which they are tried, once a first guess has been chosen.

    `huckel` says whether the molecule admits that guess.
    """
    yield Measure(name="first guess", guess=first_guess)
    other = "atom" if first_guess != "atom" else "huckel" if huckel else "minao"
    yield Measure(name="other guess", guess=other)
    yield Measure(name="damped", cycles=60, damping=0.5)
    yield Measure(name="level shift", cycles=100, level_shift=0.5)
    yield Measure(name="second order", cycles=60, second_order=True)


def set_tolerances(mean_field: Any, energy: float, functional: bool) -> None:
    """Energy tolerance in hartree, and the gradient tolerance that belongs to it."""
    mean_field.conv_tol = energy
    mean_field.conv_tol_grad = GRID_GRADIENT_TOLERANCE if functional else GRADIENT_TOLERANCE


def converge(mean_field: Any, first_guess: str, watch: Watch, name: str, start: Any = None) -> str:
    """Climb the ladder until the field converges; returns the name of the measure that did it.

    `start` is a density to begin from in place of the first guess. Raises PlumbruleError where nothing helps.
    """
    best: tuple[float, Any, Any] | None = None
    for measure in measures(first_guess, holds_huckel(mean_field.mol)):
        density = _density(mean_field, measure, best) if start is None else start
        start = None
        watch.begin(measure.name)
        run(mean_field, measure, watch, density)
        if mean_field.converged:
            return measure.name
        if watch.best is not None and (best is None or watch.best[0] < best[0]):
            best = watch.best
    course = course_of(watch.energies)
    raise PlumbruleError(
        f"the self-consistent field of {name} did not converge in {watch.iterations} iterations with any "
        f"measure, second order included: {COURSES[course]} ({course}). Nothing that builds on it was done. "
        "Look at the geometry, the charge and the unpaired electrons first, then try a smaller basis"
    )


def run(mean_field: Any, measure: Measure, watch: Watch, density: Any) -> None:
    """Run the field with one measure, and leave its switches as they were."""
    if measure.second_order:
        descend(mean_field, watch, density=density, cycles=measure.cycles)
        return
    mean_field.max_cycle = measure.cycles
    mean_field.level_shift = measure.level_shift
    mean_field.damp = measure.damping
    mean_field.callback = watch
    try:
        mean_field.kernel(dm0=density)
    finally:
        mean_field.level_shift = mean_field.damp = 0.0
        mean_field.callback = None


def descend(
    mean_field: Any, watch: Watch | None, density: Any = None, orbitals: Any = None, cycles: int = 60
) -> None:
    """Second-order steps from a density or from orbitals; the field takes the result.

    They only go downhill, so that a solution reached by following an instability is not lost again.
    """
    solver = mean_field.newton()
    solver.max_cycle, solver.verbose = cycles, 0
    solver.conv_tol, solver.conv_tol_grad = mean_field.conv_tol, mean_field.conv_tol_grad
    solver.callback = watch
    if orbitals is not None:
        solver.kernel(orbitals, mean_field.mo_occ)
    else:
        solver.kernel(dm0=density)
    for name in ("converged", "e_tot", "mo_energy", "mo_coeff", "mo_occ"):
        setattr(mean_field, name, getattr(solver, name))


def _density(mean_field: Any, measure: Measure, best: tuple[float, Any, Any] | None) -> Any:
    if measure.guess or best is None:
        return guessed_density(mean_field, measure.guess or "minao")
    return mean_field.make_rdm1(best[1], best[2])


def holds_huckel(molecule: Any) -> bool:
    """Whether the occupied shells of the free atoms, of which that guess is made, hold the larger spin.

    Two parallel electrons of helium or the four of a quartet BeH need an orbital that the atoms leave empty.
    """
    from pyscf.data.elements import NRSRHF_CONFIGURATION
    from pyscf.gto import charge

    held = 0
    for atom in range(molecule.natm):
        shells = NRSRHF_CONFIGURATION[charge(molecule.atom_symbol(atom))]
        filled = sum((2 * k + 1) * -(-electrons // (4 * k + 2)) for k, electrons in enumerate(shells))
        held += filled - molecule.atom_nelec_core(atom) // 2
    return bool(held >= max(molecule.nelec))


def guessed_density(mean_field: Any, guess: str) -> Any:
    """The density of a starting guess, by the library's name for it."""
    with warnings.catch_warnings():
        # PySCF 2.14 builds its atomic densities with a function that it has itself deprecated.
        warnings.filterwarnings(
            "ignore", message="remove_linear_dep_ is deprecated", category=DeprecationWarning
        )
        return mean_field.get_init_guess(mean_field.mol, guess)
