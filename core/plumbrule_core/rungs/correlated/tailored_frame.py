"""Where an active space lies in the orbitals that coupled cluster is solved in.

The space is numbered in orbitals of its own (`Bench.orbitals`), coupled cluster runs in the canonical or
semicanonical ones whose integrals CCSD and (T) share. Both describe the same determinant, so the amplitudes
of one are those of the other, turned. Where they do not (a restricted determinant beside UHF, or a solution
that keeps a symmetry which a lower one breaks), coupled cluster starts from the determinant that the space is
numbered in, and its integrals are made anew.
"""

from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from plumbrule_core.correlation.tailored import Seat, Seats, seat
from plumbrule_core.documents.active_space import Space
from plumbrule_core.errors import PlumbruleError
from plumbrule_core.rungs.correlated.reference import correlated_reference, is_unrestricted, semicanonical
from plumbrule_core.rungs.protocol import Bench, Given

SAME_DETERMINANT = 1e-6
"""Two determinants are the same where their occupied orbitals overlap to within this of one."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Frame:
    """`given` with the bench to run coupled cluster on; `numbered` (spins, functions, orbitals)."""

    given: Given
    numbered: np.ndarray
    shared: bool
    """Whether both spins share the numbered orbitals."""

    def seats(self, space: Space) -> Seats:
        """Where the active orbitals lie; raises PlumbruleError where the space does not fit the molecule."""
        check(space, self)
        reference = correlated_reference(self.given.bench)
        root = _root(reference.get_ovlp())
        found = [
            _seat(root @ correlated, root @ numbered, filled, self.given.bench.frozen, space)
            for correlated, numbered, filled in zip(
                _pair(reference.mo_coeff), self.numbered, reference.mol.nelec, strict=True
            )
        ]
        return Seats(alpha=found[0], beta=found[1])

    def core(self, space: Space) -> list[int]:
        """The filled orbitals outside the space, counted from 0."""
        filled = self.given.bench.mean_field.mol.nelec[1]
        return [k for k in range(filled) if k + 1 not in space.orbitals]


def frame_of(given: Given) -> Frame:
    """The frame of the orbitals on the bench, or of the reference's own where there are none."""
    bench = given.bench
    orbitals = bench.mean_field.mo_coeff if bench.orbitals is None else bench.orbitals
    numbered, shared = _pair(orbitals), np.ndim(orbitals) == 2
    if not _same_determinant(bench, numbered):
        if bench.tailored_bench is None:
            bench.tailored_bench = _bench_of_its_own(bench, numbered)
        given = replace(given, bench=bench.tailored_bench)
    return Frame(given=given, numbered=numbered, shared=shared)


def check(space: Space, frame: Frame) -> None:
    """Raise PlumbruleError where the space has orbitals that are not there, or other electrons than said."""
    bench = frame.given.bench
    count, (alpha, beta) = frame.numbered.shape[-1], bench.mean_field.mol.nelec
    name, numbers = frame.given.spec.species.name, space.orbitals
    if len(set(numbers)) < len(numbers) or any(number > count for number in numbers):
        raise PlumbruleError(
            f"the active space of {name} needs different orbitals from 1 to {count}, not {_list(numbers)}"
        )
    frozen = [number for number in numbers if number <= bench.frozen]
    if frozen:
        raise PlumbruleError(
            f"orbital {frozen[0]} of {name} is active and frozen core at once: leave it out of the active "
            "space, or correlate the core too"
        )
    lone = [number for number in range(beta + 1, alpha + 1) if number not in numbers]
    if lone and numbers:
        raise PlumbruleError(
            f"orbital {lone[0]} of {name} holds a single electron and has to be in the active space"
        )
    holds = sum(number <= alpha for number in numbers) + sum(number <= beta for number in numbers)
    if holds != space.electrons:
        raise PlumbruleError(
            f"orbitals {_list(numbers)} hold {holds} electrons in the reference of {name}, not "
            f"{space.electrons}: give as many active electrons as the orbitals hold"
        )


def _seat(correlated: np.ndarray, numbered: np.ndarray, filled: int, frozen: int, space: Space) -> Seat:
    active = np.array(sorted(space.orbitals), dtype=int) - 1
    occupied = int(np.count_nonzero(active < filled))
    found = seat(numbered[:, active], correlated[:, frozen:], (occupied, filled - frozen))
    if found is None:
        raise PlumbruleError(
            f"the orbitals of the active space {space.label} do not lie among the correlated ones: leave "
            "frozen core orbitals out of the space, or correlate the core too"
        )
    return found


def _same_determinant(bench: Bench, numbered: np.ndarray) -> bool:
    reference = correlated_reference(bench)
    overlap, coefficients = reference.get_ovlp(), _pair(reference.mo_coeff)
    for mine, theirs, filled in zip(numbered, coefficients, reference.mol.nelec, strict=True):
        common = mine[:, :filled].T @ overlap @ theirs[:, :filled]
        if filled and np.linalg.svd(common, compute_uv=False).min() < 1 - SAME_DETERMINANT:
            return False
    return True


def _bench_of_its_own(bench: Bench, numbered: np.ndarray) -> Bench:
    field = bench.mean_field.copy()
    occupations = np.zeros(numbered.shape[::2])
    for spin, filled in enumerate(field.mol.nelec):
        occupations[spin, :filled] = 1
    unrestricted = is_unrestricted(field)
    field.mo_coeff = np.array(numbered) if unrestricted else np.array(numbered[0])
    field.mo_occ = occupations if unrestricted else occupations.sum(axis=0)
    # Without this the library would take over the energy of the determinant that the field converged to.
    field.e_tot = field.energy_tot()
    open_shell = unrestricted or field.istype("ROHF")
    return Bench(
        molecule=bench.molecule,
        mean_field=bench.mean_field,
        correlated_reference=(semicanonical if open_shell else _canonical)(field, bench.frozen),
        frozen=bench.frozen,
    )


def _canonical(field: Any, frozen: int) -> Any:
    """A closed shell with its Fock matrix diagonal within the frozen, occupied and virtual orbitals."""
    fock, orbitals = field.get_fock(), np.array(field.mo_coeff)
    energies, filled = np.zeros(orbitals.shape[1]), int(field.mol.nelec[0])
    for block in (slice(0, frozen), slice(frozen, filled), slice(filled, None)):
        old = orbitals[:, block]
        energies[block], turn = np.linalg.eigh(old.T @ fock @ old)
        orbitals[:, block] = old @ turn
    field.mo_coeff, field.mo_energy, field.converged = orbitals, energies, True
    return field


def _pair(orbitals: object) -> np.ndarray:
    array = np.asarray(orbitals, dtype=float)
    return np.stack([array, array]) if array.ndim == 2 else array


def _root(overlap: np.ndarray) -> np.ndarray:
    """The square root of the overlap: in its basis orbitals are orthonormal columns."""
    values, vectors = np.linalg.eigh(overlap)
    return np.asarray((vectors * np.sqrt(np.clip(values, 0, None))) @ vectors.T)


def _list(numbers: tuple[int, ...]) -> str:
    return ", ".join(map(str, numbers))
