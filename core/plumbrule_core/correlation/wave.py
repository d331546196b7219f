"""A wave function over alpha strings times beta strings: what full and selected CI have in common."""

from dataclasses import dataclass

import numpy as np

from plumbrule_core.correlation.excitations import Excited, Strings, excited, occupied, reference_string
from plumbrule_core.correlation.protocol import Array, Coefficients

SHOWN = 8
"""Leading determinants kept, at most."""
SHOWN_WEIGHT = 0.01
"""Determinants lighter than this are not leading ones."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Wave:
    """`vector` (alpha strings, beta strings), normalised, real; both lists of strings ascending."""

    alpha_strings: Strings
    beta_strings: Strings
    vector: Array
    size: int
    """The number of orbitals."""

    def at(self, alpha: Strings, beta: Strings) -> Array:
        """Coefficients (len(alpha), len(beta)); zero for strings that are not there."""
        rows, columns = _find(self.alpha_strings, alpha), _find(self.beta_strings, beta)
        found = self.vector[np.ix_(rows, columns)]
        return np.asarray(found * np.outer(rows >= 0, columns >= 0))


def _find(strings: Strings, wanted: Strings) -> Strings:
    """Places of `wanted` in the ascending `strings`; -1 where missing."""
    places = np.minimum(np.searchsorted(strings, wanted), len(strings) - 1)
    return np.where(strings[places] == wanted, places, -1)


def coefficients_of(wave: Wave, alpha: int, beta: int) -> Coefficients:
    """The coefficients of the reference, its singles and its doubles.

    They belong to the excitation operators a+ i and a+ b+ j i acting on the reference determinant.
    """
    up, down = excited(alpha, wave.size, 1), excited(beta, wave.size, 1)
    pairs_up, pairs_down = excited(alpha, wave.size, 2), excited(beta, wave.size, 2)
    first_up = np.array([reference_string(alpha)], dtype=np.int64)
    first_down = np.array([reference_string(beta)], dtype=np.int64)
    mixed = wave.at(up.strings, down.strings) * np.outer(up.signs, down.signs)
    return assembled(
        c0=float(wave.at(first_up, first_down)[0, 0]),
        singles=(
            wave.at(up.strings, first_down)[:, 0] * up.signs,
            wave.at(first_up, down.strings)[0] * down.signs,
        ),
        pairs=(
            wave.at(pairs_up.strings, first_down)[:, 0] * pairs_up.signs,
            wave.at(first_up, pairs_down.strings)[0] * pairs_down.signs,
        ),
        mixed=mixed,
        electrons=(alpha, beta),
        size=wave.size,
    )


def assembled(
    *,
    c0: float,
    singles: tuple[Array, Array],
    pairs: tuple[Array, Array],
    mixed: Array,
    electrons: tuple[int, int],
    size: int,
) -> Coefficients:
    """Blocks with their indices from flat lists in the order of `excitations.excited`; signs already in."""
    alpha, beta = electrons
    empty_alpha, empty_beta = size - alpha, size - beta
    return Coefficients(
        c0=c0,
        c1a=singles[0].reshape(alpha, empty_alpha),
        c1b=singles[1].reshape(beta, empty_beta),
        c2aa=_antisymmetric(pairs[0], excited(alpha, size, 2), alpha, size),
        c2ab=mixed.reshape(alpha, empty_alpha, beta, empty_beta).transpose(0, 2, 1, 3),
        c2bb=_antisymmetric(pairs[1], excited(beta, size, 2), beta, size),
    )


def _antisymmetric(values: Array, doubles: Excited, electrons: int, size: int) -> Array:
    block = np.zeros((electrons, electrons, size - electrons, size - electrons))
    (i, j), (a, b) = doubles.holes.T, doubles.particles.T - electrons
    block[i, j, a, b] = block[j, i, b, a] = values
    block[j, i, a, b] = block[i, j, b, a] = -values
    return block


def leading_of(wave: Wave) -> tuple[tuple[float, tuple[int, ...], tuple[int, ...]], ...]:
    """The heaviest determinants, at most `SHOWN`, heaviest first."""
    weights = np.square(wave.vector).ravel()
    count = min(SHOWN, weights.size)
    heaviest = np.argpartition(weights, -count)[-count:]
    ordered = heaviest[np.argsort(-weights[heaviest], kind="stable")]
    columns = len(wave.beta_strings)
    return tuple(
        (
            float(weights[k]),
            occupied(int(wave.alpha_strings[k // columns])),
            occupied(int(wave.beta_strings[k % columns])),
        )
        for k in ordered
        if weights[k] >= SHOWN_WEIGHT
    )
