"""After CCSD: how large the amplitudes are.

T1, closed shells: Frobenius norm of the spatial singles amplitudes over the square root of the number of
correlated electrons (T. J. Lee and P. R. Taylor, Int. J. Quantum Chem. Symp. 23, 199 (1989)). Unrestricted:
the root of (|t1 alpha|^2 + |t1 beta|^2) / (2 N), which is the closed-shell value where the spins agree (after
D. Jayatilaka and T. J. Lee, J. Chem. Phys. 98, 9734 (1993), who derive that normalisation for open shells).

D1: largest singular value of the singles amplitudes (C. L. Janssen and I. M. B. Nielsen, Chem. Phys. Lett.
290, 423 (1998)); unrestricted: the larger of the two spins', which is that of the whole spin-orbital matrix
and the closed-shell value where the spins agree.

D2: closed shells alone, as it was defined: the largest 2-norm of the doubles amplitudes seen as a matrix from
one occupied (or virtual) index to the three others (I. M. B. Nielsen and C. L. Janssen, Chem. Phys. Lett.
310, 568 (1999)).
"""

from typing import Any

import numpy as np
from numpy.typing import NDArray

from plumbrule_core.documents.plan import TaskSpec
from plumbrule_core.documents.results import Reading
from plumbrule_core.judgement.readings.family import Family
from plumbrule_core.rungs.protocol import Bench

Array = NDArray[np.float64]


def measure(bench: Bench, spec: TaskSpec) -> tuple[Reading, ...]:
    """T1, D1, D2 and the largest amplitudes; nothing where CCSD had no pairs or did not converge."""
    solver = bench.coupled_cluster
    if solver is None or not solver.converged:
        return ()
    singles, doubles = _blocks(solver.t1), _blocks(solver.t2)
    readings = [
        Reading(name="T1", value=t1_diagnostic(singles)),
        Reading(name="D1", value=d1_diagnostic(singles)),
        Reading(name="largest_t1", value=largest(singles)),
        Reading(name="largest_t2", value=largest(doubles)),
    ]
    if len(doubles) == 1:
        readings.append(Reading(name="D2", value=d2_diagnostic(doubles[0])))
    return tuple(readings)


def t1_diagnostic(singles: tuple[Array, ...]) -> float:
    """One block of spatial amplitudes, or two of alpha and beta."""
    electrons = 2 * len(singles[0]) if len(singles) == 1 else sum(len(block) for block in singles)
    return float(np.sqrt(sum(np.sum(block**2) for block in singles) / len(singles) / electrons))


def d1_diagnostic(singles: tuple[Array, ...]) -> float:
    """The largest singular value of any block."""
    return max(float(np.linalg.norm(block, 2)) for block in singles if block.size)


def d2_diagnostic(doubles: Array) -> float:
    """The larger of the norms by occupied and by virtual index."""
    by_occupied = doubles.reshape(doubles.shape[0], -1)
    by_virtual = doubles.transpose(2, 0, 1, 3).reshape(doubles.shape[2], -1)
    return max(float(np.sqrt(np.linalg.eigvalsh(rows @ rows.T)[-1])) for rows in (by_occupied, by_virtual))


def largest(blocks: tuple[Array, ...]) -> float:
    """The largest absolute amplitude."""
    return max(float(np.abs(block).max()) for block in blocks if block.size)


def _blocks(amplitudes: Any) -> tuple[Array, ...]:
    return tuple(amplitudes) if isinstance(amplitudes, tuple | list) else (amplitudes,)


AMPLITUDES = Family(
    after="CCSD",
    names=("T1", "D1", "D2", "largest_t1", "largest_t2"),
    citation="T. J. Lee and P. R. Taylor, Int. J. Quantum Chem. Symp. 23, 199 (1989)",
    measure=measure,
)
