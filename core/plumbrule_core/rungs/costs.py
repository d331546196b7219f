"""What the forecasts share: operation counts become seconds with factors that were measured.

The factors stand in units of the machine's own matrix multiplication, so that a faster machine forecasts
faster. They were fitted to ethanol/cc-pVDZ, water/cc-pVTZ and O2/cc-pVTZ on one core at 0.026 s per 10^9
operations, PySCF 2.14 (a CCSD iteration 5.4e-10 s, (T) 3.9e-10 s, times o^2 v^4 and o^3 v^4). The
field was fitted with its stability analysis to ethanol/cc-pVDZ (1.2 s) and CO2/cc-pVTZ (1.8 s).
"""

from plumbrule_core.documents.plan import Forecast, Machine
from plumbrule_core.rungs.protocol import Size

PROGRAM_MB = 180.0
"""Interpreter and libraries before anything is computed."""
FIELD, TRANSFORM, AMPLITUDES, TRIPLES, PAIRS = 1300.0, 20.0, 22.0, 18.0, 45.0
"""Operations per n^4 (a whole field), n^5, o^2 v^4 (an iteration), o^3 v^4 and o n^4."""
SPARSE_FROM = 150
"""Functions from which most integrals of a field are screened away, so that its cost grows with n^3."""


def forecast_of(
    operations: float,
    machine: Machine,
    memory_mb: float,
    *,
    disk_mb: float = 0.0,
    low: float = 0.6,
    high: float = 2.0,
) -> Forecast:
    """Seconds from a number of operations, with a range as wide as the counts have been seen to miss."""
    seconds = 0.05 + 1e-9 * operations * machine.seconds_per_gigaflop / speed_up(machine.cores)
    return Forecast(
        seconds=seconds,
        seconds_low=low * seconds,
        seconds_high=high * seconds,
        memory_mb=memory_mb,
        disk_mb=disk_mb,
    )


def speed_up(cores: int) -> float:
    """How much faster several cores are than one: 80 % of each further core (common practice, no source)."""
    return 1 + 0.8 * (max(cores, 1) - 1)


def field_forecast(size: Size, machine: Machine, grid_points: int = 0) -> Forecast:
    """A field with its stability analysis; several guesses and two spins where the shell is open."""
    n = size.functions
    operations = FIELD * n**3 * min(n, SPARSE_FROM) + 150 * grid_points * n * min(n, SPARSE_FROM)
    whole_mb = 1e-6 * n**4 + 200e-6 * n**2
    memory = PROGRAM_MB + min(whole_mb, 0.3 * machine.memory_mb)
    return forecast_of(operations * (2.5 if size.unrestricted else 1), machine, memory, low=0.3, high=3.0)


def perturbation_forecast(size: Size, machine: Machine) -> Forecast:
    """MP2: the integrals with two occupied and two virtual indices."""
    o, v, n, spins = size.occupied, size.virtual, size.functions, 2 if size.unrestricted else 1
    amplitudes_mb = 8e-6 * (o * v) ** 2 * (3 if size.unrestricted else 1)
    memory = PROGRAM_MB + 3 * amplitudes_mb + min(1e-6 * n**4, 0.3 * machine.memory_mb)
    return forecast_of(spins * PAIRS * o * n**4, machine, memory, disk_mb=amplitudes_mb)


def iterated_forecast(size: Size, machine: Machine, iterations: int) -> Forecast:
    """CISD or CCSD: the whole transformation, then iterations; hard cases take many more."""
    o, v, n = size.occupied, size.virtual, size.functions
    spins, fitted = (2.5 if size.unrestricted else 1), (2 if size.density_fitting else 1)
    transform = TRANSFORM * n**5 * (5 if size.unrestricted else 1)
    operations = transform + iterations * AMPLITUDES * spins * fitted * o**2 * v**4
    memory, disk = integral_memory(size, machine)
    return forecast_of(operations, machine, memory, disk_mb=disk, high=2.5)


def triples_forecast(size: Size, machine: Machine) -> Forecast:
    """(T), once CCSD is there."""
    o, v, spins = size.occupied, size.virtual, 5 if size.unrestricted else 1
    memory, disk = integral_memory(size, machine)
    return forecast_of(spins * TRIPLES * o**3 * v**4, machine, memory, disk_mb=disk)


def integral_memory(size: Size, machine: Machine) -> tuple[float, float]:
    """Peak memory and scratch disk of coupled cluster, in MB.

    Where n^4 numbers fit into half of the machine everything stays in memory; else the integrals go to disk,
    and memory holds the amplitudes and buffers.
    """
    o, v, n = size.occupied, size.virtual, size.functions
    blocks = 3 if size.unrestricted else 1
    amplitudes_mb = 8e-6 * (o * v) ** 2 * blocks
    integrals_mb = 8e-6 * blocks * (v**4 / 4 + o * v**3 / 2 + 3 * (o * v) ** 2)
    transformed_mb = 8e-6 * (n**4 + n**4 / 4)
    if not size.density_fitting and transformed_mb + integrals_mb < 0.5 * machine.memory_mb:
        return PROGRAM_MB + 1.1 * transformed_mb + integrals_mb + 10 * amplitudes_mb, 12 * amplitudes_mb
    return PROGRAM_MB + 1000 + 14 * amplitudes_mb, integrals_mb + 12 * amplitudes_mb
