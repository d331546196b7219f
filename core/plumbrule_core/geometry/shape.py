"""Measures of shape for the checks before a run; atoms are numbered from 0, lengths in angstrom."""

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np

from plumbrule_core.documents.bonding import bonds, distance, normal_length, pieces
from plumbrule_core.documents.species import Atom, Species
from plumbrule_core.elements import ELEMENTS
from plumbrule_core.geometry.valence import free_valences, likely_orders, neighbours, usual_length
from plumbrule_core.units import ANGSTROM_PER_BOHR

CLASH_SHARE = 0.5
"""Two atoms nearer than this share of the sum of covalent radii clash (common practice, no source).

The shortest multiple bonds between metals keep 0.6.
"""
CLASH_DISTANCE = 0.4
"""Angstrom; no bond is as short (H2, the shortest, has 0.74)."""
BOHR_SHARES = (1.45, 2.5)
"""The typical nearest distance over the normal one where bohr were taken for angstrom.

Arithmetic: 1.89 times 0.77 (triple bonds) to 1.3 (F2 by a force field).
"""
BOHR_SHORTEST_SHARE = 1.35
"""Nothing in such a molecule is nearer than this (arithmetic; multiple metal bonds aside)."""
STRETCHED_SHARE = 1.4
"""A bond over this many times its normal length is stretched (common practice, no source)."""
PARTED_SHARE = 2.2
"""Atoms more than this many normal lengths apart are no bond any more (common practice, no source)."""
TWIST_LIMIT = 30.0
"""Degrees; a double bond twisted further needs an active space (common practice, no source)."""
DOUBLE_BOND_SHARE = 0.93
"""Bonds shorter than this share of the single-bond length are double: C=C 1.34 and 1.40 of 1.52, not 1.47."""
LINEAR_ANGLE = 160.0
"""Degrees; beyond it a neighbour lies so nearly on the bond's axis that it spans no plane."""


@dataclass(frozen=True, slots=True)
class Pair:
    """Two atoms, their distance, and the distance that would be normal for them."""

    first: int
    second: int
    distance: float
    normal: float

    @property
    def share(self) -> float:
        """The distance in normal lengths."""
        return self.distance / self.normal


@dataclass(frozen=True, slots=True)
class Twist:
    """A double bond and the angle in degrees (0 to 90) between the planes at its two ends."""

    first: int
    second: int
    angle: float


def clashes(species: Species) -> tuple[Pair, ...]:
    """Pairs of atoms nearer than any bond of theirs can be."""
    lengths, normals = _distances(species.atoms)
    near = np.triu(lengths < np.maximum(CLASH_DISTANCE, CLASH_SHARE * normals), k=1)
    return tuple(
        Pair(int(i), int(j), float(lengths[i, j]), float(normals[i, j])) for i, j in np.argwhere(near)
    )


def looks_like_bohr(species: Species) -> bool:
    """Whether every distance is as if coordinates in bohr had been taken for angstrom.

    A molecule with every bond stretched alike looks the same: it is a question, not a statement.
    """
    if len(species.atoms) < 2:
        return False
    lengths, normals = _distances(species.atoms)
    np.fill_diagonal(lengths, np.inf)
    nearest = (lengths / normals).min(axis=1)
    low, high = BOHR_SHARES
    return bool(nearest.min() > BOHR_SHORTEST_SHARE and low < np.median(nearest) < high)


def in_bohr_as_angstrom(species: Species) -> Species:
    """The species with its numbers taken as bohr and converted to angstrom."""
    atoms = tuple(
        Atom(symbol=a.symbol, x=a.x * ANGSTROM_PER_BOHR, y=a.y * ANGSTROM_PER_BOHR, z=a.z * ANGSTROM_PER_BOHR)
        for a in species.atoms
    )
    origin = f"{species.origin}; taken as bohr, converted to angstrom".removeprefix("; ")
    return species.model_copy(update={"atoms": atoms, "origin": origin})


