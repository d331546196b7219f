"""How an active space divides the orbitals: inactive, active, virtual; checked in words before anything runs."""

from dataclasses import dataclass

import numpy as np

from plumbrule_core.documents.active_space import Space
from plumbrule_core.documents.species import spin_words
from plumbrule_core.errors import PlumbruleError
from plumbrule_core.rungs.active.shared_orbitals import SharedOrbitals, shared_orbitals
from plumbrule_core.rungs.protocol import Given

HALF_FILLED = 0.5
"""An inactive orbital must hold two electrons, within this much (as UHF natural orbitals may)."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Division:
    """`coefficients` (functions, orbitals): first the inactive, then the active, then the virtual orbitals."""

    space: Space
    coefficients: np.ndarray
    inactive: int
    electrons: tuple[int, int]
    """Active electrons of the two spins, the majority first."""
    words: str
    """Which orbitals these are."""

    @property
    def active(self) -> int:
        """The number of active orbitals."""
        return len(self.space.orbitals)

    @property
    def active_block(self) -> slice:
        """The columns of the active orbitals."""
        return slice(self.inactive, self.inactive + self.active)


def division_of(given: Given) -> Division:
    """The orbitals of the reference divided by the space on the bench; raises PlumbruleError."""
    space = given.bench.space
    if space is None:
        raise PlumbruleError("no active space has been chosen, and this method works in one")
    orbitals = shared_orbitals(given.bench)
    electrons = active_electrons(space, given.spec.species.unpaired, given.spec.species.name)
    chosen = [number - 1 for number in space.orbitals]
    _check_numbers(chosen, orbitals, space)
    rest = [k for k in range(len(orbitals.occupations)) if k not in set(chosen)]
    inactive = _inactive(rest, orbitals, given.bench.molecule.nelectron - space.electrons, space)
    order = [*inactive, *sorted(chosen), *(k for k in rest if k not in set(inactive))]
    return Division(
        space=space,
        coefficients=orbitals.coefficients[:, order],
        inactive=len(inactive),
        electrons=electrons,
        words=orbitals.words,
    )


def active_electrons(space: Space, unpaired: int, name: str) -> tuple[int, int]:
    """Alpha and beta electrons of the space; raises PlumbruleError where the spin state does not fit."""
    alpha, left_over = divmod(space.electrons + unpaired, 2)
    beta, size = space.electrons - alpha, len(space.orbitals)
    if left_over:
        raise PlumbruleError(
            f"{space.electrons} active electrons cannot make {name} a {spin_words(unpaired + 1)}: choose one "
            "electron more or fewer"
        )
    if beta < 0 or alpha > size:
        raise PlumbruleError(
            f"the space {space.label} is too small to make {name} a {spin_words(unpaired + 1)}: choose at least "
            f"{max(unpaired, 1)} electrons and {max(unpaired, alpha)} orbitals"
        )
    return alpha, beta


def _check_numbers(chosen: list[int], orbitals: SharedOrbitals, space: Space) -> None:
    count = len(orbitals.occupations)
    beyond = [k + 1 for k in chosen if k >= count]
    if beyond or len(set(chosen)) < len(chosen):
        what = f"orbital {beyond[0]}, but there are {count}" if beyond else "one orbital twice"
        raise PlumbruleError(f"the active space {space.label} names {what}; number them from 1 to {count}")


def _inactive(rest: list[int], orbitals: SharedOrbitals, electrons: int, space: Space) -> list[int]:
    pairs, left_over = divmod(electrons, 2)
    if electrons < 0 or left_over:
        raise PlumbruleError(
            f"with {space.electrons} active electrons, {electrons} are left for the inactive orbitals; they "
            "must be paired: choose one active electron more or fewer"
        )
    fullest = sorted(rest, key=lambda k: (-round(float(orbitals.occupations[k]), 2), k))[:pairs]
    halves = [k + 1 for k in fullest if orbitals.occupations[k] < 2 - HALF_FILLED]
    left_out = [k + 1 for k in rest if k not in set(fullest) and orbitals.occupations[k] > HALF_FILLED]
    if len(fullest) < pairs or halves or left_out:
        where = ", ".join(map(str, sorted({*halves, *left_out}))) or "none"
        raise PlumbruleError(
            f"the active space {space.label} with orbitals {', '.join(map(str, space.orbitals))} does not fit "
            f"the reference: its electrons do not come out right at orbital {where}. Put every half-filled "
            "orbital into the space, and count two electrons for each full one and one for each half-filled one"
        )
    return sorted(fullest)
