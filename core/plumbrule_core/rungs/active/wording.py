"""What a wave function of an active space is told as: weights, occupations, members without use."""

from collections.abc import Sequence

import numpy as np

from plumbrule_core.correlation.protocol import Solved
from plumbrule_core.units import KJ_PER_HARTREE

MOST = 1.98
LEAST = 0.02
"""Natural occupations of useful members of a space lie between: common practice, no source."""
SHOWN = 3
"""Determinants that are named."""
CLOSE = 0.01
"""Hartree: a second state nearer than this is named."""

CHANGED = 0.7
"""An overlap below this, half in weight, is another orbital: common practice, no source."""


def leading_words(leading: Sequence[tuple[float, Sequence[int], Sequence[int]]], orbitals: int) -> str:
    """`leading determinants: 93.1 % 222000, 2.0 % 220020` with 2, u(p), d(own) or 0 for each orbital."""
    named = [f"{100 * weight:.1f} % {_pattern(a, b, orbitals)}" for weight, a, b in leading[:SHOWN]]
    return f"leading determinants: {', '.join(named)}"


def _pattern(alpha: Sequence[int], beta: Sequence[int], orbitals: int) -> str:
    return "".join("0ud2"[(k in alpha) + 2 * (k in beta)] for k in range(orbitals))


def leading_of_vector(
    vector: np.ndarray, orbitals: int, electrons: tuple[int, int]
) -> tuple[tuple[float, tuple[int, ...], tuple[int, ...]], ...]:
    """The heaviest determinants of a vector in the library's order of strings: weight and filled orbitals."""
    from pyscf.fci import cistring

    weights = np.asarray(vector).reshape(-1) ** 2
    columns = cistring.num_strings(orbitals, electrons[1])
    found = []
    for place in np.argsort(weights)[::-1][:SHOWN]:
        strings = zip(electrons, divmod(int(place), columns), strict=True)
        alpha, beta = (int(cistring.addr2str(orbitals, count, address)) for count, address in strings)
        found.append((float(weights[place]), _filled(alpha, orbitals), _filled(beta, orbitals)))
    return tuple(found)


def _filled(string: int, orbitals: int) -> tuple[int, ...]:
    return tuple(k for k in range(orbitals) if string >> k & 1)


def natural_occupations(solved: Solved) -> np.ndarray:
    """Eigenvalues of the spin-summed density of the active orbitals, the fullest first."""
    return np.asarray(np.linalg.eigvalsh(solved.densities.sum(axis=0))[::-1])


def occupation_words(occupations: np.ndarray) -> tuple[str, ...]:
    """The natural occupations, and which members of the space have no use in it."""
    listed = ", ".join(f"{n:.3f}" for n in occupations)
    useless = [n for n in occupations if n > MOST or n < LEAST]
    if not useless:
        return (f"natural occupations of the active orbitals: {listed}",)
    many = "1 of them is" if len(useless) == 1 else f"{len(useless)} of them are"
    why = f"{many} above {MOST} or below {LEAST}, so nearly full or empty: a smaller space would do"
    return (f"natural occupations of the active orbitals: {listed}; {why}",)


def gap_words(gap: float | None) -> tuple[str, ...]:
    """A note where a second state of the same spin is so near that the two may change places."""
    if gap is None or gap > CLOSE:
        return ()
    return (
        f"another state of the same spin lies {gap * KJ_PER_HARTREE:.1f} kJ/mol above this one; the two may "
        "change places from one geometry or space to the next",
    )


def character_words(overlaps: np.ndarray) -> tuple[str, ...]:
    """A note where active orbitals left the space they started in; `overlaps` are singular values, 0 to 1."""
    changed = int(np.count_nonzero(overlaps < CHANGED))
    if not changed:
        return ()
    many = "1 active orbital has" if changed == 1 else f"{changed} active orbitals have"
    return (
        f"{many} changed character on the way (overlap with the start down to {overlaps.min():.2f}): look at "
        "the optimised orbitals before this space is compared with another",
    )