def stretched_bonds(species: Species) -> tuple[Pair, ...]:
    """Bonds over 1.4 times their normal length, and parted atoms within 2.2 times that both lack a bond.

    The normal length is that of the highest bond order the two atoms can have: N-N at 2 angstrom in N2 is a
    triple bond stretched to 1.85 times.
    """
    return tuple(p for p in _likely_bonds(species) if STRETCHED_SHARE < p.share < PARTED_SHARE)


def parted_bonds(species: Species) -> tuple[Pair, ...]:
    """Pairs of atoms in two pieces that both lack a bond, and lack it beyond 2.2 normal lengths.

    H2 at 3 angstrom: its halves lie 4 times their normal length apart, and each still lacks its bond.
    """
    pairs = tuple(_likely_bonds(species))
    whole = [(p.first, p.second) for p in pairs if p.share < PARTED_SHARE]
    piece_of = {at: piece for piece in pieces(len(species.atoms), whole) for at in piece}
    return tuple(p for p in pairs if p.share >= PARTED_SHARE and piece_of[p.first] is not piece_of[p.second])


def _likely_bonds(species: Species) -> Iterator[Pair]:
    """Bonds, and pairs that both lack one; normal is the length of the highest order they can have."""
    for (i, j), order in sorted(likely_orders(species.atoms).items()):
        a, b = species.atoms[i], species.atoms[j]
        yield Pair(i, j, distance(a, b), usual_length(a, b, order))


def twisted_double_bonds(species: Species) -> tuple[Twist, ...]:
    """Double bonds whose ends are turned against each other by more than 30 degrees.

    A bond is double where both ends lack a neighbour and it is short, or neither end has another atom to
    share with (ethylene twisted by 90 degrees and relaxed has the length of a single bond).
    """
    atoms = species.atoms
    links = bonds(atoms)
    around = neighbours(len(atoms), links)
    free = free_valences(atoms, around)
    twists = [
        Twist(i, j, angle)
        for i, j in links
        if _is_double(atoms, around, free, i, j)
        and (angle := _twist(atoms, around, i, j)) is not None
        and angle > TWIST_LIMIT
    ]
    return tuple(twists)


def _distances(atoms: Sequence[Atom]) -> tuple[np.ndarray, np.ndarray]:
    """The distance of each two atoms and the sum of their covalent radii, atoms by atoms, in angstrom."""
    places = np.array([(a.x, a.y, a.z) for a in atoms])
    radii = np.array([ELEMENTS[a.symbol].covalent_radius for a in atoms])
    return np.linalg.norm(places[:, None] - places[None, :], axis=2), radii[:, None] + radii[None, :]


def _is_double(
    atoms: Sequence[Atom], around: Sequence[Sequence[int]], free: Sequence[int], i: int, j: int
) -> bool:
    length = distance(atoms[i], atoms[j])
    if not (free[i] and free[j]) or length < CLASH_DISTANCE:
        return False
    if length < DOUBLE_BOND_SHARE * normal_length(atoms[i], atoms[j]):
        return True
    return not any(free[other] for end, far in ((i, j), (j, i)) for other in around[end] if other != far)


def _twist(atoms: Sequence[Atom], around: Sequence[Sequence[int]], i: int, j: int) -> float | None:
    places = np.array([(a.x, a.y, a.z) for a in atoms])
    axis = places[j] - places[i]
    axis /= np.linalg.norm(axis)
    first, second = (_across(places, around[end], end, far, axis) for end, far in ((i, j), (j, i)))
    if first is None or second is None:
        return None
    return math.degrees(math.acos(min(1.0, abs(float(first @ second)))))


def _across(
    places: np.ndarray, near: Sequence[int], end: int, far: int, axis: np.ndarray
) -> np.ndarray | None:
    """The direction across the bond in which an end spreads; None where it has no plane."""
    others = [other for other in near if other != far]
    if len(others) not in (1, 2):
        return None
    spread = places[others[0]] - places[others[1] if len(others) == 2 else end]
    across = spread - (spread @ axis) * axis
    size = float(np.linalg.norm(across))
    on_the_axis = math.sin(math.radians(LINEAR_ANGLE)) * float(np.linalg.norm(spread))
    return across / size if size > max(on_the_axis, 1e-6) else None
