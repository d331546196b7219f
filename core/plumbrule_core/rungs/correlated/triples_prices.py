"""What full triples and perturbative quadruples cost; all their arrays stay in memory."""

from plumbrule_core.documents.plan import Forecast, Machine
from plumbrule_core.rungs.correlated.extrapolation import SMALLEST_SPACE
from plumbrule_core.rungs.costs import PROGRAM_MB, TRANSFORM, forecast_of
from plumbrule_core.rungs.protocol import Size

ITERATIONS = 14
RESTRICTED, UNRESTRICTED = 20.0, 55.0
"""Operations per o^3 v^5 of an iteration; these and the next measured from 4 occupied and 14 virtual orbitals
to 4 and 36, and 5 and 21, with an error of a third."""
HANDLING = 25_000.0
"""Operations that the sorting of triples takes the time of, per o^3 v^3."""
QUADRUPLES, QUADRUPLES_HANDLING = 20.0, 1_200.0
"""Operations per o^4 v^5, and the same for o^4 v^4."""


def triples_memory_mb(occupied: int, virtual: int, unrestricted: bool) -> float:
    """MB for triples, their residual, copies for the extrapolation, and integrals with two dressed copies."""
    triples = (occupied + 2) ** 3 * virtual**3 / 6
    blocks = 4.0 if unrestricted else 1.0
    kept = 3 + 2 * SMALLEST_SPACE * 0.75
    working = occupied * (occupied + 1) / 2 * virtual**3 * 2
    integrals = 4 * (occupied + virtual) ** 4 * (3 if unrestricted else 1)
    return PROGRAM_MB + 8e-6 * (blocks * kept * triples + working + integrals)


def whole_triples_forecast(size: Size, machine: Machine) -> Forecast:
    """CCSDT: the transformation, and iterations with o^3 v^5 operations each."""
    o, v, n = size.occupied, size.virtual, size.functions
    each = UNRESTRICTED if size.unrestricted else RESTRICTED
    iteration = float(each * o**3 * v**5 + HANDLING * o**3 * v**3)
    operations = TRANSFORM * n**5 + ITERATIONS * iteration
    memory = triples_memory_mb(o, v, size.unrestricted)
    disk = 8e-6 * o**3 * v**3 / 6 * 7 * (4 if size.unrestricted else 1)
    return forecast_of(operations, machine, memory, disk_mb=disk, low=0.3, high=3.0)


def quadruples_forecast(size: Size, machine: Machine) -> Forecast:
    """(Q), once CCSDT is there: one pass over all quadruple excitations."""
    o, v = size.occupied, size.virtual
    operations = float(QUADRUPLES * o**4 * v**5 + QUADRUPLES_HANDLING * o**4 * v**4)
    memory = triples_memory_mb(o, v, size.unrestricted) + 8e-6 * 3 * v**4
    return forecast_of(operations, machine, memory, low=0.3, high=3.0)
