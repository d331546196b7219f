"""How numbers and names are put into sentences."""

import math
from collections.abc import Iterable

from plumbrule_core.units import EnergyUnit, convert, from_hartree


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


def rough(kilojoules: float, unit: EnergyUnit) -> str:
    """A rule of thumb in kJ/mol, said in the user's unit: `40 kJ/mol`, `10 kcal/mol`."""
    return f"{_thumb(kilojoules, unit)} {unit}"


def rough_range(low: float, high: float, unit: EnergyUnit) -> str:
    """Two ends of a rule of thumb in kJ/mol, said in the user's unit: `10 to 40 kJ/mol`."""
    return f"{_thumb(low, unit)} to {_thumb(high, unit)} {unit}"


def _thumb(kilojoules: float, unit: EnergyUnit) -> str:
    """One digit that counts, two where the first is a 1: no rule of thumb holds more."""
    size = convert(kilojoules, "kJ/mol", unit)
    power = math.floor(math.log10(size))
    leading = size / 10.0**power
    digits = 1 - power if leading < 1.95 else -power
    return f"{round(size, digits):.{max(0, digits)}f}".removesuffix(".0")


def listed(names: Iterable[str]) -> str:
    """`a, b and c`."""
    *first, last = [*names] or [""]
    return f"{', '.join(first)} and {last}" if first else last
