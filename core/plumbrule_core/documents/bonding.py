"""Which atoms are bonded, by distance alone: for display, checks and cutting, never for a calculation."""

import math
from collections.abc import Iterable, Sequence

from plumbrule_core.documents.species import Atom
from plumbrule_core.elements import ELEMENTS

BOND_TOLERANCE = 1.3
"""A bond is shorter than this many times the sum of covalent radii (common practice, no source)."""

Bond = tuple[int, int]


def distance(a: Atom, b: Atom) -> float:
    """The distance of two atoms in angstrom."""
    return math.dist((a.x, a.y, a.z), (b.x, b.y, b.z))


def normal_length(a: Atom, b: Atom) -> float:
    """The sum of covalent radii in angstrom."""
    return ELEMENTS[a.symbol].covalent_radius + ELEMENTS[b.symbol].covalent_radius


def bonds(atoms: Sequence[Atom], tolerance: float = BOND_TOLERANCE) -> tuple[Bond, ...]:
    """Pairs of bonded atoms, numbered from 0, the smaller number first."""
    return tuple(
        (i, j)
        for j in range(len(atoms))
        for i in range(j)
        if distance(atoms[i], atoms[j]) < tolerance * normal_length(atoms[i], atoms[j])
    )


def pieces(count: int, links: Iterable[Bond]) -> tuple[tuple[int, ...], ...]:
    """The connected pieces of `count` atoms, each a sorted tuple of atom numbers from 0."""
    home = list(range(count))
    for i, j in links:
        old, new = home[j], home[i]
        home = [new if place == old else place for place in home]
    found: dict[int, list[int]] = {}
    for atom, place in enumerate(home):
        found.setdefault(place, []).append(atom)
    return tuple(tuple(piece) for piece in found.values())
