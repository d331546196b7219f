"""The combined judgement: does one determinant describe each molecule?"""

from plumbrule_core.documents.findings import Finding
from plumbrule_core.judgement.case import Case, SpeciesView
from plumbrule_core.judgement.evidence import FAMILY_WORDS, Grade, grades
from plumbrule_core.judgement.rules.base import Rule, each
from plumbrule_core.judgement.rules.example import measured
from plumbrule_core.judgement.rules.remedies import active_space
from plumbrule_core.judgement.wording import listed

SOURCE = "own calibration on systems with known answers; each limit names its own source"


def _judge(case: Case, view: SpeciesView) -> Finding | None:
    raised = sorted((one for one in grades(case, view) if one.grade), key=lambda one: -one.grade)
    if _broken(raised):
        return _stop(case, view, raised)
    if _doubtful(raised):
        return _care(case, view, raised)
    return None


def _broken(raised: list[Grade]) -> bool:
    return len(raised) >= 2 and raised[0].grade == 3


def _doubtful(raised: list[Grade]) -> bool:
    return len(raised) >= 3 or (len(raised) == 2 and raised[0].grade >= 2)


def _stop(case: Case, view: SpeciesView, raised: list[Grade]) -> Finding:
    return Finding(
        code="one-determinant",
        severity="stop",
        species=view.name,
        rungs=case.single_reference,
        headline=f"One determinant does not describe {view.name}.",
        consequence=f"{_reasons(raised)}. Every rung that stands on one determinant is wrong here by an "
        "unknown amount, "
        "typically 15 to 90 kcal/mol, however well it converged.",
        evidence=tuple(one for grade in raised for one in grade.evidence),
        remedies=active_space(case),
    )


def _care(case: Case, view: SpeciesView, raised: list[Grade]) -> Finding:
    return Finding(
        code="one-determinant",
        severity="care",
        species=view.name,
        rungs=case.single_reference,
        headline=f"One determinant describes {view.name} only in part.",
        consequence=f"{_reasons(raised)}. The number can be off by several kcal/mol more than the bar says.",
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
            *("%TAE[(T)]", "share_of_triples", "M", "s2_excess"),
        ),
        source=SOURCE,
        judge=each(_judge),
        quiet=(
            measured(),
            measured(T1=0.09, D1=0.04),
            measured(largest_t2=0.104, D2=0.171, T1=0.0118, D1=0.0246, share_of_triples=0.037, M=0.066),
        ),
        loud=(
            measured(instability_depth=0.0989, uhf_fractional=1.0, largest_t2=0.484, T1=0.018),
            measured(instability_depth=0.036, uhf_fractional=0.3, largest_t2=0.11, M=0.115),
        ),
    ),
)
