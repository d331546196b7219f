"""Where the optimisation of active orbitals starts: of the starts that the task allows, the lowest in energy.

Beside the orbitals that the space is numbered in these are natural orbitals, whose occupations show which
of them are half in use: of MP2 for closed shells (H. J. Aa. Jensen, P. Jorgensen, H. Agren and J. Olsen, J.
Chem. Phys. 88, 3834 (1988)), of UHF where that is the reference (P. Pulay and T. P. Hamilton, J. Chem. Phys.
88, 4926 (1988)). A space whose orbitals the user named starts from just these. What is tried depends on the
task alone, never on what else was computed before, so that a task has one answer.
"""

from dataclasses import dataclass

import numpy as np

from plumbrule_core.correlation.restricted import natural_orbitals
from plumbrule_core.rungs.active.division import Division, restricted_field
from plumbrule_core.rungs.active.optimise import casscf_object
from plumbrule_core.rungs.active.states import lowest
from plumbrule_core.rungs.protocol import Given

CHEAP_FUNCTIONS = 200
"""Basis functions up to which MP2 natural orbitals cost less than the optimisation that they may shorten."""
TIE = 1e-6
"""Hartree by which natural orbitals must start lower to be taken."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Start:
    """`orbitals` (functions, orbitals): inactive, active, virtual; `energy` of the space in them, hartree."""

    name: str
    orbitals: np.ndarray
    energy: float

    @property
    def words(self) -> str:
        """The start and its energy, as the report names it."""
        return f"{self.name} ({self.energy:.6f} hartree)"


def starts(division: Division, given: Given) -> tuple[Start, ...]:
    """Every start that this task allows, the lowest energy first; of equals the space's own orbitals."""
    field = casscf_object(division, given)
    own = "the orbitals that the space is numbered in"
    offered = {own: division.coefficients, **_natural(division, given)}
    found = [
        Start(name=name, orbitals=orbitals, energy=lowest(field, orbitals, given).energy)
        for name, orbitals in offered.items()
    ]
    return tuple(sorted(found, key=lambda start: start.energy - (TIE if start.name == own else 0)))


def _natural(division: Division, given: Given) -> dict[str, np.ndarray]:
    request, reference = given.spec.space, given.bench.mean_field
    if request is not None and request.choice == "set" and request.orbitals is not None:
        return {}
    if reference.istype("UHF"):
        return {"UHF natural orbitals": natural_orbitals(reference)}
    closed = not reference.istype("ROHF") and not given.spec.settings.density_fitting
    if closed and division.virtual and division.coefficients.shape[0] <= CHEAP_FUNCTIONS:
        return {"MP2 natural orbitals": _perturbed(division, given)}
    return {}


def _perturbed(division: Division, given: Given) -> np.ndarray:
    """Natural orbitals of MP2, filled and empty ones apart so that the active ones keep their electrons."""
    from pyscf.mp import mp2

    solver = mp2.RMP2(restricted_field(given.bench), frozen=given.bench.frozen or None)
    solver.verbose, solver.max_memory = 0, given.memory_mb
    solver.kernel()
    density = solver.make_rdm1()
    filled = given.bench.molecule.nelectron // 2
    canonical = np.asarray(solver._scf.mo_coeff)
    blocks = []
    for block in (slice(0, filled), slice(filled, None)):
        _, turn = np.linalg.eigh(density[block, block])
        blocks.append(canonical[:, block] @ turn[:, ::-1])
    return np.hstack(blocks)
