"""The statistics behind the budget, and which column of them a question belongs to."""

import json
from collections.abc import Mapping
from types import MappingProxyType
from typing import Any

from plumbrule_core.documents.questions import BondQuestion, IonisationQuestion, ReactionQuestion
from plumbrule_core.judgement.case import Case
from plumbrule_core.units import EnergyUnit, convert
from plumbrule_resources import text

TABLES: Mapping[str, Any] = MappingProxyType(json.loads(text("basis_errors.json")))
"""`basis_errors.json`: kcal/mol unless a table names another unit."""

CLASSES: tuple[str, ...] = tuple(TABLES["basis_set"]["classes"])


def in_unit(kcal: float, unit: EnergyUnit) -> float:
    """A tabulated size in the user's unit."""
    return convert(kcal, "kcal/mol", unit)


def column(table: str, row: str, kind: str) -> float:
    """One number of a table with the five classes as columns, in kcal/mol."""
    numbers: list[float] = TABLES[table][row]
    return numbers[CLASSES.index(kind)]


def energy_class(case: Case) -> str:
    """Which column fits: the question's own, made sharper by its species.

    Atoms alone on one side make an atomisation, unpaired electrons an open-shell reaction; a bond whose
    fragments are not both atoms is such a reaction too. An ionisation that adds electrons is an attachment.
    """
    question = case.question
    if question is None:
        return "closed-shell"
    if isinstance(question, IonisationQuestion):
        before, after = case.brief.by_name[question.start], case.brief.by_name[question.to]
        return "ionisation" if after.charge > before.charge else "attachment"
    if isinstance(question, ReactionQuestion | BondQuestion):
        return _reaction_class(case)
    return question.energy_class


def _reaction_class(case: Case) -> str:
    sides = [[len(p.species.atoms) == 1 for p in case.parts if p.coefficient * sign > 0] for sign in (1, -1)]
    if any(side and all(side) for side in sides) and any(not all(side) for side in sides):
        return "atomisation"
    return "open-shell" if any(part.species.multiplicity > 1 for part in case.parts) else "closed-shell"


def size_factor(case: Case, kind: str) -> float:
    """How many bonds an atomisation breaks beyond those of the small molecules that the table knows; else 1.

    The table's atomisations are of two to about five atoms; errors grow with the number of bonds.
    """
    if kind != "atomisation":
        return 1.0
    atoms = max((len(part.species.atoms) for part in case.parts), default=1)
    return max(1.0, (atoms - 1) / 4)
