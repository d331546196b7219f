"""What a rule is: data, one small function, and the cases in which it must be quiet or loud."""

from collections.abc import Callable, Iterable
from dataclasses import dataclass
from typing import Literal

from plumbrule_core.documents.findings import Evidence, Finding, Remedy, Severity
from plumbrule_core.judgement.case import Case, SpeciesView
from plumbrule_core.judgement.rules.example import Example
from plumbrule_core.units import EnergyUnit, from_hartree

Stage = Literal["before", "after", "always", "answer"]
"""Before the run; after it; both; or once the answer and its bar are known."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Rule:
    """One rule. `severity` is the worst it can say; `reads` names the readings and energies it looks at."""

    code: str
    severity: Severity
    stage: Stage
    reads: tuple[str, ...]
    source: str
    judge: Callable[[Case], Iterable[Finding]]
    quiet: tuple[Example, ...]
    loud: tuple[Example, ...]


def each(judge: Callable[[Case, SpeciesView], Finding | None]) -> Callable[[Case], tuple[Finding, ...]]:
    """A rule for one species, asked of every species of the question."""

    def judge_all(case: Case) -> tuple[Finding, ...]:
        return tuple(found for view in case.views if (found := judge(case, view)))

    return judge_all


def run(rules: Iterable[Rule], stages: tuple[Stage, ...], case: Case) -> tuple[Finding, ...]:
    """The findings of all rules of these stages; a rule that breaks becomes a finding and hides no other."""
    return tuple(one for rule in rules if rule.stage in stages for one in _ask(rule, case))


def _in_unit(finding: Finding, unit: EnergyUnit) -> Finding:
    """The finding with evidence in hartree said in the user's unit, which its sentences use too."""
    return finding.model_copy(update={"evidence": tuple(_converted(one, unit) for one in finding.evidence)})


def _converted(evidence: Evidence, unit: EnergyUnit) -> Evidence:
    if evidence.unit != "hartree" or isinstance(evidence.value, str):
        return evidence
    limit = evidence.threshold
    return evidence.model_copy(
        update={
            "value": from_hartree(evidence.value, unit),
            "threshold": None if limit is None else from_hartree(limit, unit),
            "unit": unit,
        }
    )


def _ask(rule: Rule, case: Case) -> tuple[Finding, ...]:
    try:
        return tuple(_in_unit(one, case.unit) for one in rule.judge(case))
    except Exception as error:
        return (
            Finding(
                code="rule-broken",
                severity="care",
                headline=f"The check '{rule.code}' could not be made.",
                consequence="The number was not examined in this respect; please report this as a fault "
                "of the program.",
                evidence=(Evidence(reading=rule.code, value=f"{type(error).__name__}: {error}"[:400]),),
                remedies=(Remedy(label="Save the report and send it to whoever looks after the program"),),
            ),
        )
