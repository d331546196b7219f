"""After MP2: natural occupations of the unrelaxed density, and the M diagnostic drawn from them.

M: O. Tishchenko, J. Zheng and D. G. Truhlar, J. Chem. Theory Comput. 4, 1208 (2008), who take the occupations
from a multiconfigurational wave function; here they come from MP2, which exaggerates where orbitals lie
close.
"""

from typing import Any

import numpy as np

from plumbrule_core.documents.plan import TaskSpec
from plumbrule_core.documents.results import Reading
from plumbrule_core.judgement.readings.family import Family
from plumbrule_core.rungs.correlated.reference import correlated_counts, correlated_reference
from plumbrule_core.rungs.protocol import Bench


def measure(bench: Bench, spec: TaskSpec) -> tuple[Reading, ...]:
    """Occupations, M and the largest amplitude; nothing where no pair is correlated."""
    solver = bench.perturbation
    if solver is None:
        return ()
    occupations = natural_occupations(solver, correlated_reference(bench), bench.frozen)
    (alpha, beta), _ = correlated_counts(bench)
    readings = [Reading(name="natural_occupations", value=occupations, unit="electrons")]
    if (diagnostic := m_diagnostic(occupations, min(alpha, beta), abs(alpha - beta))) is not None:
        readings.append(Reading(name="M", value=diagnostic))
    blocks = solver.t2 if isinstance(solver.t2, tuple) else (solver.t2,)
    largest = max(float(np.abs(block).max()) for block in blocks if block.size)
    return (*readings, Reading(name="mp2_largest_t2", value=largest))


def natural_occupations(solver: Any, reference: Any, frozen: int) -> tuple[float, ...]:
    """Eigenvalues of the spin-summed density, largest first; the fullest, the frozen core, are left out."""
    density = solver.make_rdm1()
    if isinstance(density, tuple):
        alpha, beta = np.asarray(reference.mo_coeff)
        turn = alpha.T @ reference.get_ovlp() @ beta
        density = density[0] + turn @ density[1] @ turn.T
    return tuple(float(n) for n in np.linalg.eigvalsh(density)[::-1][frozen:])


def m_diagnostic(occupations: tuple[float, ...], doubly: int, singly: int) -> float | None:
    """(2 - n_DONO + sum |n_SOMO - 1| + n_UNO) / 2; None where a kind of orbital that it needs is lacking.

    DONO is the doubly occupied orbital whose occupation departs most from 2, UNO the empty one that departs
    most from 0.
    """
    pairs, singles, empty = (
        occupations[:doubly],
        occupations[doubly : doubly + singly],
        occupations[doubly + singly :],
    )
    if not pairs or not empty:
        return None
    return (2 - min(pairs) + sum(abs(n - 1) for n in singles) + max(empty)) / 2


OCCUPATIONS = Family(
    after="MP2",
    names=("natural_occupations", "M", "mp2_largest_t2"),
    citation="O. Tishchenko, J. Zheng and D. G. Truhlar, J. Chem. Theory Comput. 4, 1208 (2008)",
    measure=measure,
)
