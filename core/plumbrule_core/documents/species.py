"""A species: a molecule with a charge and a multiplicity."""

from collections import Counter
from collections.abc import Iterable
from typing import Annotated

from pydantic import Field, field_validator

from plumbrule_core.documents.base import Document, digest_of
from plumbrule_core.documents.faults import Fault
from plumbrule_core.elements import ELEMENTS

Coordinate = Annotated[float, Field(ge=-1e4, le=1e4)]
NAME_LENGTH = 80
Name = Annotated[str, Field(min_length=1, max_length=NAME_LENGTH)]


class Atom(Document):
    """One atom, in angstrom."""

    symbol: str
    x: Coordinate
    y: Coordinate
    z: Coordinate

    @field_validator("symbol")
    @classmethod
    def _known(cls, symbol: str) -> str:
        if symbol not in ELEMENTS:
            raise ValueError(f"'{symbol}' is not an element from H to Rn")
        return symbol


class Species(Document):
    """A molecule with a charge and a multiplicity (2S + 1); `origin` says where the geometry came from."""

    name: Name
    atoms: Annotated[tuple[Atom, ...], Field(min_length=1, max_length=500)]
    charge: Annotated[int, Field(ge=-20, le=20)] = 0
    multiplicity: Annotated[int, Field(ge=1, le=40)] = 1
    origin: str = ""
    assumed_multiplicity: int | None = None
    """The multiplicity that was taken because nobody gave one; None where it was given."""

    @property
    def electrons(self) -> int:
        """All electrons, whether or not a core potential replaces some."""
        return sum(ELEMENTS[atom.symbol].number for atom in self.atoms) - self.charge

    @property
    def unpaired(self) -> int:
        """Unpaired electrons that the multiplicity asks for."""
        return self.multiplicity - 1

    @property
    def assumption(self) -> str:
        """Where the multiplicity is an assumption, that it is one, and how to state it; else empty."""
        if self.assumed_multiplicity != self.multiplicity:
            return ""
        spin = SPIN_WORDS.get(self.multiplicity, f"multiplicity {self.multiplicity}")
        return (
            f"the multiplicity of {self.name} was not given, so {spin} was assumed "
            f"(multiplicity = {self.multiplicity})"
        )

    @property
    def counts(self) -> Counter[str]:
        """How many atoms of each element."""
        return Counter(atom.symbol for atom in self.atoms)

    @property
    def formula(self) -> str:
        """The formula in Hill order with the charge, as `C2H6O` or `H3N³⁺`."""
        return hill(self.counts) + charge_text(self.charge)

    @property
    def content(self) -> str:
        """The digest of what determines an energy: atoms, charge and multiplicity, not the name."""
        return digest_of(self.model_dump(mode="json", include={"atoms", "charge", "multiplicity"}))

    def faults(self) -> tuple[Fault, ...]:
        """Charge and multiplicity that cannot be."""
        where = f"species.{self.name}.multiplicity"
        if self.electrons < 0:
            return (
                Fault(
                    where=f"species.{self.name}.charge",
                    says=f"{self.formula} would have fewer than no electrons",
                ),
            )
        if self.unpaired > self.electrons:
            return (
                Fault(
                    where=where,
                    says=f"{self.unpaired} unpaired electrons, but there are only {self.electrons}",
                ),
            )
        if (self.electrons - self.unpaired) % 2:
            kind, fits = ("even", "odd (1, 3, 5)") if self.electrons % 2 == 0 else ("odd", "even (2, 4, 6)")
            says = (
                f"{self.multiplicity} does not fit: {self.formula} has {self.electrons} electrons, "
                f"an {kind} number, so the multiplicity must be {fits}"
            )
            return (Fault(where=where, says=says),)
        return ()


def hill(counts: Counter[str]) -> str:
    """A formula in Hill order: carbon, hydrogen, then the alphabet."""
    first = [symbol for symbol in ("C", "H") if symbol in counts] if "C" in counts else []
    order = first + sorted(set(counts) - set(first))
    return "".join(f"{symbol}{counts[symbol] if counts[symbol] > 1 else ''}" for symbol in order)


RAISED = str.maketrans("0123456789", "⁰¹²³⁴⁵⁶⁷⁸⁹")


def charge_text(charge: int) -> str:
    """`⁺`, `²⁻` or nothing: raised, so that it is not taken for a number of atoms."""
    if charge == 0:
        return ""
    size = str(abs(charge)).translate(RAISED) if abs(charge) > 1 else ""
    return f"{size}{'⁺' if charge > 0 else '⁻'}"


SPIN_WORDS = {1: "singlet", 2: "doublet", 3: "triplet", 4: "quartet", 5: "quintet", 6: "sextet", 7: "septet"}


def spin_words(multiplicity: int) -> str:
    """`triplet, 2 unpaired electrons`."""
    word = SPIN_WORDS.get(multiplicity, f"multiplicity {multiplicity}")
    unpaired = multiplicity - 1
    many = {0: "no unpaired electron", 1: "1 unpaired electron"}.get(
        unpaired, f"{unpaired} unpaired electrons"
    )
    return f"{word}, {many}"


def lowest_multiplicity(symbols: Iterable[str], charge: int) -> int:
    """The lowest multiplicity that fits the electron count (2 for an odd number, else 1)."""
    electrons = sum(ELEMENTS[symbol].number for symbol in symbols) - charge
    return 2 if electrons % 2 else 1
