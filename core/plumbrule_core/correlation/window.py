"""Which orbitals are looked at: the valence ones in full, and a few that correlate them best.

Canonical virtual orbitals smear the valence ones over many of their number: in N2/cc-pVDZ the
antibonding sigma orbital has no more than 44 % of its weight in any of them, and in aug-cc-pVDZ even
the antibonding pi orbital of N2 has 57 %, that of ethene 35 %. The projection of the virtual orbitals
on a minimal basis parts them cleanly in every basis tried (its singular values are 1.00 or below 0.05),
so an active space is proposed in these orbitals:

1. occupied: canonical; 2. valence virtual: by that projection; 3. the few others that the pairs of
electrons occupy most, to second order; 4. the rest. Each block is canonical in itself and ordered by
its energies, so that a number means the same orbital in every basis set.

The projection: E. R. Sayfutyarova, Q. Sun, G. K.-L. Chan and G. Knizia, J. Chem. Theory Comput. 13,
4063 (2017), after G. Knizia, J. Chem. Theory Comput. 9, 4834 (2013).
"""

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise
from typing import Any, Literal

import numpy as np

from plumbrule_core.correlation.protocol import Array
from plumbrule_core.correlation.restricted import restricted_orbitals

Choice = Literal["canonical", "valence"]
VALENCE = 0.5
"""Weight in the minimal basis from which a virtual orbital counts as valence; none tried lies near it."""
OTHERS = 4
"""How many orbitals beside the valence ones are looked at, where there is room."""
SAME = 0.03
"""Relative difference within which two orbitals count as equal, so that none is parted from its like."""
FRONTIER = 2
"""Orbitals on either side of the gap that are looked at whatever the estimate says of them."""


@dataclass(frozen=True, slots=True, kw_only=True)
class OrbitalSet:
    """Orbitals shared by both spins, numbered from 1: filled ones first, then by block and energy
    (hartree)."""

    name: Choice
    coefficients: Array
    """(functions, orbitals)"""
    energies: Array
    core: int
    """How many of the lowest are cores of atoms."""
    alpha: int
    beta: int
    """How many of the lowest the reference fills, cores included."""
    valence: int
    """How many of the virtual ones, from the first, are valence orbitals."""
    others: int = 0
    """How many of the virtual ones after these correlate the pairs best."""

    @property
    def size(self) -> int:
        """How many orbitals there are."""
        return len(self.energies)

    def electrons(self, number: int) -> int:
        """How many electrons the reference has in the orbital with this number: 2, 1 or 0."""
        return int(number <= self.alpha) + int(number <= self.beta)

    def electrons_in(self, numbers: Sequence[int]) -> int:
        """How many electrons the reference has in these orbitals."""
        return sum(self.electrons(number) for number in numbers)

    def filled_outside(self, numbers: Sequence[int]) -> tuple[int, ...]:
        """Columns, from 0, of the doubly filled orbitals that are not among these."""
        return tuple(n - 1 for n in range(1, self.beta + 1) if n not in set(numbers))

    @property
    def candidates(self) -> tuple[int, ...]:
        """Valence orbitals, and the virtual ones that correlate them best."""
        return tuple(range(self.core + 1, min(self.alpha + self.valence + self.others, self.size) + 1))

    @property
    def full_valence(self) -> tuple[int, ...]:
        """Valence orbitals, occupied and virtual."""
        return tuple(range(self.core + 1, self.alpha + self.valence + 1))


@dataclass(frozen=True, slots=True, kw_only=True)
class Window:
    """The orbitals that are looked at, in their order."""

    orbitals: tuple[int, ...]
    """Numbers, from 1."""
    energies: Array
    """In hartree."""
    reference: tuple[int, ...]
    """Electrons that the reference determinant has in each: 2, 1 or 0."""
    valence: tuple[bool, ...]


