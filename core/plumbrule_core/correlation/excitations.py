"""Singles and doubles of the reference determinant as occupation strings, with the signs they carry.

A string is an integer whose bit p says whether orbital p holds an electron of that spin. A determinant is the
product of alpha creations in orbital order and then beta creations in orbital order, as in PySCF. The sign of
an excited string is that of the operators a+ i, or a+ b+ j i for i < j and a < b, on the reference string.
"""

from dataclasses import dataclass
from itertools import combinations

import numpy as np
from numpy.typing import NDArray

Strings = NDArray[np.int64]
MAX_ORBITALS = 62
"""More do not fit a string of 64 bits with a sign."""


@dataclass(frozen=True, slots=True)
class Excited:
    """Excited strings with their signs: `holes` and `particles` (k, level) say what was moved."""

    strings: Strings
    signs: NDArray[np.float64]
    holes: NDArray[np.int64]
    particles: NDArray[np.int64]


def reference_string(electrons: int) -> int:
    """The string that fills the first orbitals."""
    return (1 << electrons) - 1


def excited(electrons: int, orbitals: int, level: int) -> Excited:
    """All `level`-fold excitations of the reference string, holes slowest, each ascending."""
    holes = list(combinations(range(electrons), level))
    particles = list(combinations(range(electrons, orbitals), level))
    pairs = [(hole, particle) for hole in holes for particle in particles]
    strings, signs = np.zeros(len(pairs), dtype=np.int64), np.ones(len(pairs))
    for k, (hole, particle) in enumerate(pairs):
        strings[k], signs[k] = _excite(reference_string(electrons), hole, particle)
    shape = (len(pairs), level)
    return Excited(
        strings=strings,
        signs=signs,
        holes=np.array([hole for hole, _ in pairs], dtype=np.int64).reshape(shape),
        particles=np.array([particle for _, particle in pairs], dtype=np.int64).reshape(shape),
    )


def _excite(string: int, holes: tuple[int, ...], particles: tuple[int, ...]) -> tuple[int, float]:
    sign = 1.0
    for hole, particle in zip(reversed(holes), reversed(particles), strict=True):
        low, high = min(hole, particle), max(hole, particle)
        between = string >> (low + 1) & ((1 << (high - low - 1)) - 1)
        sign *= -1.0 if between.bit_count() % 2 else 1.0
        string = string ^ (1 << hole) ^ (1 << particle)
    return string, sign


def occupied(string: int) -> tuple[int, ...]:
    """The orbitals a string fills, ascending, numbered from 0."""
    return tuple(p for p in range(int(string).bit_length()) if string >> p & 1)
