"""A brief: one question with its species and its recipe, as a question file holds it."""

from collections.abc import Mapping
from typing import Annotated

from pydantic import Field

from plumbrule_core.documents.base import Document
from plumbrule_core.documents.faults import Fault
from plumbrule_core.documents.questions import Question
from plumbrule_core.documents.recipe import Recipe
from plumbrule_core.documents.species import Species


class Brief(Document):
    """Everything that is asked, before anything is computed; species names are unique.

    `question` is absent while the user is still putting molecules in.
    """

    title: Annotated[str, Field(max_length=200)] = ""
    question: Question | None = None
    species: tuple[Species, ...] = ()
    recipe: Recipe = Recipe()

    @property
    def by_name(self) -> Mapping[str, Species]:
        """The species by name."""
        return {one.name: one for one in self.species}

    def faults(self) -> tuple[Fault, ...]:
        """What is wrong with question and species; the planner, which knows the rungs, judges the recipe."""
        names = [one.name for one in self.species]
        twice = tuple(
            Fault(where=f"species.{name}", says="two species have this name; names must differ")
            for name in sorted({name for name in names if names.count(name) > 1})
        )
        own = tuple(fault for one in self.species for fault in one.faults())
        if self.question is None:
            return (*twice, *own, Fault(where="question", says="no question is asked yet"))
        return (*twice, *own, *self.question.faults(self.by_name))
