"""The one table of conversions: CODATA 2022 (NIST, https://physics.nist.gov/constants)."""

from typing import Literal, get_args

ANGSTROM_PER_BOHR = 0.529177210544
JOULE_PER_HARTREE = 4.3597447222060e-18
AVOGADRO = 6.02214076e23
KILOJOULE_PER_KILOCALORIE = 4.184  # thermochemical calorie, exact by definition

EnergyUnit = Literal["kJ/mol", "kcal/mol", "eV", "cm-1", "hartree"]
ENERGY_UNITS: tuple[EnergyUnit, ...] = get_args(EnergyUnit)

KJ_PER_HARTREE = JOULE_PER_HARTREE * AVOGADRO / 1000
PER_HARTREE: dict[EnergyUnit, float] = {
    "kJ/mol": KJ_PER_HARTREE,
    "kcal/mol": KJ_PER_HARTREE / KILOJOULE_PER_KILOCALORIE,
    "eV": 27.211386245981,
    "cm-1": 219474.63136314,
    "hartree": 1.0,
}


def from_hartree(energy: float, unit: EnergyUnit) -> float:
    """An energy in hartree, expressed in `unit`."""
    return energy * PER_HARTREE[unit]


def to_hartree(energy: float, unit: EnergyUnit) -> float:
    """An energy in `unit`, expressed in hartree."""
    return energy / PER_HARTREE[unit]


def convert(energy: float, source: EnergyUnit, target: EnergyUnit) -> float:
    """An energy in `source`, expressed in `target`."""
    return from_hartree(to_hartree(energy, source), target)
