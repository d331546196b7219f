"""Whether the bar fits what was asked for, and where there is none."""

import math
from collections.abc import Iterator, Mapping
from typing import Any

from plumbrule_core.documents.findings import Evidence, Finding, Remedy
from plumbrule_core.documents.questions import EnergyQuestion
from plumbrule_core.judgement.case import Case, Standing
from plumbrule_core.judgement.rules.base import Rule
from plumbrule_core.judgement.rules.example import Example, Molecule
from plumbrule_core.judgement.rules.remedies import add_rungs, advice, change, larger_basis
from plumbrule_core.judgement.wording import in_unit


def _too_wide(case: Case) -> Iterator[Finding]:
    standing, question = case.standing, case.question
    if (
        standing is None
        or question is None
        or standing.uncertainty is None
        or standing.uncertainty <= question.within
    ):
        return
    yield Finding(
        code="bar-exceeds-target",
        severity="note",
        headline=f"The bar of ±{in_unit(standing.uncertainty, case.unit)} is wider than the "
        f"{question.within:g} "
        f"{case.unit} that are needed.",
        consequence="A value that happens to agree with experiment proves nothing at this width. "
        f"The largest cause is {standing.largest_cause}.",
        evidence=(
            Evidence(
                reading="uncertainty", value=standing.uncertainty, threshold=question.within, unit=case.unit
            ),
        ),
        remedies=_narrower(case, standing),
    )


def _narrower(case: Case, standing: Standing) -> tuple[Remedy, ...]:
    first = {
        "basis set": larger_basis(case),
        "beyond the top rung": add_rungs(case, ("CCSD", "CCSD(T)"), "Add CCSD(T) and run"),
        "geometry": (advice("Give geometries that were optimised with a correlated method and say so"),),
    }.get(standing.largest_cause, ())
    settle = _rounded_up(standing.uncertainty or 0.0)
    return (*first, change(f"Settle for {settle:g} {case.unit}", "question.within", settle))


def _rounded_up(size: float) -> float:
    """Up to two digits, so that the bar fits."""
    step = 10.0 ** (math.floor(math.log10(size)) - 1)
    return round(math.ceil(size / step) * step, 10)


def _total(case: Case) -> Iterator[Finding]:
    if case.standing is None or not isinstance(case.question, EnergyQuestion):
        return
    yield Finding(
        code="total-energy",
        severity="note",
        species=case.species[0].name if case.species else "",
        headline="A total energy has no useful bar.",
        consequence="It lies far above the exact energy in every basis set; most of that cancels in "
        "differences at one "
        f"recipe. So the accuracy asked for ({case.question.within:g} {case.unit}) is not used. Ask for a "
        "reaction, a bond or a gap to get a bar.",
    )


_BOND: Mapping[str, Any] = {"kind": "bond", "species": "n2", "fragments": ["n", "n"]}
_BOTH = {"n2": Molecule(), "n": Molecule(xyz="N 0 0 0", multiplicity=4)}


def _barred(uncertainty: float | None, question: Mapping[str, Any] = _BOND) -> Example:
    return Example(
        molecules=_BOTH,
        question=question,
        standing=Standing("CCSD(T)", 940.0, uncertainty, "basis set"),
    )


RULES = (
    Rule(
        code="bar-exceeds-target",
        severity="note",
        stage="answer",
        reads=("uncertainty",),
        source="arithmetic",
        judge=_too_wide,
        quiet=(_barred(3.0), _barred(None), Example()),
        loud=(_barred(17.0),),
    ),
    Rule(
        code="total-energy",
        severity="note",
        stage="answer",
        reads=("the kind of question",),
        source="arithmetic",
        judge=_total,
        quiet=(_barred(3.0),),
        loud=(_barred(None, {}),),
    ),
)
