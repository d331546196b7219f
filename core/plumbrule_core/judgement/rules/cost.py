"""Can this computer carry the plan? Memory, disk and time, before a second of work is spent."""

from collections.abc import Iterator

from plumbrule_core.documents.amounts import memory
from plumbrule_core.documents.findings import Evidence, Finding, Remedy
from plumbrule_core.documents.plan import Task
from plumbrule_core.judgement.case import Case
from plumbrule_core.judgement.rules.base import Rule
from plumbrule_core.judgement.rules.example import LIGHT, Example
from plumbrule_core.judgement.rules.remedies import change

LONG_SECONDS = 12 * 3600.0
"""Longer than a night (common practice, no source)."""
SOURCE = "the forecast of this program: counted operations and the calibration of this computer"


def _memory(case: Case) -> Iterator[Finding]:
    worst = max(case.plan.tasks, key=lambda task: task.forecast.memory_mb, default=None)
    if worst is None or case.machine is None or worst.forecast.memory_mb <= case.machine.memory_mb:
        return
    yield _exceeds(case, worst, "memory", worst.forecast.memory_mb, case.machine.memory_mb)


def _disk(case: Case) -> Iterator[Finding]:
    worst = max(case.plan.tasks, key=lambda task: task.forecast.disk_mb, default=None)
    if worst is None or case.machine is None or worst.forecast.disk_mb <= case.machine.disk_mb:
        return
    yield _exceeds(case, worst, "disk", worst.forecast.disk_mb, case.machine.disk_mb)


def _exceeds(case: Case, task: Task, what: str, needed: float, there: float) -> Finding:
    return Finding(
        code=f"forecast-{what}",
        severity="stop",
        species=task.spec.species.name,
        rungs=(task.spec.rung,),
        headline=f"{task.label} needs about {memory(needed)} of {what}; {memory(there)} are free.",
        consequence="It would fail, or bring the computer to a halt.",
        evidence=(Evidence(reading=what, value=needed, threshold=there, unit="MB", source=SOURCE),),
        remedies=cheaper(case, task),
    )


def cheaper(case: Case, task: Task) -> tuple[Remedy, ...]:
    """What makes the plan smaller: frozen core, fitted integrals, a smaller basis, the rung left out."""
    freeze = (change("Freeze the core", "recipe.core", "frozen"),) if case.recipe.core == "all" else ()
    fit = (
        (change("Use density fitting", "recipe.density_fitting", "yes"),)
        if not task.spec.settings.density_fitting and case.recipe.density_fitting != "yes"
        else ()
    )
    smaller = tuple(
        change(f"Use {basis.smaller}", "recipe.basis", [basis.smaller])
        for basis in case.bases[:1]
        if basis.smaller
    )
    left = [name for name in case.recipe.rungs if name != task.spec.rung]
    without = (change(f"Leave out {task.spec.rung}", "recipe.rungs", left),) if left else ()
    return (*freeze, *fit, *smaller, *without)


def _time(case: Case) -> Iterator[Finding]:
    total = case.plan.forecast
    if total is None or total.seconds <= LONG_SECONDS:
        return
    slowest = max(case.plan.tasks, key=lambda task: task.forecast.seconds)
    yield Finding(
        code="forecast-time",
        severity="care",
        species=slowest.spec.species.name,
        rungs=(slowest.spec.rung,),
        headline=f"The plan takes about {total.seconds / 3600:.0f} hours.",
        consequence=f"Most of it is {slowest.label}. It can be stopped and carried on at any time.",
        evidence=(
            Evidence(
                reading="time", value=total.seconds, threshold=LONG_SECONDS, unit="seconds", source=SOURCE
            ),
        ),
        remedies=cheaper(case, slowest),
    )


def _priced(**price: float) -> Example:
    return Example(forecast=LIGHT.model_copy(update=price))


RULES = tuple(
    Rule(
        code=f"forecast-{what}",
        severity="care" if what == "time" else "stop",
        stage="before",
        reads=(f"forecast of {what}",),
        source=SOURCE,
        judge=judge,
        quiet=(_priced(),),
        loud=(loud,),
    )
    for what, judge, loud in (
        ("memory", _memory, _priced(memory_mb=64000.0)),
        ("disk", _disk, _priced(disk_mb=900000.0)),
        ("time", _time, _priced(seconds=90000.0)),
    )
)
