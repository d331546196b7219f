"""The kinds of question; this list is the one place where a new kind is registered."""

from collections.abc import Mapping
from types import MappingProxyType
from typing import Annotated, get_args

from pydantic import Field

from plumbrule_core.documents.questions.base import Clause, Part, QuestionBase
from plumbrule_core.documents.questions.bond import BondQuestion
from plumbrule_core.documents.questions.energy import EnergyQuestion
from plumbrule_core.documents.questions.ionisation import IonisationQuestion
from plumbrule_core.documents.questions.later import (
    BarrierQuestion,
    BindingQuestion,
    CurveQuestion,
    SurveyQuestion,
)
from plumbrule_core.documents.questions.reaction import ReactionQuestion
from plumbrule_core.documents.questions.spin_gap import SpinGapQuestion

Question = Annotated[
    EnergyQuestion
    | ReactionQuestion
    | BondQuestion
    | BarrierQuestion
    | SpinGapQuestion
    | BindingQuestion
    | IonisationQuestion
    | CurveQuestion
    | SurveyQuestion,
    Field(discriminator="kind"),
]

KINDS: Mapping[str, type[Question]] = MappingProxyType(
    {kind.model_fields["kind"].default: kind for kind in get_args(get_args(Question)[0])}
)
"""Every kind by the name that a question file gives it."""

__all__ = [
    "KINDS",
    "BarrierQuestion",
    "BindingQuestion",
    "BondQuestion",
    "Clause",
    "CurveQuestion",
    "EnergyQuestion",
    "IonisationQuestion",
    "Part",
    "Question",
    "QuestionBase",
    "ReactionQuestion",
    "SpinGapQuestion",
    "SurveyQuestion",
]
