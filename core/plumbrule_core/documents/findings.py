"""Findings, the budget, the verdict: what the readings mean for this number."""

from typing import Any, Literal

from plumbrule_core.documents.base import Document, FrozenMap
from plumbrule_core.documents.results import Reading
from plumbrule_core.units import EnergyUnit

Severity = Literal["note", "care", "stop"]
Level = Literal["unknown", "sound", "take care", "do not rely on it"]
SEVERITIES: tuple[Severity, ...] = ("note", "care", "stop")


class Evidence(Document):
    """One reading that a finding stands on, with the threshold it passed and where that comes from."""

    reading: str
    value: float | str
    threshold: float | None = None
    unit: str = ""
    source: str = ""


class Edit(Document):
    """One change of a brief: `path` as `recipe.rungs` or `species.water.multiplicity`, with its new value."""

    path: str
    value: Any


class Remedy(Document):
    """An action that a finding offers: one click, undoable. Without edits it is advice only."""

    label: str
    edits: tuple[Edit, ...] = ()
    then_run: bool = False


class Finding(Document):
    """A plain-language statement drawn from readings.

    `rungs` names the rungs it speaks of; empty means the whole answer. `species` is empty for the question.
    """

    code: str
    severity: Severity
    headline: str
    consequence: str
    species: str = ""
    rungs: tuple[str, ...] = ()
    evidence: tuple[Evidence, ...] = ()
    remedies: tuple[Remedy, ...] = ()


class Verdict(Document):
    """How far the number can be trusted, in the worst words that apply."""

    level: Level
    headline: str = ""
    reasons: tuple[str, ...] = ()


class Answer(Document):
    """The number. `uncertainty` is absent where the verdict is *do not rely on it*."""

    value: float
    unit: EnergyUnit
    rung: str
    basis: str
    uncertainty: float | None = None
    meets_target: bool | None = None


class Compared(Document):
    """One rung's answer; `from_best` is its distance from the rung the answer stands on."""

    rung: str
    value: float
    from_best: float
    basis: str = ""
    uncertainty: float | None = None
    stopped: bool = False


class BudgetLine(Document):
    """One cause of uncertainty; `shift` is a known bias that is shown, not hidden in the bar."""

    cause: str
    size: float
    unit: EnergyUnit
    how: str
    source: str
    shift: float | None = None


class SpeciesJudgement(Document):
    """What is known of one species of the question."""

    name: str
    formula: str
    verdict: Verdict
    energies: FrozenMap[str, float]
    """Rung to energy in hartree, at the largest basis."""
    readings: tuple[Reading, ...] = ()


class Judgement(Document):
    """Everything that the Judge page and the report show of one question."""

    verdict: Verdict
    answer: Answer | None = None
    comparison: tuple[Compared, ...] = ()
    budget: tuple[BudgetLine, ...] = ()
    findings: tuple[Finding, ...] = ()
    species: tuple[SpeciesJudgement, ...] = ()
    citations: tuple[str, ...] = ()
