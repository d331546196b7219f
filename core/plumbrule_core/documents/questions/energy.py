"""The total energy of one species."""

from collections.abc import Collection
from typing import ClassVar, Literal

from plumbrule_core.documents.faults import Fault
from plumbrule_core.documents.questions.base import Clause, Many, Part, QuestionBase


class EnergyQuestion(QuestionBase):
    """The energy of one species; `species` may be left out where there is only one."""

    label: ClassVar[str] = "total energy"
    energy_class: ClassVar[str] = "atomisation"

    kind: Literal["energy"] = "energy"
    species: str = ""

    def named(self) -> tuple[tuple[str, str], ...]:
        """The species, where it is named."""
        return (("species", self.species),) if self.species else ()

    def value_faults(self, names: Collection[str]) -> tuple[Fault, ...]:
        """Not saying which of several species is meant."""
        if self.species or len(names) == 1:
            return ()
        if not names:
            return (Fault(where="species", says="there is none yet; add one as [species.water]"),)
        says = f"say which of the {len(names)} species is meant: {', '.join(sorted(names))}"
        return (Fault(where="question.species", says=says),)

    def parts(self, species: Many) -> tuple[Part, ...]:
        """The energy itself."""
        return (Part(coefficient=1.0, species=species[self.species or next(iter(species))]),)

    def subject(self, species: Many) -> tuple[Clause, ...]:
        """`of water`."""
        name = self.species or next(iter(species), "a species")
        return (Clause(text=" of "), Clause(text=name, key="species"))
