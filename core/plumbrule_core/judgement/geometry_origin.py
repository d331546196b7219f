"""How well a geometry is known, read from what the species says of its origin."""

import re
from typing import Literal

from plumbrule_core.documents.species import Species

Origin = Literal["atom", "optimised", "force field", "cut", "unknown"]

_BUILT = re.compile(r"\b(smiles|force field|mmff\w*|uff|built|drawn)\b")
_GOOD = re.compile(r"\b(optimi[sz]ed|relaxed|experimental|measured|published|minimum)\b")
_DENIED = re.compile(r"\b(not|never) (optimi[sz]ed|relaxed)\b")


def origin_of(species: Species) -> Origin:
    """The kind of origin; an atom has no geometry to get wrong."""
    said = species.origin.lower()
    if len(species.atoms) == 1:
        return "atom"
    if said.startswith("cut from"):
        return "cut"
    if _GOOD.search(said) and not _DENIED.search(said):
        return "optimised"
    return "force field" if _BUILT.search(said) else "unknown"
