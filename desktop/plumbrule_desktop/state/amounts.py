"""Energies as they are shown: with a true minus sign and the unit behind."""

from plumbrule_core.units import EnergyUnit
from plumbrule_desktop.state import wording

MINUS = "\u2212"


def unit_words(unit: str) -> str:
    """The unit as it is printed: `cm-1` with a raised exponent."""
    return unit.replace("cm-1", "cm\u207b\u00b9")


def number(value: float, unit: EnergyUnit, bar: float | None = None) -> str:
    """A value without its unit, as `−40.4`; a value that rounds to nothing has no sign."""
    text = wording.number(value, unit, bar)
    if not text.strip("-0."):
        text = text.removeprefix("-")
    return text.replace("-", MINUS)


def energy(value: float, unit: EnergyUnit, bar: float | None = None) -> str:
    """`−40.4 ± 6.3 kJ/mol`."""
    spread = f" \u00b1 {number(bar, unit, bar)}" if bar is not None else ""
    return f"{number(value, unit, bar)}{spread} {unit_words(unit)}"


def signed(value: float, unit: EnergyUnit) -> str:
    """`+3.1 kJ/mol`: a distance whose direction matters."""
    text = energy(value, unit)
    return text if text.startswith(MINUS) or not text.split(" ")[0].strip("0.") else f"+{text}"


def plain(text: str) -> str:
    """The same text with signs that every program can paste."""
    return text.replace(MINUS, "-").replace("\u00b1", "+/-").replace("cm\u207b\u00b9", "cm-1")
