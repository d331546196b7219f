"""Tailored coupled cluster: the amplitudes of an active space are put in, and the rest answers to them.

Amplitudes whose indices are all active come from the wave function of the active space, before the first
iteration and again after each one; all others are solved for as in CCSD (T. Kinoshita, O. Hino and R. J.
Bartlett, J. Chem. Phys. 123, 074106 (2005)). The triples see the active amplitudes as zero, and nothing else
is changed (D. I. Lyakh, V. F. Lotrich and R. J. Bartlett, Chem. Phys. Lett. 501, 166 (2011)).

Amplitudes are arrays where alpha and beta are alike (t1 (o, v) and t2 (o, o, v, v), the first pair of indices
alpha, the second beta), tuples (alpha, beta) and (aa, ab, bb) where they are not, as in the library.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from plumbrule_core.correlation.protocol import Array
from plumbrule_core.documents.active_space import Space

NOISE = 1e-8
"""Overlaps below this are rounding: the orbitals do not mix."""
INSIDE = 1e-6
"""An active orbital lies among the correlated ones where its projection is one to within this."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Seat:
    """The active orbitals of one spin in the correlated ones: `occupied` (o, oa), `virtual` (v, va)."""

    occupied: Array
    virtual: Array

    @property
    def open(self) -> bool:
        """Whether an excitation within the active space exists."""
        return bool(self.occupied.shape[1] and self.virtual.shape[1])


@dataclass(frozen=True, slots=True, kw_only=True)
class Seats:
    """The active orbitals of both spins."""

    alpha: Seat
    beta: Seat

    @property
    def open(self) -> bool:
        """Whether the active space holds more than the reference determinant."""
        return self.alpha.open or self.beta.open

    def impose(self, singles: Any, doubles: Any, active: Sequence[Array]) -> None:
        """Put the active amplitudes in the place of what stands there; the arrays are changed.

        `active` holds t1 and t2, or t1 of alpha and beta and t2 of aa, ab and bb.
        """
        for block, sides, target in zip(*self._blocks(singles, doubles), active, strict=True):
            _replace(block, target, sides)

    def clear(self, singles: Any, doubles: Any) -> None:
        """Set the amplitudes with all indices active to zero; the arrays are changed."""
        for block, sides in zip(*self._blocks(singles, doubles), strict=True):
            _replace(block, np.zeros([side.shape[1] for side in sides]), sides)

    def _blocks(self, singles: Any, doubles: Any) -> tuple[list[Array], list[tuple[Array, ...]]]:
        """Each block of amplitudes, and for each of its indices where the active orbitals lie."""
        (i, a), (j, b) = ((side.occupied, side.virtual) for side in (self.alpha, self.beta))
        if not isinstance(singles, tuple):
            return [singles, doubles], [(i, a), (i, i, a, a)]
        return [*singles, *doubles], [(i, a), (j, b), (i, i, a, a), (i, j, a, b), (j, j, b, b)]


@dataclass(frozen=True, slots=True, kw_only=True)
class Tailored:
    """What came out in one space; energies are total, in hartree.

    `energy` is None and `vector` empty where coupled cluster could not be tailored there, as `note` says.
    `vector` holds the amplitudes as the library packs them.
    """

    space: Space
    seats: Seats
    active_energy: float
    """Of the wave function of the active space alone (CASCI)."""
    c0_squared: float
    energy: float | None
    vector: Array
    converged: bool
    iterations: int
    note: str = ""


def seat(active: Array, correlated: Array, filled: tuple[int, int]) -> Seat | None:
    """How the active orbitals of one spin lie in the correlated ones; None where they do not lie within.

    `active` and `correlated` are coefficients in an orthonormal basis, occupied orbitals first; `filled` says
    how many of each are occupied. The orbitals may be turned against each other among the occupied and among
    the virtual ones, as semicanonical orbitals are.
    """
    mine, theirs = filled
    sides = (
        _inside(correlated[:, :theirs], active[:, :mine]),
        _inside(correlated[:, theirs:], active[:, mine:]),
    )
    return None if sides[0] is None or sides[1] is None else Seat(occupied=sides[0], virtual=sides[1])


def hold(solver: Any, seats: Seats, active: Sequence[Array]) -> None:
    """Make a coupled-cluster object of the library overwrite the active amplitudes after every update."""
    update = solver.update_amps

    def tailored_update(singles: Any, doubles: Any, integrals: Any) -> tuple[Any, Any]:
        singles, doubles = update(singles, doubles, integrals)
        seats.impose(singles, doubles, active)
        return singles, doubles

    solver.update_amps = tailored_update


def triples_energy(solver: Any, tailored: Tailored, integrals: Any) -> float:
    """The triples correction in hartree, with the active amplitudes set to zero and nothing else changed."""
    singles, doubles = solver.vector_to_amplitudes(np.array(tailored.vector))
    tailored.seats.clear(singles, doubles)
    return float(solver.ccsd_t(singles, doubles, integrals))


def _inside(many: Array, few: Array) -> Array | None:
    overlap = many.T @ few
    overlap[np.abs(overlap) < NOISE] = 0
    if not few.shape[1]:
        return overlap
    left, values, right = np.linalg.svd(overlap, full_matrices=False)
    if len(values) < few.shape[1] or values.min() < 1 - INSIDE:
        return None
    # What rounding left is polished away, so that an orbital that is the same is exactly the same.
    return np.where(overlap == 0, 0, left @ right)


def _replace(block: Array, target: Array, sides: Sequence[Array]) -> None:
    """Change only the part of `block` that lies in the active orbitals, in place."""
    if not target.size:
        return
    rows = [np.flatnonzero(side.any(axis=1)) for side in sides]
    inner = [side[kept] for side, kept in zip(sides, rows, strict=True)]
    where = np.ix_(*rows)
    part = block[where]
    change = target - _turned(part, inner)
    block[where] = part + _turned(change, [side.T for side in inner])


def _turned(block: Array, sides: Sequence[Array]) -> Array:
    for axis, side in enumerate(sides):
        block = np.moveaxis(np.tensordot(side, block, axes=(0, axis)), 0, axis)
    return block
