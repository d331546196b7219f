"""How well a geometry is known, read from what the species says of its origin."""

import re
from typing import Literal

from plumbrule_core.documents.species import Species

Origin = Literal["atom", "optimised", "force field", "cut", "unknown"]

_BUILT = re.compile(
    r"\b(smiles|force[ -]?field|mmff\w*|uff|gaff\d?|amber\w*|charmm\w*|opls\w*|dreiding"
    r"|built|drawn|sketch\w*)\b"
)
_WORK = r"(optimi[sz]\w*|relax\w*|minimum)"
_GOOD = re.compile(r"\b(optimi[sz]ed|relaxed|experimental|measured|published|minimum)\b")
_DENIED = re.compile(
    r"\b(not|never|before|to be|yet|will be|should be|must be|needs?|isn't|wasn't)\b"
    rf"[\w\s,-]{{0,30}}\b{_WORK}\b"
    rf"|\b(no|non|without)[ -](an? |any )?{_WORK}\b|\bun-?(optimi[sz]ed|relaxed)\b"
    r"|\b(optimi[sz]ed|relaxed)\b[\w\s,-]{0,20}\b(later|yet|pending)\b"
)
_FILE = re.compile(r"(\b(from|file) [^,;]*?|\S+)\.(xyz|mol2?|sdf|cml|pdb|json|txt|log|out|com|inp|toml)\b")
"""A file name, which says nothing about what is in it."""


def origin_of(species: Species) -> Origin:
    """The kind of origin; an atom has no geometry to get wrong.

    Words of a force field outrank every other, since its minimum is no minimum of the surface that is
    computed; the name of a file says nothing.
    """
    said = _FILE.sub(" ", species.origin.lower())
    if len(species.atoms) == 1:
        return "atom"
    if said.startswith("cut from"):
        return "cut"
    if _BUILT.search(said):
        return "force field"
    return "optimised" if _GOOD.search(said) and not _DENIED.search(said) else "unknown"
