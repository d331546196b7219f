"""What the rungs say of each other, and what a bond energy may not be."""

from collections.abc import Iterator, Mapping

from plumbrule_core.documents.findings import Evidence, Finding
from plumbrule_core.documents.questions import BondQuestion, EnergyQuestion
from plumbrule_core.errors import UnlikeRecipes
from plumbrule_core.judgement.answer import ladder
from plumbrule_core.judgement.case import Case, Standing
from plumbrule_core.judgement.rules.base import Rule
from plumbrule_core.judgement.rules.example import Example, Molecule
from plumbrule_core.judgement.rules.remedies import add_rungs
from plumbrule_core.judgement.wording import amount, listed, rough_range
from plumbrule_core.rungs import RUNGS
from plumbrule_core.units import from_hartree

STEPS = ("HF", "MP2", "CCSD", "CCSD(T)")
FAR = 0.016
"""Hartree (10 kcal/mol): beyond this MP2 has failed, not merely erred (common practice, no source)."""
PRACTICE = "common practice, no source"


def _values(case: Case) -> Mapping[str, float]:
    if case.question is None or isinstance(case.question, EnergyQuestion):
        return {}
    try:
        return {value.rung: value.hartree for value in ladder(case)}
    except UnlikeRecipes:  # judge says so itself, once
        return {}


def _unsettled(case: Case) -> Iterator[Finding]:
    values = _values(case)
    if case.question is None or not all(rung in values for rung in STEPS):
        return
    doubles, triples = values["CCSD"] - values["MP2"], values["CCSD(T)"] - values["CCSD"]
    size = from_hartree(abs(triples), case.unit)
    if size <= case.question.within or abs(triples) < abs(doubles):
        return
    yield Finding(
        code="ladder-unsettled",
        severity="care",
        rungs=("CCSD", "CCSD(T)"),
        headline="The last step of the ladder is not the smallest: (T) moves the answer by "
        f"{amount(triples, case.unit)}.",
        consequence="The ladder has not settled, so what lies beyond (T) need not be small.",
        evidence=(
            Evidence(reading="CCSD to CCSD(T)", value=size, unit=case.unit, source=PRACTICE),
            Evidence(reading="MP2 to CCSD", value=from_hartree(abs(doubles), case.unit), unit=case.unit),
        ),
    )


def _mp2_far(case: Case) -> Iterator[Finding]:
    values = _values(case)
    if "MP2" not in values or "CCSD(T)" not in values or abs(values["MP2"] - values["CCSD(T)"]) <= FAR:
        return
    gap = values["MP2"] - values["CCSD(T)"]
    yield Finding(
        code="mp2-far",
        severity="care",
        rungs=("MP2",),
        headline=f"MP2 is {amount(gap, case.unit)} away from CCSD(T).",
        consequence="MP2 is not to be used for this question, nor for relatives of it that are too "
        "large for CCSD(T).",
        evidence=(
            Evidence(
                reading="MP2 minus CCSD(T)",
                value=from_hartree(gap, case.unit),
                threshold=from_hartree(FAR, case.unit),
                unit=case.unit,
                source=PRACTICE,
            ),
        ),
    )


def _unbound(case: Case) -> Iterator[Finding]:
    if not isinstance(case.question, BondQuestion):
        return
    below = [rung for rung, value in _values(case).items() if value <= 0]
    if not below:
        return
    serious = [rung for rung in below if rung != "HF"]
    yield Finding(
        code="bond-negative",
        severity="care" if serious else "note",
        species=case.question.species,
        rungs=tuple(below),
        headline=f"{listed(below)} {'put' if len(below) > 1 else 'puts'} the fragments below the "
        "molecule: the bond energy is negative.",
        consequence=(
            "The geometry is far from a minimum, a fragment has the wrong spin state, or the method "
            "fails for this bond."
            if serious
            else "Hartree-Fock leaves out what holds this bond together; the correlated rungs are not "
            "touched by it."
        ),
        evidence=tuple(
            Evidence(
                reading=f"bond energy, {rung}",
                value=from_hartree(_values(case)[rung], case.unit),
                unit=case.unit,
            )
            for rung in below
        ),
    )


