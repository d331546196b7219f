"""Times, sizes and numbers in words."""

import math

from plumbrule_core.documents.amounts import memory
from plumbrule_core.documents.plan import Forecast
from plumbrule_core.units import EnergyUnit


def duration(seconds: float) -> str:
    """A time as people say it: `8 s`, `6 min`, `2.5 h`, `3 days`."""
    if seconds < 1:
        return "less than 1 s"
    if seconds < 90:
        return f"{seconds:.0f} s"
    if seconds < 90 * 60:
        return f"{seconds / 60:.0f} min"
    if seconds < 36 * 3600:
        return f"{seconds / 3600:.2g} h"
    return f"{seconds / 86400:.2g} days"


def forecast_words(forecast: Forecast) -> str:
    """`about 6 min, 1.2 GB`."""
    about = "" if forecast.seconds < 1 else "about "
    return f"{about}{duration(forecast.seconds)}, {memory(forecast.memory_mb)}"


def forecast_details(forecast: Forecast) -> str:
    """The range of a forecast and what it rests on."""
    disk = f"\nScratch space on disk: {memory(forecast.disk_mb)}" if forecast.disk_mb else ""
    return (
        f"Time: between {duration(forecast.seconds_low)} and {duration(forecast.seconds_high)} "
        f"({forecast.sure})\n"
        f"Memory at its peak: {memory(forecast.memory_mb)}{disk}"
    )


def number(value: float, unit: EnergyUnit, uncertainty: float | None = None) -> str:
    """A value to the digits that its uncertainty (or else its unit) leaves meaning: `941.2`, `-76.24131`."""
    if uncertainty:
        digits = max(0, min(8, 1 - math.floor(math.log10(uncertainty))))
    else:
        digits = {"hartree": 5, "eV": 3, "cm-1": 0}.get(unit, 1)
    return f"{value:.{digits}f}"
