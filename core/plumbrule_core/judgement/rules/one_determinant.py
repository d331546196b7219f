"""The combined judgement: does one determinant describe each molecule?"""

from collections.abc import Iterator

from plumbrule_core.documents.findings import Finding
from plumbrule_core.judgement.case import Case, SpeciesView
from plumbrule_core.judgement.evidence import FAMILY_WORDS, Grade, grades
from plumbrule_core.judgement.rules.base import Rule
from plumbrule_core.judgement.rules.example import measured
from plumbrule_core.judgement.rules.remedies import active_space
from plumbrule_core.judgement.wording import listed, rough_range

SOURCE = "own calibration on systems with known answers; each limit names its own source"


WITHOUT_REPAIR = ("HF", "MP2", "CISD")
"""Rungs that a broken reference ruins by itself; coupled cluster repairs some and needs a second witness."""


def _judge(case: Case) -> Iterator[Finding]:
    for view in case.views:
        yield from _one(case, view)


def _one(case: Case, view: SpeciesView) -> Iterator[Finding]:
    raised = sorted((one for one in grades(case, view) if one.grade), key=lambda one: -one.grade)
    touched = case.doubtful(view)
    if not touched:
        return
    if _broken(raised):
        yield _stop(case, view, raised, touched)
        return
    ruined = tuple(name for name in touched if name in WITHOUT_REPAIR and _reference_broken(raised))
    if ruined:
        yield _stop(case, view, raised, ruined)
    left = tuple(name for name in touched if name not in ruined)
    if _doubtful(raised) and left:
        yield _care(case, view, raised, left)


def _reference_broken(raised: list[Grade]) -> bool:
    return any(one.family == "reference" and one.grade == 3 for one in raised)


def _broken(raised: list[Grade]) -> bool:
    return len(raised) >= 2 and raised[0].grade == 3


def _doubtful(raised: list[Grade]) -> bool:
    return len(raised) >= 3 or (len(raised) == 2 and raised[0].grade >= 2)


def _stop(case: Case, view: SpeciesView, raised: list[Grade], rungs: tuple[str, ...]) -> Finding:
    return Finding(
        code="one-determinant",
        severity="stop",
        species=view.name,
        rungs=rungs,
        headline=f"One determinant does not describe {view.name}.",
        consequence=f"{_reasons(raised)}. {listed(rungs)} {'are' if len(rungs) > 1 else 'is'} wrong here "
        f"by an unknown amount, typically {rough_range(60, 400, case.unit)}, however well the calculation "
        "converged.",
        evidence=tuple(one for grade in raised for one in grade.evidence),
        remedies=active_space(case),
    )


def _care(case: Case, view: SpeciesView, raised: list[Grade], rungs: tuple[str, ...]) -> Finding:
    return Finding(
        code="one-determinant",
        severity="care",
        species=view.name,
        rungs=rungs,
        headline=f"One determinant describes {view.name} only in part.",
        consequence=f"{_reasons(raised)}. The number can be off by {rough_range(10, 40, case.unit)} more "
        "than the bar says.",
        evidence=tuple(one for grade in raised for one in grade.evidence),
        remedies=active_space(case),
    )


def _reasons(raised: list[Grade]) -> str:
    words = listed(FAMILY_WORDS[one.family] for one in raised)
    return words[0].upper() + words[1:]


RULES = (
    Rule(
        code="one-determinant",
        severity="stop",
        stage="after",
        reads=(
            *("instability_depth", "uhf_fractional", "largest_t2", "mp2_largest_t2", "D2", "T1", "D1"),
            *("%TAE[(T)]", "share_of_triples", "M", "s2_excess", "c0_squared", "converged"),
        ),
        source=SOURCE,
        judge=_judge,
        quiet=(
            measured(),
            measured(T1=0.09, D1=0.04),
            measured(largest_t2=0.104, D2=0.171, T1=0.0118, D1=0.0246, share_of_triples=0.037, M=0.066),
        ),
        loud=(
            measured(instability_depth=0.0989, uhf_fractional=1.0, largest_t2=0.484, T1=0.018),
            measured(instability_depth=0.036, uhf_fractional=0.3, largest_t2=0.11, M=0.115),
            measured(instability_depth=0.096, uhf_fractional=0.9999),
        ),
    ),
)
