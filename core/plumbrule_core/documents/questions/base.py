"""What every kind of question can say about itself."""

from abc import abstractmethod
from collections.abc import Mapping
from typing import Annotated, ClassVar

from pydantic import Field

from plumbrule_core.documents.base import Document
from plumbrule_core.documents.faults import Fault
from plumbrule_core.documents.species import Species
from plumbrule_core.units import EnergyUnit

Many = Mapping[str, Species]


class Part(Document):
    """One species of a question and how often its energy counts."""

    coefficient: float
    species: Species


class Clause(Document):
    """A piece of the question's sentence; `key` names what a click on it edits, empty for plain words."""

    text: str
    key: str = ""


class QuestionBase(Document):
    """A question: what the user wants to know, and how accurately."""

    built: ClassVar[bool] = True
    """False for a kind that can be read but not answered yet."""
    label: ClassVar[str]
    """What the question line calls the kind, as `bond energy`."""
    energy_class: ClassVar[str] = "closed-shell"
    """Which column of the basis-set error table fits: see `plumbrule_core.judgement.budget`."""

    within: Annotated[float, Field(gt=0)]
    unit: EnergyUnit = "kJ/mol"

    @abstractmethod
    def named(self) -> tuple[tuple[str, str], ...]:
        """The names of the species it stands on, each with the key it stands at (`terms.water`)."""

    @abstractmethod
    def parts(self, species: Many) -> tuple[Part, ...]:
        """The sum that answers the question; call it only where `faults` is empty."""

    @abstractmethod
    def subject(self, species: Many) -> tuple[Clause, ...]:
        """The middle of the sentence: what it is the energy of."""

    def faults(self, species: Many) -> tuple[Fault, ...]:
        """All that is wrong, in words, with the key; empty when it can be asked."""
        missing = tuple(
            Fault(
                where=f"question.{key}",
                says=f"there is no species named '{name}'; there is {_names(species)}",
            )
            for key, name in self.named()
            if name not in species
        )
        return missing or self.own_faults(species)

    def own_faults(self, species: Many) -> tuple[Fault, ...]:
        """Faults of this kind alone, once every named species exists."""
        return ()

    def sentence(self, species: Many) -> tuple[Clause, ...]:
        """The question line: `The bond energy of N-N in hydrazine, within 4 kJ/mol`."""
        return (
            Clause(text="The "),
            Clause(text=self.label, key="kind"),
            *self.subject(species),
            Clause(text=", within "),
            Clause(text=f"{self.within:g} {self.unit}", key="within"),
        )


def _names(species: Many) -> str:
    return ", ".join(sorted(species)) or "none yet"


def unbalanced(left: tuple[Species, ...], right: tuple[Species, ...], where: str) -> tuple[Fault, ...]:
    """Faults where two sides differ in atoms."""
    counts = [sum((one.counts for one in side), start=type(left[0].counts)()) for side in (left, right)]
    if counts[0] == counts[1]:
        return ()
    names = " and ".join(" + ".join(one.formula for one in side) for side in (left, right))
    return (Fault(where=where, says=f"{names} do not hold the same atoms"),)
