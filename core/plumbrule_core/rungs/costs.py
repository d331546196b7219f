"""What the forecasts share: operation counts become seconds with factors that were measured.

The factors stand in units of the machine's own matrix multiplication, so that a faster machine forecasts faster.
"""

from plumbrule_core.documents.plan import Forecast, Machine
from plumbrule_core.rungs.protocol import Size


def forecast_of(
    gigaflops: float, machine: Machine, memory_mb: float, *, low: float = 0.6, high: float = 2.0, disk_mb: float = 0.0
) -> Forecast:
    """Seconds from billions of operations, with a range as wide as the counts have been seen to miss."""
    seconds = gigaflops * machine.seconds_per_gigaflop / speed_up(machine.cores) + 0.05
    return Forecast(
        seconds=seconds,
        seconds_low=low * seconds,
        seconds_high=high * seconds,
        memory_mb=memory_mb,
        disk_mb=disk_mb,
    )


def speed_up(cores: int) -> float:
    """How much faster several cores are than one: 80 % of each core after the first (common practice, no source)."""
    return 1 + 0.8 * (max(cores, 1) - 1)


def field_forecast(size: Size, machine: Machine, per_iteration: float = 1.0) -> Forecast:
    """A self-consistent field."""
    n = size.functions
    gigaflops = 1e-9 * 40 * n**4 * per_iteration * (3 if size.unrestricted else 1)
    return forecast_of(gigaflops, machine, 150 + 8e-6 * n**4 / 8, low=0.4, high=3.0)


def perturbation_forecast(size: Size, machine: Machine) -> Forecast:
    """MP2."""
    o, n, spins = size.occupied, size.functions, 3 if size.unrestricted else 1
    gigaflops = 1e-9 * spins * o * n**4
    return forecast_of(gigaflops, machine, 150 + 16e-6 * spins * (o * size.virtual) ** 2)


def iterated_forecast(size: Size, machine: Machine, iterations: int) -> Forecast:
    """CISD or CCSD."""
    o, v, n, spins = size.occupied, size.virtual, size.functions, 3 if size.unrestricted else 1
    gigaflops = 1e-9 * spins * (iterations * o**2 * v**4 + n**5)
    return forecast_of(gigaflops, machine, 150 + 8e-6 * n**4)


def triples_forecast(size: Size, machine: Machine) -> Forecast:
    """(T)."""
    o, v, spins = size.occupied, size.virtual, 3 if size.unrestricted else 1
    return forecast_of(1e-9 * spins * o**3 * v**4, machine, 150 + 8e-6 * size.functions**4)
