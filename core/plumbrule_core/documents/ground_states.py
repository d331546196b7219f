"""Ground spin states: proposed where the user did not say."""

from collections import Counter
from collections.abc import Sequence

from plumbrule_core.documents.species import Atom, hill, lowest_multiplicity
from plumbrule_core.elements import ELEMENTS, Element

SMALL_HIGH_SPIN = {"CH2": 3, "HN": 3, "O2": 3, "OS": 3, "S2": 3, "B2": 3, "HP": 3, "BN": 3}
"""Small neutral molecules whose ground state is a triplet (spectroscopy, from memory)."""


def ground_multiplicity(atoms: Sequence[Atom], charge: int) -> int:
    """The multiplicity to propose: that of the atom or of a known small triplet, else the lowest."""
    symbols = [atom.symbol for atom in atoms]
    if len(atoms) == 1:
        return _atom(ELEMENTS[symbols[0]], charge)
    known = SMALL_HIGH_SPIN.get(hill(Counter(symbols))) if charge == 0 else None
    return known or lowest_multiplicity(symbols, charge)


def _atom(element: Element, charge: int) -> int:
    """A main-group ion has the ground state of the neutral atom with as many electrons (from memory)."""
    if charge == 0:
        return element.ground_multiplicity
    alike = [one for one in ELEMENTS.values() if one.number == element.number - charge]
    if alike and not element.is_transition_metal and not alike[0].is_transition_metal:
        return alike[0].ground_multiplicity
    return lowest_multiplicity([element.symbol], charge)
