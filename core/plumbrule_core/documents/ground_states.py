"""Ground spin states: proposed where the user did not say."""

from collections import Counter
from collections.abc import Sequence

from plumbrule_core.documents.species import Atom, hill, lowest_multiplicity
from plumbrule_core.elements import ELEMENTS

SMALL_HIGH_SPIN = {"CH2": 3, "HN": 3, "O2": 3, "OS": 3, "S2": 3, "B2": 3, "HP": 3, "BN": 3}
"""Small neutral molecules whose ground state is a triplet (spectroscopy, from memory)."""


def ground_multiplicity(atoms: Sequence[Atom], charge: int) -> int:
    """The multiplicity to propose: that of the atom or of a known small triplet, else the lowest."""
    symbols = [atom.symbol for atom in atoms]
    if charge == 0 and len(atoms) == 1:
        return ELEMENTS[symbols[0]].ground_multiplicity
    known = SMALL_HIGH_SPIN.get(hill(Counter(symbols))) if charge == 0 else None
    return known or lowest_multiplicity(symbols, charge)