def orbital_set(mean_field: Any, core: int, choice: Choice) -> OrbitalSet:
    """The orbitals of a converged field in which active spaces are numbered.

    `core`: how many of the lowest orbitals are cores of atoms. Raises PlumbruleError where restricted
    orbitals of an unrestricted field cannot be found.
    """
    field = restricted_orbitals(mean_field)
    alpha, beta = field.mol.nelec
    fock = _spin_average(field.get_fock(), field)
    filled = [
        _canonical(field.mo_coeff[:, a:b], fock) for a, b in ((0, core), (core, beta), (beta, alpha)) if a < b
    ]
    empty = _canonical(field.mo_coeff[:, alpha:], fock)
    valence, rest = _split(field, empty[1])
    if choice == "canonical":
        blocks, others = [*filled, empty], OTHERS
    else:
        occupied = np.hstack([block for _, block in filled])[:, core:]
        first, last, others = _correlating(field, occupied, empty, rest)
        blocks = [*filled, *(_canonical(block, fock) for block in (valence, first, last))]
    return OrbitalSet(
        name=choice,
        coefficients=np.hstack([block for _, block in blocks]),
        energies=np.concatenate([energies for energies, _ in blocks]),
        core=core,
        alpha=alpha,
        beta=beta,
        valence=valence.shape[1],
        others=min(others, rest.shape[1]),
    )


def window_of(orbitals: OrbitalSet, estimate: Array, most: int, include: Sequence[int] = ()) -> Window:
    """The window: about `most` orbitals.

    Where there are more candidates than that, those are taken whose estimated entropy (one for each
    candidate) is largest, none without its like. Single electrons, the orbitals next to the gap and
    those in `include` are always taken.
    """
    candidates = orbitals.candidates
    chosen = {n for n in candidates if _frontier(orbitals, n)} | set(include)
    order = np.argsort(-estimate, kind="stable")
    for group in alike(estimate[order]):
        members = {candidates[order[k]] for k in group}
        if len(chosen | members) > most:
            break
        chosen |= members
    numbers = tuple(sorted(chosen))
    return Window(
        orbitals=numbers,
        energies=orbitals.energies[[n - 1 for n in numbers]],
        reference=tuple(orbitals.electrons(n) for n in numbers),
        valence=tuple(n in orbitals.full_valence for n in numbers),
    )


def _frontier(orbitals: OrbitalSet, number: int) -> bool:
    return orbitals.beta - FRONTIER < number <= orbitals.alpha + FRONTIER


def alike(values: Array) -> tuple[range, ...]:
    """Runs of nearly equal values in a descending list: each value within 3 % of the one before."""
    cuts = [k for k in range(1, len(values)) if values[k] < (1 - SAME) * values[k - 1]]
    edges = [0, *cuts, len(values)]
    return tuple(range(a, b) for a, b in pairwise(edges) if a < b)


def _split(field: Any, empty: Array) -> tuple[Array, Array]:
    """Valence virtual orbitals and the rest of the virtual ones."""
    from pyscf import gto
    from pyscf.lo.iao import reference_mol

    minimal = reference_mol(field.mol, "minao")
    cross = empty.T @ gto.intor_cross("int1e_ovlp", field.mol, minimal)
    weight = cross @ np.linalg.solve(minimal.intor_symmetric("int1e_ovlp"), cross.T)
    values, turn = np.linalg.eigh(weight)
    valence = values > VALENCE
    return empty @ turn[:, valence], empty @ turn[:, ~valence]


def _correlating(
    field: Any, occupied: Array, empty: tuple[Array, Array], rest: Array
) -> tuple[Array, Array, int]:
    """Of the rest, those that the electrons of a pair occupy most to second order; the others; how many.

    Only pairs of electrons in one orbital are counted, for which exchange integrals are enough.
    """
    energies, virtual = empty
    if not rest.shape[1]:
        return rest, rest, 0
    fock = _spin_average(field.get_fock(), field)
    exchange = field.get_k(field.mol, np.einsum("pi,qi->ipq", occupied, occupied))
    density = np.zeros((len(energies), len(energies)))
    for column, matrix in zip(occupied.T, exchange, strict=True):
        pair = 2 * float(column @ fock @ column)
        amplitudes = virtual.T @ matrix @ virtual / (pair - energies[:, None] - energies[None, :])
        density += amplitudes @ amplitudes.T
    inside = virtual.T @ field.get_ovlp() @ rest
    occupations, turn = np.linalg.eigh(inside.T @ density @ inside)
    natural = rest @ turn[:, ::-1]
    ends = [group.stop for group in alike(np.maximum(occupations[::-1], 0)) if group.stop <= OTHERS]
    count = max(ends, default=0)
    return natural[:, :count], natural[:, count:], count


def _spin_average(fock: Any, field: Any) -> Array:
    if field.istype("ROHF") and hasattr(fock, "focka"):
        return np.asarray((fock.focka + fock.fockb) / 2)
    return np.asarray(fock)


def _canonical(block: Array, fock: Array) -> tuple[Array, Array]:
    energies, turn = np.linalg.eigh(block.T @ fock @ block)
    return energies, block @ turn
