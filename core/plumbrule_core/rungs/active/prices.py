"""What the rungs of an active space cost; its size is known where the user set it, else it is guessed.

The factors are in units of the machine's own matrix multiplication, fitted as in `rungs.costs`.
"""

from plumbrule_core.documents.plan import Forecast, Machine
from plumbrule_core.rungs.active.counts import (
    determinants,
    exact_memory_mb,
    exact_operations,
)
from plumbrule_core.rungs.costs import PROGRAM_MB, TRANSFORM, forecast_of
from plumbrule_core.rungs.protocol import Size

PRODUCTS, WASTE = 60, 4.0
"""Products of Hamiltonian and vector in an exact solution, its survey of three states included, and how much
slower one is than a large matrix product (own, 109 thousand determinants of NH2/6-31G)."""
PRODUCTS_IN_A_STEP = 30
"""The same in a macro iteration, which starts warm."""
GUESSED_OCCUPIED = GUESSED_VIRTUAL = 5
"""Active orbitals on either side of the gap where the space is yet to be proposed."""
GUESSED_MB = 1750.0
"""Set aside then: half of what 14 electrons in 14 orbitals need; a chain may use twice its forecast."""
MACRO_ITERATIONS = 15
USUAL_BOND_DIMENSION, ENGINE_MB = 500, 400.0
SWEEPS = 5e9
"""Operations per orbital cubed at that bond dimension: 10 orbitals take a few minutes on one core."""
MOST_OPERATIONS = 1e24
"""Beyond this, millions of years, a forecast says nothing more."""


def space_guessed(size: Size) -> tuple[int, int, int]:
    """Active orbitals, alpha and beta electrons: as many as a proposal usually has."""
    if size.active is not None:
        return size.active
    occupied, virtual = min(size.occupied, GUESSED_OCCUPIED), min(size.virtual, GUESSED_VIRTUAL)
    return occupied + virtual, occupied, occupied


def exact_forecast(
    orbitals: int, alpha: int, beta: int, size: Size, machine: Machine, known: bool = False
) -> Forecast:
    """One exact diagonalisation and the integrals it needs; surveys and spin penalties included."""
    products = min(PRODUCTS, 2 * determinants(orbitals, alpha, beta))
    diagonal = products * WASTE * exact_operations(orbitals, alpha, beta)
    operations = min(diagonal + transformation(orbitals, size), MOST_OPERATIONS)
    memory = PROGRAM_MB + min(1e-6 * size.functions**4, 0.3 * machine.memory_mb)
    memory += exact_memory_mb(orbitals, alpha, beta)
    found = forecast_of(operations, machine, memory, low=0.3, high=3.0)
    return found if known else _guess_where_proposed(found, size)


def optimised_forecast(size: Size, machine: Machine) -> Forecast:
    """CASSCF: each macro iteration transforms integrals and diagonalises a few times."""
    orbitals, alpha, beta = space_guessed(size)
    filled, n = size.frozen + size.occupied + orbitals, size.functions
    diagonal = WASTE * PRODUCTS_IN_A_STEP * exact_operations(orbitals, alpha, beta)
    transform = TRANSFORM * n**3 * filled * orbitals + 300.0 * n**3 * min(n, 150)
    operations = min(MACRO_ITERATIONS * (diagonal + transform), MOST_OPERATIONS)
    memory = PROGRAM_MB + min(1e-6 * n**4, 0.3 * machine.memory_mb)
    memory += exact_memory_mb(orbitals, alpha, beta) + 8e-6 * 3 * n**2 * (filled**2 + orbitals**2)
    return _guess_where_proposed(forecast_of(operations, machine, memory, low=0.2, high=5.0), size)


def renormalised_forecast(size: Size, machine: Machine) -> Forecast:
    """DMRG at its usual bond dimension: its cost grows with the cube of the orbitals, the square of that."""
    orbitals, _, _ = space_guessed(size)
    operations = SWEEPS * orbitals**3 + transformation(orbitals, size)
    memory = PROGRAM_MB + ENGINE_MB + 24e-6 * (USUAL_BOND_DIMENSION * orbitals) ** 2
    return _guess_where_proposed(forecast_of(operations, machine, memory, low=0.2, high=5.0), size)


def perturbed_forecast(size: Size, machine: Machine) -> Forecast:
    """NEVPT2: densities of three active electrons, and integrals with two active or two filled orbitals."""
    orbitals, alpha, beta = space_guessed(size)
    filled, n = size.frozen + size.occupied, size.functions
    densities = 50.0 * determinants(orbitals, alpha, beta) * orbitals**6 / 10 + 200.0 * orbitals**9
    operations = min(densities + TRANSFORM * n**4 * (filled + orbitals), MOST_OPERATIONS)
    memory = PROGRAM_MB + perturbed_memory_mb(orbitals, filled, n)
    return _guess_where_proposed(forecast_of(operations, machine, memory, low=0.2, high=5.0), size)


def perturbed_memory_mb(orbitals: int, filled: int, functions: int) -> float:
    """Peak memory of NEVPT2: four arrays of six and one of eight active indices, and the integrals."""
    integrals = functions**2 * orbitals * (orbitals + filled) * 2 + (filled * functions) ** 2
    return 8e-6 * (8 * orbitals**6 + orbitals**8 / 8 + integrals)


def transformation(orbitals: int, size: Size) -> float:
    """Operations of the integrals of the active orbitals, with a field of the filled ones."""
    n = size.functions
    return TRANSFORM * n**4 * orbitals / 2 + 300.0 * n**3 * min(n, 150)


def _guess_where_proposed(forecast: Forecast, size: Size) -> Forecast:
    if size.active is not None:
        return forecast
    wider = {"seconds_low": 0.3 * forecast.seconds_low, "seconds_high": 3 * forecast.seconds_high}
    memory = max(forecast.memory_mb, GUESSED_MB)
    return forecast.model_copy(update={**wider, "memory_mb": memory, "sure": "a guess"})
