"""`charge=1 multiplicity=2` in a comment line: read, written, and taken out of a title."""

import re

_STATED = re.compile(r"(?i)(?<![\w.])(charge|multiplicity)\s*=\s*\"?([^\s,;\"]*)\"?[,;]?")
_WHOLE = re.compile(r"([+-]?)(\d{1,4})(?:\.0*)?([+-]?)")
LONGEST_COMMENT = 2000
"""Characters in which a title is looked for."""
_ANY_KEY = re.compile(r"[\w.:-]+=(?:\"[^\"]*\"|'[^']*'|\{[^}]*\}|\S*)")


def stated(comment: str) -> dict[str, int]:
    """The charge and multiplicity that a comment states, the first of each.

    Raises ValueError with a sentence.
    """
    found: dict[str, int] = {}
    for key, value in _STATED.findall(comment):
        found.setdefault(key.lower(), _whole(key.lower(), value))
    return found


def _whole(key: str, text: str) -> int:
    match = _WHOLE.fullmatch(text)
    if match is None or (match[1] and match[3]):
        raise ValueError(f"{key}={text[:20]} is not a whole number; {key}=1 is")
    value = int(match[2]) * (-1 if "-" in (match[1], match[3]) else 1)
    low, high = (-20, 20) if key == "charge" else (1, 40)
    if not low <= value <= high:
        raise ValueError(f"{key}={value} cannot be; it lies between {low} and {high}")
    return value


def comment_for(charge: int, multiplicity: int, title: str) -> str:
    """The comment line that says the charge and multiplicity first, then the title."""
    return f"charge={charge} multiplicity={multiplicity} {one_line(title)}".rstrip()


def title_in(comment: str) -> str:
    """What is left of a comment without its `key=value` pairs, on one line."""
    return one_line(_ANY_KEY.sub(" ", _STATED.sub(" ", comment[:LONGEST_COMMENT])))


def one_line(text: str) -> str:
    """Text without control characters, its blanks run together."""
    return " ".join("".join(c if c.isprintable() else " " for c in text).split())
