"""How well a geometry is known, read from what the species says of its origin."""

from typing import Literal

from plumbrule_core.documents.species import Species

Origin = Literal["atom", "optimised", "force field", "cut", "unknown"]

_GOOD = (
    "optimi",
    "relaxed",
    "experiment",
    "measured",
    "published",
    "ccsd",
    "mp2",
    "b3lyp",
    "dft",
    "reference geometry",
)
_BUILT = ("smiles", "force field", "mmff", "uff", "built", "drawn")


def origin_of(species: Species) -> Origin:
    """The kind of origin; an atom has no geometry to get wrong."""
    said = species.origin.lower()
    if len(species.atoms) == 1:
        return "atom"
    if said.startswith("cut from"):
        return "cut"
    if any(word in said for word in _BUILT):
        return "force field"
    if any(word in said for word in _GOOD) and "not " not in said:
        return "optimised"
    return "unknown"
