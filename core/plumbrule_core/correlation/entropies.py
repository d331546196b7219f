"""Orbital entropies and mutual information: how strongly each orbital, and each pair, is tied to the rest.

s_i = -sum w ln w over the four occupations of a spatial orbital, in [0, ln 4]; I = s_i + s_j - s_ij, in
[0, 4 ln 2], without the factor 1/2 that some authors put before it. Natural logarithms.

Sources: O. Legeza and J. Solyom, Phys. Rev. B 68, 195116 (2003); J. Rissler, R. M. Noack and S. R. White,
Chem. Phys. 323, 519 (2006).
"""

from dataclasses import dataclass
from itertools import combinations, product

import numpy as np
from numpy.typing import NDArray

from plumbrule_core.correlation.excitations import Strings
from plumbrule_core.correlation.protocol import Array
from plumbrule_core.correlation.wave import Wave

MOST = float(np.log(4))
"""The largest entropy of a spatial orbital."""


def entropy(weights: Array) -> float:
    """-sum w ln w; weights that rounding pushed below zero count as zero."""
    positive = weights[weights > 0]
    return max(0.0, float(-(positive * np.log(positive)).sum()))


def orbital_entropies(up: Array, down: Array, both: Array) -> Array:
    """Entropies (n,) from <n_up>, <n_dn> and <n_up n_dn>, each (n,)."""
    weights = np.stack([1 - up - down + both, up - both, down - both, both])
    return np.array([entropy(column) for column in weights.T])


def mutual_information(entropies: Array, pair_entropies: Array) -> Array:
    """I (n, n) from s (n,) and s_ij (n, n); rounding below zero is cut off."""
    information = entropies[:, None] + entropies[None, :] - pair_entropies
    np.fill_diagonal(information, 0.0)
    return np.maximum(0.0, (information + information.T) / 2)


def profile_of(wave: Wave) -> tuple[Array, Array]:
    """Entropies (n,) and mutual information (n, n) of a wave function over strings."""
    singles = orbital_entropies(*_occupations(wave))
    pairs = np.zeros((wave.size, wave.size))
    padded = np.pad(wave.vector, ((0, 1), (0, 1)))
    for p, q in combinations(range(wave.size), 2):
        pairs[p, q] = pairs[q, p] = _pair_entropy(wave, padded, p, q)
    return singles, mutual_information(singles, pairs)


def _occupations(wave: Wave) -> tuple[Array, Array, Array]:
    weights = np.square(wave.vector)
    up, down = (_bits(strings, wave.size) for strings in (wave.alpha_strings, wave.beta_strings))
    return up @ weights.sum(axis=1), down @ weights.sum(axis=0), np.sum((up @ weights) * down, axis=1)


def _bits(strings: Strings, size: int) -> Array:
    return (strings[None, :] >> np.arange(size)[:, None] & 1).astype(float)


@dataclass(frozen=True, slots=True)
class _Class:
    """Strings with the same number of electrons in two orbitals: row per occupation, column per rest."""

    places: NDArray[np.int64]
    signs: Array


def _pair_entropy(wave: Wave, padded: Array, p: int, q: int) -> float:
    """The entropy of two orbitals; their density matrix falls into blocks by electrons of each spin.

    Within a block the electrons of the rest are equal in number, so that the only relative sign left is that
    of moving an electron of one spin past those of the same spin between the two orbitals.
    """
    spectra = []
    classes = (_classes(strings, p, q) for strings in (wave.alpha_strings, wave.beta_strings))
    for up, down in product(*classes):
        block = padded[up.places.ravel()][:, down.places.ravel()]
        block = block.reshape(*up.places.shape, *down.places.shape)
        block = block * up.signs[:, :, None, None] * down.signs[None, None]
        rows = block.transpose(0, 2, 1, 3).reshape(len(up.places) * len(down.places), -1)
        spectra.append(np.linalg.eigvalsh(rows @ rows.T))
    return entropy(np.concatenate(spectra))


def _classes(strings: Strings, p: int, q: int) -> tuple[_Class, ...]:
    """Neither orbital filled, one of the two, both; a place of -1 is the row of zeros of a padded vector."""
    low, high = strings >> p & 1, strings >> q & 1
    neither, both = (np.flatnonzero(low + high == count) for count in (0, 2))
    lower, upper = np.flatnonzero(low > high), np.flatnonzero(high > low)
    rest_lower, rest_upper = strings[lower] ^ (1 << p), strings[upper] ^ (1 << q)
    rests = np.union1d(rest_lower, rest_upper)
    places = np.full((2, len(rests)), -1, dtype=np.int64)
    places[0, np.searchsorted(rests, rest_lower)] = lower
    places[1, np.searchsorted(rests, rest_upper)] = upper
    between = np.bitwise_count(rests & ((1 << q) - (1 << (p + 1))))
    signs = np.stack([np.ones(len(rests)), np.where(between % 2, -1.0, 1.0)])
    alone = tuple(_Class(found[None], np.ones((1, len(found)))) for found in (neither, both))
    return tuple(found for found in (alone[0], _Class(places, signs), alone[1]) if found.places.size)
