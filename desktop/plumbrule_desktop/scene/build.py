"""A species as balls, sticks and labels: plain data that any painter can draw."""

import json
from dataclasses import dataclass
from functools import cache
from types import MappingProxyType

import numpy as np

from plumbrule_core.documents.bonding import bonds
from plumbrule_core.documents.species import Species
from plumbrule_core.elements import ELEMENTS
from plumbrule_resources import text

STICK_RADIUS = 0.11
"""Angstrom."""


@dataclass(frozen=True, slots=True)
class Scene:
    """Balls and sticks; lengths in angstrom, colours as 8-bit RGB."""

    centres: np.ndarray
    """(atoms, 3)"""
    radii: np.ndarray
    """(atoms,)"""
    colours: np.ndarray
    """(atoms, 3) uint8"""
    sticks: tuple[tuple[int, int], ...]
    """Pairs of bonded atoms, from 0."""
    symbols: tuple[str, ...]

    @property
    def middle(self) -> np.ndarray:
        """The point that the picture turns about."""
        if not len(self.centres):
            return np.zeros(3)
        return (self.centres.min(axis=0) + self.centres.max(axis=0)) / 2

    @property
    def reach(self) -> float:
        """The radius, in angstrom, of the sphere about the middle that holds everything."""
        if not len(self.centres):
            return 1.0
        return float((np.linalg.norm(self.centres - self.middle, axis=1) + self.radii).max())


def build(species: Species) -> Scene:
    """The scene of one species."""
    symbols = tuple(atom.symbol for atom in species.atoms)
    table = element_colours()
    return Scene(
        centres=np.array([(atom.x, atom.y, atom.z) for atom in species.atoms]),
        radii=np.array([ball_radius(symbol) for symbol in symbols]),
        colours=np.array([table[symbol] for symbol in symbols], dtype=np.uint8),
        sticks=bonds(species.atoms),
        symbols=symbols,
    )


def ball_radius(symbol: str) -> float:
    """The radius of a ball in angstrom: grows with the covalent radius, less for the largest."""
    return 0.16 + 0.28 * min(ELEMENTS[symbol].covalent_radius, 1.7)


@cache
def element_colours() -> MappingProxyType[str, tuple[int, int, int]]:
    """RGB of every element."""
    rows = json.loads(text("element_colours.json"))["colours"]
    return MappingProxyType({symbol: _rgb(value) for symbol, value in rows.items()})


def _rgb(value: str) -> tuple[int, int, int]:
    return int(value[1:3], 16), int(value[3:5], 16), int(value[5:7], 16)
