"""What the distances say about unsatisfied valences: for checks of shape, never for a calculation."""

from collections.abc import Sequence
from itertools import combinations

from plumbrule_core.documents.bonding import Bond, bonds, normal_length
from plumbrule_core.documents.species import Atom
from plumbrule_core.elements import ELEMENTS

VALENCE = {
    **dict.fromkeys(("He", "Ne", "Ar", "Kr", "Xe", "Rn"), 0),
    **dict.fromkeys(("H", "Li", "Na", "K", "Rb", "Cs", "F", "Cl", "Br", "I", "At"), 1),
    **dict.fromkeys(("Be", "Mg", "Ca", "Sr", "Ba", "O", "S", "Se", "Te", "Po"), 2),
    **dict.fromkeys(("B", "Al", "Ga", "In", "Tl", "N", "P", "As", "Sb", "Bi"), 3),
    **dict.fromkeys(("C", "Si", "Ge", "Sn", "Pb"), 4),
}
"""Bonds that a neutral main-group atom makes without expanding its shell (textbook valences)."""
METAL_VALENCE = 6
HIGHEST_ORDER = 3

MULTIPLE_BOND_RADII: dict[int, dict[str, float]] = {
    2: {"B": 0.78, "C": 0.67, "N": 0.60, "O": 0.57, "Si": 1.07, "P": 1.02, "S": 0.94},
    3: {"B": 0.73, "C": 0.60, "N": 0.54, "O": 0.53, "Si": 1.02, "P": 0.94, "S": 0.95},
}
"""Angstrom; Pyykkö and Atsumi 2009 (double), Pyykkö, Riedel and Patzschke 2005 (triple); from memory."""


SINGLE_BONDS_WITH_THEMSELVES = {"H": 0.741, "O": 1.464, "F": 1.412}
"""Angstrom; H2, F2 (Huber and Herzberg 1979) and H2O2, longer than the sum of radii; from memory."""


def neighbours(count: int, links: Sequence[Bond]) -> tuple[tuple[int, ...], ...]:
    """The bonded neighbours of each atom."""
    found: list[list[int]] = [[] for _ in range(count)]
    for i, j in links:
        found[i].append(j)
        found[j].append(i)
    return tuple(tuple(sorted(row)) for row in found)


def free_valences(atoms: Sequence[Atom], around: Sequence[Sequence[int]]) -> tuple[int, ...]:
    """Bonds that each atom could still make if every bond it has were single."""
    return tuple(
        max(0, VALENCE.get(atom.symbol, METAL_VALENCE) - len(near))
        for atom, near in zip(atoms, around, strict=True)
    )


def spare_valences(atoms: Sequence[Atom], around: Sequence[Sequence[int]]) -> tuple[int, ...]:
    """Bonds that each atom lacks even if its neighbours share all they have in multiple bonds.

    A terminal atom on one that has all its bonds already (oxygen on sulfur in SO2, on nitrogen in nitrate, or
    at the ends of ozone) is bound by a lone pair and lacks nothing; nor does one on a transition metal.
    """
    free = free_valences(atoms, around)
    return tuple(
        0 if _is_satisfied(atoms, around, free, at) else max(0, free[at] - sum(free[n] for n in around[at]))
        for at in range(len(atoms))
    )


def _is_satisfied(
    atoms: Sequence[Atom], around: Sequence[Sequence[int]], free: Sequence[int], at: int
) -> bool:
    if any(ELEMENTS[atoms[near].symbol].is_transition_metal for near in around[at]):
        return True
    if len(around[at]) != 1 or ELEMENTS[atoms[at].symbol].is_transition_metal:
        return False
    holder = around[at][0]
    return atoms[holder].symbol not in ("C", "H") and free[holder] == 0 and len(around[holder]) > 1


def usual_length(a: Atom, b: Atom, order: int) -> float:
    """The usual length of a bond of that order in angstrom; that of a single bond if no radius is known."""
    radii = MULTIPLE_BOND_RADII.get(order, {})
    if a.symbol in radii and b.symbol in radii:
        return radii[a.symbol] + radii[b.symbol]
    if a.symbol == b.symbol and a.symbol in SINGLE_BONDS_WITH_THEMSELVES:
        return SINGLE_BONDS_WITH_THEMSELVES[a.symbol]
    return normal_length(a, b)


def likely_orders(atoms: Sequence[Atom]) -> dict[Bond, int]:
    """The highest bond order that each close pair can have, and each distant pair in which both lack one.

    Pairs that are neither bonded nor lacking are absent.
    """
    links = bonds(atoms)
    around = neighbours(len(atoms), links)
    free, spare = free_valences(atoms, around), spare_valences(atoms, around)
    orders = {(i, j): min(HIGHEST_ORDER, 1 + min(free[i], free[j])) for i, j in links}
    lacking = [at for at in range(len(atoms)) if spare[at]]
    for pair in combinations(lacking, 2):
        orders.setdefault(pair, min(HIGHEST_ORDER, *(spare[at] for at in pair)))
    return orders
