"""What of a source can be looked up: for readers to whom a note of the program to itself says nothing."""

import re

_YEAR = re.compile(r"\b(?:19|20)\d\d\b")
_DATABASES = ("NIST",)


def cited(text: str) -> str:
    """The parts of a source, which semicolons divide, that cite something published.

    A citation names its year, or a public database; rules of thumb, own measurements and remarks as
    `arithmetic` or `from memory` are left out. Empty where nothing is cited.
    """
    parts = (part.strip() for part in text.split(";"))
    return "; ".join(part for part in parts if _is_citation(part))


def _is_citation(part: str) -> bool:
    noted = "from memory" in part or "no source" in part
    return not noted and (bool(_YEAR.search(part)) or any(name in part for name in _DATABASES))
