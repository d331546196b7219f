"""The gap between two spin states."""

from typing import ClassVar, Literal

from plumbrule_core.documents.faults import Fault
from plumbrule_core.documents.questions.base import Clause, Many, Part, QuestionBase, unbalanced
from plumbrule_core.documents.species import SPIN_WORDS, Species


def _many(one: Species) -> str:
    word = SPIN_WORDS.get(one.multiplicity)
    return f"{word}s" if word else f"of multiplicity {one.multiplicity}"


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
            says = f"{low.name} and {high.name} are both {_many(low)}; a spin gap needs two spin states"
            says += "".join(f"; {one.assumption}" for one in (low, high) if one.assumption)
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
