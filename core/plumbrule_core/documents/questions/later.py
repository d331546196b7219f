"""Kinds that can be read but not answered yet: barrier, binding, curve, survey."""

from collections.abc import Collection
from typing import Annotated, ClassVar, Literal, Self

from pydantic import Field, model_validator

from plumbrule_core.documents.base import Document
from plumbrule_core.documents.faults import Fault
from plumbrule_core.documents.questions.base import Clause, Many, Part, QuestionBase

Number = Annotated[int, Field(ge=1)]


class NotBuiltYet(QuestionBase):
    """A kind that says plainly that it is not built yet."""

    built: ClassVar[bool] = False

    def named(self) -> tuple[tuple[str, str], ...]:
        """Nothing is looked up for a question that cannot be answered."""
        return ()

    def value_faults(self, names: Collection[str]) -> tuple[Fault, ...]:
        """The one fault: not built yet."""
        return (self.not_built(),)

    def parts(self, species: Many) -> tuple[Part, ...]:
        """Never asked for, since there is always a fault."""
        raise NotImplementedError(self.label)

    def subject(self, species: Many) -> tuple[Clause, ...]:
        """Nothing."""
        return ()


class BarrierQuestion(NotBuiltYet):
    """A barrier from `from` over the saddle `over`."""

    label: ClassVar[str] = "barrier"
    kind: Literal["barrier"] = "barrier"
    start: str = Field(alias="from")
    over: str


class BindingQuestion(NotBuiltYet):
    """The binding of fragments, each a list of atom numbers from 1."""

    label: ClassVar[str] = "binding energy"
    kind: Literal["binding"] = "binding"
    complex: str
    fragments: Annotated[tuple[tuple[Number, ...], ...], Field(min_length=2)]


class Along(Document):
    """The coordinate of a curve: one of distance, angle, dihedral, with atom numbers from 1."""

    distance: tuple[Number, Number] | None = None
    angle: tuple[Number, Number, Number] | None = None
    dihedral: tuple[Number, Number, Number, Number] | None = None

    @model_validator(mode="after")
    def _one(self) -> Self:
        if sum(value is not None for value in (self.distance, self.angle, self.dihedral)) != 1:
            raise ValueError("name exactly one of distance, angle, dihedral")
        return self


class CurveQuestion(NotBuiltYet):
    """A curve along one coordinate (angstrom, degrees)."""

    label: ClassVar[str] = "curve"
    kind: Literal["curve"] = "curve"
    species: str
    along: Along
    start: float | None = Field(default=None, alias="from")
    to: float | None = None
    points: Annotated[int, Field(ge=2, le=200)] | None = None
    values: tuple[float, ...] | None = None


class SurveyQuestion(NotBuiltYet):
    """Which of many molecules one determinant can be trusted for; it needs no accuracy."""

    label: ClassVar[str] = "survey"
    kind: Literal["survey"] = "survey"
    files: str
    within: Annotated[float, Field(gt=0)] = 4.0
