"""What every kind of question can say about itself."""

from abc import abstractmethod
from collections.abc import Collection, Mapping
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

    @classmethod
    def not_built(cls) -> Fault:
        """What to say of a kind that is not built yet."""
        says = f"a {cls.label} is understood, but not built yet in this version"
        return Fault(where="question.kind", says=says)

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
        early = self.early_faults(species)
        known = all(name in species for _, name in self.named())
        return (*early, *self.own_faults(species)) if known else early

    def early_faults(self, names: Collection[str]) -> tuple[Fault, ...]:
        """What is wrong whatever the species are, of which no more than the names are known."""
        there = f"there is {', '.join(sorted(names)) or 'none yet'}"
        missing = (
            Fault(where=f"question.{key}", says=f"there is no species named '{name}'; {there}")
            for key, name in self.named()
            if name not in names
        )
        return (*self.value_faults(names), *missing)

    def value_faults(self, names: Collection[str]) -> tuple[Fault, ...]:
        """Faults of this kind that its own values show; `names` are those of the species."""
        return ()

    def own_faults(self, species: Many) -> tuple[Fault, ...]:
        """Faults of this kind that its species show, once every named one exists."""
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


def unbalanced(left: tuple[Species, ...], right: tuple[Species, ...], where: str) -> tuple[Fault, ...]:
    """Faults where two sides differ in atoms."""
    counts = [sum((one.counts for one in side), start=type(left[0].counts)()) for side in (left, right)]
    if counts[0] == counts[1]:
        return ()
    names = " and ".join(" + ".join(one.formula for one in side) for side in (left, right))
    return (Fault(where=where, says=f"{names} do not hold the same atoms"),)
