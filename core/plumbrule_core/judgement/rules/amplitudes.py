"""The amplitudes of coupled cluster: T1, D1, D2 and the largest t2. Alone they are a note; none decides."""

from collections.abc import Callable

from plumbrule_core.documents.findings import Finding, Severity
from plumbrule_core.judgement.case import Case, SpeciesView
from plumbrule_core.judgement.evidence import (
    FAMILY_WORDS,
    corroborated,
    doubles_grade,
    evidence_of,
    grades,
    singles_grade,
    singles_limits,
)
from plumbrule_core.judgement.rules.base import Rule, each
from plumbrule_core.judgement.rules.example import Example, Molecule, measured
from plumbrule_core.judgement.rules.remedies import active_space
from plumbrule_core.judgement.thresholds import THRESHOLDS
from plumbrule_core.judgement.wording import listed

COUPLED_CLUSTER = ("CCSD", "CCSD(T)")
KIN_WORDS = {
    "largest_t2": "the largest doubles amplitude",
    "mp2_largest_t2": "the largest doubles amplitude of MP2",
}
SINGLES = "The Hartree-Fock orbitals are not the best ones for this molecule, and CCSD has to repair them."
DOUBLES = "A pair of electrons leaves its orbital to a large part, which CCSD and (T) describe less well."


def _large(
    code: str, reading: str, family: str, limit_of: Callable[[SpeciesView], str], why: str
) -> Callable[[Case, SpeciesView], Finding | None]:
    def judge(case: Case, view: SpeciesView) -> Finding | None:
        value, limit = view.number(reading), THRESHOLDS[limit_of(view)]
        if value is None or value <= limit.value or view.exact_from_ccsd:
            return None
        graded = singles_grade(view) if family == "singles" else doubles_grade(view)
        severity: Severity = "care" if graded.grade >= 2 or corroborated(case, view, family) else "note"
        agree = _agreement(case, view, family, reading, severity)
        return Finding(
            code=code,
            severity=severity,
            species=view.name,
            rungs=tuple(name for name in case.rungs if name in COUPLED_CLUSTER),
            headline=f"{reading} of {view.name} is {value:.3f}, above {limit.value:g}.",
            consequence=f"{why} {agree}",
            evidence=(evidence_of(reading, value, limit),),
            remedies=active_space(case) if severity == "care" else (),
        )

    return judge


def _agreement(case: Case, view: SpeciesView, family: str, reading: str, severity: Severity) -> str:
    """What else is raised, by the same grades that the verdict is made of."""
    raised = [one for one in grades(case, view) if one.grade]
    kin = [
        f"{KIN_WORDS.get(e.reading, e.reading)} is {e.value:.2f}"
        for one in raised
        if one.family == family
        for e in one.evidence
        if e.reading != reading
    ]
    others = [*kin, *(FAMILY_WORDS[one.family] for one in raised if one.family != family)]
    if severity == "care":
        why = f": {listed(others)}" if others else ""
        return f"It does not stand alone{why}; so the error can exceed the bar."
    if kin:
        return f"Of the same kind, {listed(kin)}; no diagnostic of another kind agrees, so the number stands."
    return "No other diagnostic agrees, so the number stands."


def _t2(case: Case, view: SpeciesView) -> Finding | None:
    value = view.number("largest_t2")
    notable, serious = THRESHOLDS["t2_notable"], THRESHOLDS["t2_serious"]
    if value is None or value <= notable.value or view.exact_from_ccsd:
        return None
    large = value > serious.value
    return Finding(
        code="t2-large",
        severity="care" if large else "note",
        species=view.name,
        rungs=tuple(name for name in case.rungs if name in COUPLED_CLUSTER),
        headline=f"The largest doubles amplitude of {view.name} is {value:.2f}, above "
        f"{(serious if large else notable).value:g}.",
        consequence=DOUBLES
        if large
        else "One pair of electrons is correlated strongly; by itself this is no reason to doubt"
        + (", but it is not the only sign here." if corroborated(case, view, "doubles") else "."),
        evidence=(evidence_of("largest_t2", value, serious if large else notable),),
        remedies=active_space(case) if large else (),
    )


def _rule(
    code: str, reading: str, family: str, limit_of: Callable[[SpeciesView], str], why: str, **examples: float
) -> Rule:
    return Rule(
        code=code,
        severity="care",
        stage="after",
        reads=(reading,),
        source=THRESHOLDS[limit_of_closed(reading)].source,
        judge=each(_large(code, reading, family, limit_of, why)),
        quiet=(
            measured(**{reading: examples["calm"]}),
            measured(),
            Example(
                molecules={"h2": Molecule(xyz="H 0 0 0; H 0 0 2.2", readings={reading: examples["large"]})}
            ),
        ),
        loud=(measured(**{reading: examples["large"]}),),
    )


def limit_of_closed(reading: str) -> str:
    """The limit of a closed-shell molecule without metals."""
    return {"T1": "t1_closed", "D1": "d1", "D2": "d2"}[reading]


RULES = (
    _rule(
        "t1-large",
        "T1",
        "singles",
        lambda view: singles_limits(view.species)[0],
        SINGLES,
        calm=0.0118,
        large=0.031,
    ),
    _rule(
        "d1-large",
        "D1",
        "singles",
        lambda view: singles_limits(view.species)[1],
        SINGLES,
        calm=0.025,
        large=0.08,
    ),
    _rule("d2-large", "D2", "doubles", lambda view: "d2", DOUBLES, calm=0.171, large=0.28),
    Rule(
        code="t2-large",
        severity="care",
        stage="after",
        reads=("largest_t2",),
        source=THRESHOLDS["t2_serious"].source,
        judge=each(_t2),
        quiet=(measured(largest_t2=0.05), measured()),
        loud=(measured(largest_t2=0.14), measured(largest_t2=0.48)),
    ),
)