def _weak_ladder(case: Case) -> Iterator[Finding]:
    standing = case.standing
    if standing is None or isinstance(case.question, EnergyQuestion):
        return
    if RUNGS[standing.rung].kind == "wave function" and standing.rung != "HF":
        return
    headline, consequence = (
        (
            "Hartree-Fock leaves out electron correlation.",
            f"Reaction and bond energies are off by {rough_range(40, 400, case.unit)}.",
        )
        if standing.rung == "HF"
        else (
            f"The answer stands on the density functional {standing.rung} alone.",
            "Its error is known only on average, and nothing in this run can measure it.",
        )
    )
    yield Finding(
        code="no-correlated-rung",
        severity="care",
        rungs=(standing.rung,),
        headline=headline,
        consequence=consequence,
        remedies=add_rungs(case, ("HF", "MP2", "CCSD", "CCSD(T)"), "Add MP2, CCSD and CCSD(T) and run"),
    )


def _fluorine(**molecule: float) -> Example:
    """F2 to two atoms (cc-pVDZ, PySCF 2.14) with the molecule's energies as given."""
    atom = {"HF": -99.37524, "MP2": -99.51584, "CCSD": -99.52669, "CCSD(T)": -99.52757}
    named = {
        "HF": molecule["hf"],
        "MP2": molecule["mp2"],
        "CCSD": molecule["ccsd"],
        "CCSD(T)": molecule["full"],
    }
    return Example(
        molecules={
            "f2": Molecule(xyz="F 0 0 0; F 0 0 1.41", energies=named),
            "f": Molecule(xyz="F 0 0 0", multiplicity=2, energies=atom),
        },
        question={"kind": "bond", "species": "f2", "fragments": ["f", "f"]},
    )


_BOUND = _fluorine(hf=-198.80, mp2=-199.0970, ccsd=-199.0885, full=-199.0910)
_REAL = _fluorine(hf=-198.68567, mp2=-199.07959, ccsd=-199.08846, full=-199.09748)
_ON = {"HF": Standing("HF", 10.0), "CCSD(T)": Standing("CCSD(T)", 10.0)}


def _standing(rung: str) -> Example:
    return Example(
        molecules=_BOUND.molecules, question=_BOUND.question, standing=_ON[rung], recipe={"rungs": ["HF"]}
    )


RULES = (
    Rule(
        code="ladder-unsettled",
        severity="care",
        stage="after",
        reads=STEPS,
        source=PRACTICE,
        judge=_unsettled,
        quiet=(_BOUND, Example()),
        loud=(_fluorine(hf=-198.68567, mp2=-199.0800, ccsd=-199.1000, full=-199.1300),),
    ),
    Rule(
        code="mp2-far",
        severity="care",
        stage="after",
        reads=("MP2", "CCSD(T)"),
        source=PRACTICE,
        judge=_mp2_far,
        quiet=(_REAL, Example()),
        loud=(_fluorine(hf=-198.68567, mp2=-199.15, ccsd=-199.08846, full=-199.09748),),
    ),
    Rule(
        code="bond-negative",
        severity="care",
        stage="after",
        reads=STEPS,
        source="arithmetic",
        judge=_unbound,
        quiet=(_BOUND, Example()),
        loud=(_REAL, _fluorine(hf=-198.6, mp2=-198.9, ccsd=-198.9, full=-198.9)),
    ),
    Rule(
        code="no-correlated-rung",
        severity="care",
        stage="answer",
        reads=("the rung that the answer stands on",),
        source=PRACTICE,
        judge=_weak_ladder,
        quiet=(_standing("CCSD(T)"), Example()),
        loud=(_standing("HF"),),
    ),
)
