"""Orbitals that both spins share, numbered as the reference numbers its own.

RHF and ROHF have them. Of a UHF reference the natural orbitals are taken (P. Pulay and T. P. Hamilton, J. Chem.
Phys. 88, 4926 (1988)): those that are full or empty are made canonical among themselves, and each gets the
number of the alpha orbital that it resembles most.
"""

from dataclasses import dataclass
from typing import Any

import numpy as np

from plumbrule_core.errors import PlumbruleError
from plumbrule_core.rungs.protocol import Bench

FULL, EMPTY = 1.98, 0.02
"""Natural occupations from which an orbital counts as full or empty: common practice, no source."""


@dataclass(frozen=True, slots=True, kw_only=True)
class SharedOrbitals:
    """`coefficients` (functions, orbitals) and `occupations` (orbitals,) between 0 and 2."""

    coefficients: np.ndarray
    occupations: np.ndarray
    words: str
    """What they are, for the report."""


def shared_orbitals(bench: Bench) -> SharedOrbitals:
    """The orbitals of the reference as far as both spins share them; raises PlumbruleError without HF."""
    field = bench.mean_field
    if field is None:
        raise PlumbruleError(
            "Hartree-Fock has not been computed, and an active space is made of its orbitals"
        )
    if field.istype("UHF"):
        return _natural(field)
    kind = "ROHF" if field.istype("ROHF") else "RHF"
    return SharedOrbitals(
        coefficients=np.asarray(field.mo_coeff),
        occupations=np.asarray(field.mo_occ, dtype=float),
        words=f"{kind} canonical orbitals",
    )


def restricted_field(bench: Bench) -> Any:
    """A restricted mean field for the library's integrals; its own orbitals are not meant to be used."""
    field = bench.mean_field
    return field.to_rhf() if field.istype("UHF") else field


def _natural(field: Any) -> SharedOrbitals:
    overlap, alpha = field.get_ovlp(), np.asarray(field.mo_coeff[0])
    density, fock = (np.asarray(m) for m in (field.make_rdm1(), field.get_fock()))
    half = overlap @ alpha
    occupations, turn = np.linalg.eigh(half.T @ density.sum(axis=0) @ half)
    occupations, turn = occupations[::-1], turn[:, ::-1]
    mean_fock = alpha.T @ fock.mean(axis=0) @ alpha
    for block in (occupations > FULL, occupations < EMPTY):
        if block.any():
            inside = turn[:, block]
            turn[:, block] = inside @ np.linalg.eigh(inside.T @ mean_fock @ inside)[1]
    # The occupation of an orbital that was turned within its block is an expectation value.
    occupations = np.einsum("pr,pq,qr->r", turn, half.T @ density.sum(axis=0) @ half, turn)
    order = _numbered(turn, occupations)
    return SharedOrbitals(
        coefficients=alpha @ turn[:, order],
        occupations=np.clip(occupations[order], 0, 2),
        words="UHF natural orbitals, numbered after the alpha orbitals",
    )


def _numbered(turn: np.ndarray, occupations: np.ndarray) -> np.ndarray:
    """Which natural orbital takes each alpha orbital's place; of equals the fuller one comes first."""
    from scipy.optimize import linear_sum_assignment

    size = len(occupations)
    fuller_first = 1e-3 * np.outer(np.arange(size)[::-1] / size, occupations)
    return np.asarray(linear_sum_assignment(turn**2 + fuller_first, maximize=True)[1])
