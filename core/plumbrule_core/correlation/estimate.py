"""Entropies from first-order amplitudes: good enough to rank the orbitals of a wide window, never to
clear one.

They start from one determinant, and miss what lies in another: for ethylene twisted by 90 degrees the
largest of them is wrong by 0.7.
"""

import numpy as np

from plumbrule_core.correlation.entropies import orbital_entropies
from plumbrule_core.correlation.protocol import Array, Problem


def estimated_entropies(problem: Problem) -> Array:
    """Entropies (n,) of the normalised first-order wave function, in orbitals shared by both spins."""
    n, a, b = problem.size, problem.alpha, problem.beta
    up_energies, down_energies = _energies(problem)
    opposite = _amplitudes(problem.two[:a, a:, :b, b:], up_energies, down_energies, a, b) ** 2
    same_up = _same_spin(problem.two[:a, a:, :a, a:], up_energies, a)
    same_down = _same_spin(problem.two[:b, b:, :b, b:], down_energies, b)
    norm = 1 + opposite.sum() + (same_up.sum() + same_down.sum()) / 4
    left_up = opposite.sum((1, 2, 3)) + same_up.sum((1, 2, 3)) / 2
    left_down = opposite.sum((0, 1, 3)) + same_down.sum((1, 2, 3)) / 2
    entered_up = opposite.sum((0, 2, 3)) + same_up.sum((0, 2, 3)) / 2
    entered_down = opposite.sum((0, 1, 2)) + same_down.sum((0, 2, 3)) / 2
    up = np.concatenate([1 - left_up / norm, entered_up / norm])
    down = np.concatenate([1 - left_down / norm, entered_down / norm])
    both = np.zeros(n)
    both[:b] = 1 - (left_up[:b] + left_down - np.einsum("iaib->i", opposite[:b])) / norm
    both[b:a] = (entered_down[: a - b] - np.einsum("iaji->i", opposite[b:, :, :, : a - b])) / norm
    both[a:] = np.einsum("iaja->a", opposite[..., a - b :]) / norm
    return orbital_entropies(up, down, both)


def _energies(problem: Problem) -> tuple[Array, Array]:
    """Diagonals of the Fock matrices of the reference determinant, alpha and beta."""
    coulomb = np.einsum("iijj->ij", problem.two)
    exchange = np.einsum("ijji->ij", problem.two)
    a, b = problem.alpha, problem.beta
    common = np.diagonal(problem.one) + coulomb[:, :a].sum(axis=1) + coulomb[:, :b].sum(axis=1)
    return common - exchange[:, :a].sum(axis=1), common - exchange[:, :b].sum(axis=1)


def _amplitudes(repulsion: Array, first: Array, second: Array, a: int, b: int) -> Array:
    """Amplitudes (i, a, j, b), each that of two states by themselves, so that no small gap makes it
    diverge."""
    gap = (first[None, a:] - first[:a, None])[:, :, None, None] + (second[None, b:] - second[:b, None])
    gap = np.maximum(gap, 0)
    return np.asarray(-2 * repulsion / (gap + np.sqrt(gap**2 + 4 * repulsion**2) + 1e-12))


def _same_spin(repulsion: Array, energies: Array, filled: int) -> Array:
    """Squares of antisymmetric amplitudes (i, a, j, b); each determinant is counted four times."""
    return _amplitudes(repulsion - repulsion.transpose(0, 3, 2, 1), energies, energies, filled, filled) ** 2
