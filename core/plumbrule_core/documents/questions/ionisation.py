"""The energy of taking electrons away (or adding them)."""

from typing import ClassVar, Literal

from pydantic import Field

from plumbrule_core.documents.faults import Fault
from plumbrule_core.documents.questions.base import Clause, Many, Part, QuestionBase, unbalanced


class IonisationQuestion(QuestionBase):
    """The energy of `to` minus that of `from`: the same atoms with different charges."""

    label: ClassVar[str] = "ionisation energy"
    energy_class: ClassVar[str] = "ionisation"

    kind: Literal["ionisation"] = "ionisation"
    start: str = Field(alias="from")
    to: str

    def named(self) -> tuple[tuple[str, str], ...]:
        """Before and after."""
        return (("from", self.start), ("to", self.to))

    def own_faults(self, species: Many) -> tuple[Fault, ...]:
        """Two species that do not differ by electrons alone."""
        before, after = species[self.start], species[self.to]
        off = unbalanced((before,), (after,), "question.to")
        if before.charge == after.charge:
            off += (Fault(where="question.to", says=f"{before.name} and {after.name} have the same charge"),)
        return off

    def parts(self, species: Many) -> tuple[Part, ...]:
        """After minus before."""
        return (
            Part(coefficient=1.0, species=species[self.to]),
            Part(coefficient=-1.0, species=species[self.start]),
        )

    def subject(self, species: Many) -> tuple[Clause, ...]:
        """`from water to water cation`."""
        return (
            Clause(text=" from "),
            Clause(text=self.start, key="from"),
            Clause(text=" to "),
            Clause(text=self.to, key="to"),
        )
