"""What was asked for and did not come: a calculation that failed leaves the answer on a lower rung."""

from collections.abc import Iterator

from plumbrule_core.documents.findings import Evidence, Finding
from plumbrule_core.documents.plan import Task
from plumbrule_core.judgement.case import Case
from plumbrule_core.judgement.rules.base import Rule
from plumbrule_core.judgement.rules.convergence import stands_on
from plumbrule_core.judgement.rules.example import Example, Molecule
from plumbrule_core.judgement.rules.remedies import advice
from plumbrule_core.rungs import RUNGS


def _failed(case: Case) -> Iterator[Finding]:
    failed = [task for task in case.plan.tasks if task.id in case.failed]
    for task in failed:
        above = [one for one in failed if _same_chain(one, task) and one is not task]
        if not any(task.spec.rung in stands_on(case, one.spec.rung) for one in above):
            yield _said(case, task, [task, *(one for one in above if _needs(case, one, task))])


def _same_chain(one: Task, other: Task) -> bool:
    return (one.spec.species.content, one.spec.settings) == (other.spec.species.content, other.spec.settings)


def _needs(case: Case, one: Task, other: Task) -> bool:
    return one.spec.rung in stands_on(case, other.spec.rung)


def _said(case: Case, task: Task, lost: list[Task]) -> Finding:
    name, rung = task.spec.species.name, task.spec.rung
    standing = case.standing
    severe = standing is None or any(_matters(one.spec.rung, standing.rung) for one in lost)
    then = "there is no answer" if standing is None else f"the answer stands on {standing.rung}"
    then += (" yet" if standing is None else " so far") if case.pending else ""
    basis = f" in {task.spec.settings.basis}" if len(case.bases) > 1 else ""
    others = [one.spec.rung for one in lost[1:]]
    return Finding(
        code="task-failed",
        severity="care" if severe else "note",
        species=name,
        headline=f"{rung} of {name}{basis} failed, so {then}."
        if severe
        else f"{rung} of {name}{basis} failed, but the answer does not need it.",
        consequence=f"It ended with: {case.failed[task.id].rstrip('.')}."
        + (f" What needs it was not run: {', '.join(others)}." if others else ""),
        evidence=(Evidence(reading=rung, value=case.failed[task.id][:400]),),
        remedies=(advice("Read what it ended with, change what it names, and run again"),),
    )


def _matters(lost: str, stands: str) -> bool:
    """Whether the answer would rather stand on the lost rung, or on the same one in this basis as well."""
    wave = RUNGS[lost].kind == "wave function", RUNGS[stands].kind == "wave function"
    return wave[0] >= wave[1] and (wave[0] != wave[1] or RUNGS[lost].rank >= RUNGS[stands].rank)


_ENERGIES = {"HF": -108.95, "MP2": -109.26, "CCSD": -109.26}


def _nitrogen(**failed: str) -> Example:
    return Example(molecules={"n2": Molecule(energies=_ENERGIES)}, failed=failed)


RULES = (
    Rule(
        code="task-failed",
        severity="care",
        stage="answer",
        reads=("how each task ended",),
        source="arithmetic",
        judge=_failed,
        quiet=(_nitrogen(), Example()),
        loud=(
            _nitrogen(**{"CCSD(T)": "memory ran out"}),
            Example(failed={"HF": "the atoms lie on each other", "MP2": "not run because HF failed"}),
        ),
    ),
)
