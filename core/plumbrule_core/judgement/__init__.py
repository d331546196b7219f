"""Judgement: from readings to findings, budget, verdict and answer. Pure functions of documents."""

from collections.abc import Mapping, Sequence
from dataclasses import replace
from types import MappingProxyType

from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.findings import Answer, Compared, Evidence, Finding, Judgement, SpeciesJudgement
from plumbrule_core.documents.plan import Machine, Plan
from plumbrule_core.documents.results import Reading, Result
from plumbrule_core.errors import UnlikeRecipes
from plumbrule_core.judgement.answer import LadderValue, ladder
from plumbrule_core.judgement.budget import budget, combined
from plumbrule_core.judgement.case import Case, SpeciesView, Standing
from plumbrule_core.judgement.citations import citations
from plumbrule_core.judgement.rules import RULES
from plumbrule_core.judgement.rules.base import run
from plumbrule_core.judgement.verdict import best_of, of_species, ordered, overall, stopped
from plumbrule_core.units import from_hartree


def check(brief: Brief, plan: Plan, machine: Machine) -> tuple[Finding, ...]:
    """What can be said before a second of work is spent, the worst first."""
    return ordered(run(RULES, ("before", "always"), Case(brief, plan, {}, machine)))


def judge(
    brief: Brief, plan: Plan, results: Mapping[str, Result], failed: Mapping[str, str] = MappingProxyType({})
) -> Judgement:
    """Everything that the results say, task identity to result; some may be missing while the plan runs.

    `failed`: identity of each task that will have no result, as it failed or needs one that did, to the
    reason.
    """
    planned = {task.id for task in plan.tasks} - set(results)
    case = Case(brief, plan, results, failed={key: why for key, why in failed.items() if key in planned})
    values, unlike = _ladder(case)
    findings = [*unlike, *run(RULES, ("after", "always"), case)] if results else []
    best = best_of(values, findings)
    lines = budget(case, best, values) if best and not stopped(findings, best.rung) else ()
    answer = _answer(case, best, combined(lines), findings)
    standing = None
    if best and answer:
        standing = Standing(best.rung, answer.value, answer.uncertainty, lines[0].cause if lines else "")
    later = run(RULES, ("answer",), replace(case, standing=standing))
    findings = [*(one for one in later if one.code == "task-failed"), *findings]
    findings += [one for one in later if one.code != "task-failed"]
    told = ordered(findings, best.rung if best else "")
    return Judgement(
        verdict=overall(case, best, answer, told),
        answer=answer,
        comparison=_comparison(case, values, best, told),
        budget=lines,
        findings=told,
        species=tuple(_species(case, view, best, told) for view in case.views),
        citations=citations(case, values, told),
    )


def _ladder(case: Case) -> tuple[tuple[LadderValue, ...], tuple[Finding, ...]]:
    try:
        return ladder(case), ()
    except UnlikeRecipes as error:
        return (), (
            Finding(
                code="unlike-recipes",
                severity="stop",
                headline="The species were not computed with one recipe.",
                consequence=str(error),
                evidence=(Evidence(reading="level", value="differs"),),
            ),
        )


def _answer(
    case: Case, best: LadderValue | None, uncertainty: float | None, findings: Sequence[Finding]
) -> Answer | None:
    if best is None or case.question is None:
        return None
    meets = None if uncertainty is None else uncertainty <= case.question.within
    if stopped(findings, best.rung):
        meets = False
    return Answer(
        value=from_hartree(best.hartree, case.unit),
        unit=case.unit,
        rung=best.rung,
        basis=best.basis,
        uncertainty=uncertainty,
        meets_target=meets,
    )


def _comparison(
    case: Case, values: Sequence[LadderValue], best: LadderValue | None, findings: Sequence[Finding]
) -> tuple[Compared, ...]:
    if best is None:
        return ()
    return tuple(_compared(case, value, values, best, findings) for value in values)


def _compared(
    case: Case,
    value: LadderValue,
    values: Sequence[LadderValue],
    best: LadderValue,
    findings: Sequence[Finding],
) -> Compared:
    out = stopped(findings, value.rung)
    return Compared(
        rung=value.rung,
        value=from_hartree(value.hartree, case.unit),
        from_best=from_hartree(value.hartree - best.hartree, case.unit),
        basis=value.basis,
        uncertainty=None if out else combined(budget(case, value, values)),
        stopped=out,
    )


def _species(
    case: Case, view: SpeciesView, best: LadderValue | None, findings: Sequence[Finding]
) -> SpeciesJudgement:
    percent = case.tae_triples(view)
    derived = () if percent is None else (Reading(name="%TAE[(T)]", value=percent, unit="%"),)
    return SpeciesJudgement(
        name=view.name,
        formula=view.species.formula,
        verdict=of_species(case, view, best.rung if best else None, findings),
        energies=view.energies,
        readings=(*view.readings.values(), *derived),
    )
