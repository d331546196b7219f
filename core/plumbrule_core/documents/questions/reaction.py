"""The energy of a reaction: a sum of coefficient times energy, products positive."""

from collections.abc import Collection, Mapping
from typing import Annotated, ClassVar, Literal

from pydantic import Field

from plumbrule_core.documents.base import FrozenMap
from plumbrule_core.documents.faults import Fault
from plumbrule_core.documents.questions.base import Clause, Many, Part, QuestionBase
from plumbrule_core.documents.species import hill

Coefficient = Annotated[float, Field(ge=-1000, le=1000)]


class ReactionQuestion(QuestionBase):
    """`terms` maps each species to its coefficient; products positive, reactants negative."""

    label: ClassVar[str] = "reaction energy"

    kind: Literal["reaction"] = "reaction"
    terms: FrozenMap[str, Coefficient] = Field(min_length=1)

    def named(self) -> tuple[tuple[str, str], ...]:
        """Every species of the sum."""
        return tuple((f"terms.{name}", name) for name in self.terms)

    def value_faults(self, names: Collection[str]) -> tuple[Fault, ...]:
        """Coefficients of zero."""
        return tuple(
            Fault(where=f"question.terms.{name}", says="a coefficient of 0 leaves the species out; remove it")
            for name, coefficient in self.terms.items()
            if coefficient == 0
        )

    def own_faults(self, species: Many) -> tuple[Fault, ...]:
        """Atoms or charge that do not balance."""
        return self._atoms_out_of_balance(species) + self._charge_out_of_balance(species)

    def _atoms_out_of_balance(self, species: Many) -> tuple[Fault, ...]:
        symbols = sorted({symbol for name in self.terms for symbol in species[name].counts})
        excess = {s: sum(c * species[n].counts[s] for n, c in self.terms.items()) for s in symbols}
        off = {symbol: amount for symbol, amount in excess.items() if abs(amount) > 1e-9}
        if not off:
            return ()
        words = ", ".join(
            f"{abs(amount):g} {symbol} too {'many' if amount > 0 else 'few'}"
            for symbol, amount in off.items()
        )
        return (
            Fault(
                where="question.terms",
                says=f"the reaction does not balance: on the side of the products {words}",
            ),
        )

    def _charge_out_of_balance(self, species: Many) -> tuple[Fault, ...]:
        excess = sum(c * species[name].charge for name, c in self.terms.items())
        if abs(excess) < 1e-9:
            return ()
        return (
            Fault(
                where="question.terms",
                says=f"the charge does not balance: the products carry {excess:+g} more",
            ),
        )

    def parts(self, species: Many) -> tuple[Part, ...]:
        """Products minus reactants."""
        return tuple(Part(coefficient=c, species=species[name]) for name, c in self.terms.items())

    def subject(self, species: Many) -> tuple[Clause, ...]:
        """`of CO + H2O to CO2 + H2`; by name where the formulas would not tell the sides apart."""
        by_formula = {name: _formula(name, species) for name in self.terms}
        words = by_formula if len(set(by_formula.values())) == len(by_formula) else {n: n for n in self.terms}
        return (
            Clause(text=" of "),
            Clause(text=f"{self._side(-1, words)} to {self._side(1, words)}", key="terms"),
        )

    def _side(self, sign: int, words: Mapping[str, str]) -> str:
        found = [(abs(c), name) for name, c in self.terms.items() if c * sign > 0]
        return " + ".join(f"{'' if c == 1 else f'{c:g} '}{words[name]}" for c, name in found) or "nothing"


def _formula(name: str, species: Many) -> str:
    return species[name].formula if name in species and hill(species[name].counts) else name
