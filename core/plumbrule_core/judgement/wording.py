"""How numbers and names are put into sentences."""

import math
from collections.abc import Iterable

from plumbrule_core.units import EnergyUnit, from_hartree


def bar(size: float) -> str:
    """An uncertainty with as many digits as it deserves: two below 10, none after the point above."""
    if size <= 0 or not math.isfinite(size):
        return "0"
    places = 1 - math.floor(math.log10(size))
    return f"{size:.{max(0, places)}f}" if size < 10 else f"{size:.0f}"


def amount(hartree: float, unit: EnergyUnit) -> str:
    """The size of an energy in the user's unit, as `6.3 kJ/mol`."""
    return f"{bar(abs(from_hartree(hartree, unit)))} {unit}"


def in_unit(size: float, unit: EnergyUnit) -> str:
    """A size already in the user's unit, as `6.3 kJ/mol`."""
    return f"{bar(abs(size))} {unit}"


def listed(names: Iterable[str]) -> str:
    """`a, b and c`."""
    *first, last = [*names] or [""]
    return f"{', '.join(first)} and {last}" if first else last
