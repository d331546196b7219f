"""The gap between two spin states."""

from typing import ClassVar, Literal

from plumbrule_core.documents.faults import Fault
from plumbrule_core.documents.questions.base import Clause, Many, Part, QuestionBase, unbalanced


class SpinGapQuestion(QuestionBase):
    """The energy of `high` minus that of `low`: two species of the same atoms and charge."""

    label: ClassVar[str] = "spin gap"
    energy_class: ClassVar[str] = "open-shell"

    kind: Literal["spin gap"] = "spin gap"
    low: str
    high: str

    def named(self) -> tuple[tuple[str, str], ...]:
        """The two spin states."""
        return (("low", self.low), ("high", self.high))

    def own_faults(self, species: Many) -> tuple[Fault, ...]:
        """Two species that are not two spin states of one molecule."""
        low, high = species[self.low], species[self.high]
        off = unbalanced((low,), (high,), "question.high")
        if low.charge != high.charge:
            off += (Fault(where="question.high", says=f"{low.name} and {high.name} have different charges"),)
        if low.multiplicity == high.multiplicity:
            says = f"{low.name} and {high.name} have the same multiplicity; a spin gap needs two"
            off += (Fault(where="question.high", says=says),)
        return off

    def parts(self, species: Many) -> tuple[Part, ...]:
        """High minus low."""
        return (
            Part(coefficient=1.0, species=species[self.high]),
            Part(coefficient=-1.0, species=species[self.low]),
        )

    def subject(self, species: Many) -> tuple[Clause, ...]:
        """`from singlet to triplet`."""
        return (
            Clause(text=" from "),
            Clause(text=self.low, key="low"),
            Clause(text=" to "),
            Clause(text=self.high, key="high"),
        )
