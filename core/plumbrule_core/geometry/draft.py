"""What every reader hands over: drafts of species, or all faulty lines at once."""

import math
import re
from dataclasses import dataclass, field

from plumbrule_core.documents.species import Atom
from plumbrule_core.elements import ELEMENTS
from plumbrule_core.errors import Unreadable

MOST_FAULTS = 10
"""A refusal names this many faults and counts the rest."""
MOST_ATOMS = 500
LARGEST_COORDINATE = 1e4
SERIAL = "0123456789_"
"""What may follow a symbol in a label such as `C12`."""
HEAVY_HYDROGEN = ("D", "T")
GHOSTS = ("X", "XX", "BQ", "GH", "GHOST", "Q", "DU", "DUMMY", "LP", "*")
BEYOND = ("Fr", "Ra", "Ac", "Th", "Pa", "U", "Np", "Pu", "Am", "Cm", "Bk", "Cf", "Es", "Fm", "Md", "No", "Lr")
BY_NUMBER = {element.number: symbol for symbol, element in ELEMENTS.items()}


@dataclass(frozen=True, slots=True, kw_only=True)
class Draft:
    """A species as a file has it: charge and multiplicity are None where the file does not say."""

    atoms: tuple[Atom, ...]
    charge: int | None = None
    multiplicity: int | None = None
    title: str = ""
    notes: tuple[str, ...] = ()
    """What was done to the file's words on the way in, for the origin: `D read as H`."""


@dataclass(slots=True)
class Faulty:
    """Collects what is wrong place by place, so that all of it can be said at once."""

    said: list[str] = field(default_factory=list)

    def add(self, where: int | str, says: str) -> None:
        """One fault of a line (numbered from 1) or of a place that has a name of its own."""
        self.said.append(f"line {where}: {says}" if isinstance(where, int) else f"{where}: {says}")

    def refuse(self) -> None:
        """Raise Unreadable with the first ten faults where there are any."""
        if not self.said:
            return
        more = len(self.said) - MOST_FAULTS
        rest = [f"and {more} more {'fault' if more == 1 else 'faults'}"] if more > 0 else []
        raise Unreadable("\n".join(self.said[:MOST_FAULTS] + rest))


def symbol_of(label: str) -> str:
    """The element that a label (`C`, `c`, `C12`, `D`) or an atomic number means.

    Raises ValueError with a sentence.
    """
    if label.isascii() and label.isdigit():
        return _by_number(label)
    bare = label.rstrip(SERIAL)
    symbol = bare.capitalize()
    if symbol in ELEMENTS:
        return symbol
    if symbol in HEAVY_HYDROGEN:
        return "H"
    raise ValueError(_why_not(label, bare))


def _by_number(label: str) -> str:
    number = int(label[:6])
    if number in BY_NUMBER:
        return BY_NUMBER[number]
    if number == 0:
        raise ValueError(_why_not(label, "X"))
    raise ValueError(f"atomic number {label[:20]} is not known; 1 (H) to 86 (Rn) are")


def _why_not(label: str, bare: str) -> str:
    shown = label[:20]
    if bare.upper() in GHOSTS or re.match(r"(?i)gh|bq|@|x-|x:", label):
        return (
            f"'{shown}' is a ghost or dummy atom, which a species cannot hold; leave it out "
            "(a binding energy adds ghost functions by itself)"
        )
    if bare.capitalize() in BEYOND:
        return f"'{shown}' is heavier than radon, the last element that is known here"
    return f"'{shown}' is not an element; a symbol such as C or an atomic number such as 6 is"


def isotope_notes(labels: list[str]) -> tuple[str, ...]:
    """`D read as H` for each heavy hydrogen among the labels."""
    bare = {label.rstrip(SERIAL).upper() for label in labels}
    return tuple(f"{name} read as H" for name in HEAVY_HYDROGEN if name in bare)


def coordinate(text: str) -> float:
    """A coordinate in angstrom, from `0.117` or `1.17D-01`; raises ValueError with a sentence."""
    shown = text[:20]
    try:
        value = float(re.sub(r"(?<=[\d.])[dD](?=[+-]?\d)", "e", text))
    except ValueError:
        raise ValueError(f"'{shown}' is not a number; a coordinate in angstrom such as 0.117 is") from None
    return in_range(value)


def in_range(value: float) -> float:
    """The coordinate itself; raises ValueError with a sentence where it is not finite or absurdly far out."""
    if not math.isfinite(value) or abs(value) > LARGEST_COORDINATE:
        raise ValueError(f"{value:g} is not a coordinate; they lie between -10000 and 10000 angstrom")
    return value


def atom_of(fields: list[str]) -> Atom:
    """An atom from a label and three numbers; raises ValueError with a sentence naming all that is wrong."""
    if len(fields) < 4:
        raise ValueError(
            f"'{' '.join(fields)[:40]}' is not a whole atom; it needs a symbol and three coordinates"
        )
    wrong: list[str] = []
    symbol, position = "H", [0.0, 0.0, 0.0]
    try:
        symbol = symbol_of(fields[0])
    except ValueError as error:
        wrong.append(str(error))
    for axis in range(3):
        try:
            position[axis] = coordinate(fields[axis + 1])
        except ValueError as error:
            wrong.append(str(error))
    if wrong:
        raise ValueError("; ".join(wrong))
    return Atom(symbol=symbol, x=position[0], y=position[1], z=position[2])


def check_size(count: int) -> None:
    """Raise Unreadable where a species would have too many atoms."""
    if count > MOST_ATOMS:
        raise Unreadable(
            f"{count} atoms are more than a species may have ({MOST_ATOMS}); "
            "cut out the part that the question is about"
        )
