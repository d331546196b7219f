"""After CISD: the weight of the reference determinant in the normalised wave function."""

import numpy as np

from plumbrule_core.documents.plan import TaskSpec
from plumbrule_core.documents.results import Reading
from plumbrule_core.judgement.readings.family import Family
from plumbrule_core.rungs.protocol import Bench


def measure(bench: Bench, spec: TaskSpec) -> tuple[Reading, ...]:
    """`c0_squared`; nothing where CISD had nothing to mix or did not converge."""
    solver = bench.configuration_interaction
    if solver is None or not solver.converged:
        return ()
    vector = solver.ci
    norm = (
        np.dot(vector, vector)
        if solver._dot is None
        else solver._dot(vector, vector, solver.nmo, solver.nocc)
    )
    return (Reading(name="c0_squared", value=float(vector[0] ** 2 / norm)),)


CONFIGURATION = Family(
    after="CISD",
    names=("c0_squared",),
    citation="T. J. Lee, J. E. Rice, G. E. Scuseria and H. F. Schaefer, Theor. Chim. Acta 75, 81 (1989)",
    measure=measure,
)
