"""What kind of number this is: electronic, vertical, and which way a gap points."""

from collections.abc import Iterator, Mapping
from typing import Any

import numpy as np

from plumbrule_core.documents.findings import Evidence, Finding
from plumbrule_core.documents.questions import (
    BondQuestion,
    EnergyQuestion,
    IonisationQuestion,
    SpinGapQuestion,
)
from plumbrule_core.documents.species import Species
from plumbrule_core.judgement.case import Case, Standing
from plumbrule_core.judgement.rules.base import Rule
from plumbrule_core.judgement.rules.example import Example, Molecule
from plumbrule_core.judgement.rules.remedies import advice
from plumbrule_core.judgement.wording import in_unit, rough, rough_range

SCALES = "differences of zero-point energies of ordinary molecules: common practice, no source"
SAME_PLACE = 0.002
"""Angstrom; two geometries whose distances differ by less are one geometry (arithmetic: rounded digits)."""


def _electronic(case: Case) -> Iterator[Finding]:
    question = case.question
    if question is None or isinstance(question, EnergyQuestion) or _only_atoms(case):
        return
    dissociation = " (Dₑ)" if isinstance(question, BondQuestion) else ""
    yield Finding(
        code="electronic-energy",
        severity="note",
        headline=f"This is an electronic energy{dissociation}, without zero-point energy and heat.",
        consequence=_zero_point(case),
        evidence=(Evidence(reading="zero-point energy", value="not included", source=SCALES),),
        remedies=()
        if _vertical(case)
        else (advice("Take the zero-point energy from measured or computed vibrations and add it"),),
    )


def _only_atoms(case: Case) -> bool:
    """Atoms do not vibrate."""
    return all(len(one.atoms) == 1 for one in case.species)


def _zero_point(case: Case) -> str:
    if _vertical(case):
        return "Compare it with the maximum of a measured band, which needs no zero-point energy."
    first = "Do not compare it with a measured value at 0 K or above before zero-point energy is added:"
    return f"{first} {_how_much(case)} It is not part of the bar."


def _how_much(case: Case) -> str:
    """What zero-point energy typically does to a question of this kind, in its unit."""
    unit = case.unit
    if isinstance(case.question, BondQuestion):
        return f"it lowers a bond energy, typically by {rough_range(5, 40, unit)} for each bond."
    if isinstance(case.question, IonisationQuestion | SpinGapQuestion):
        return (
            f"the two states have nearly the same, and the difference is typically below {rough(10, unit)}, "
            "more where the geometry changes much."
        )
    return (
        f"typically {rough_range(1, 10, unit)} where bonds are exchanged for like ones, and up to "
        f"{rough(100, unit)} where the number of molecules changes."
    )


def _vertical(case: Case) -> bool:
    """Whether an ionisation takes place at one geometry."""
    if not isinstance(case.question, IonisationQuestion) or len(case.species) != 2:
        return False
    return not _only_atoms(case) and _same_geometry(*case.species)


def _same_geometry(one: Species, other: Species) -> bool:
    """The same atoms in the same order at the same distances; mirror images are one geometry."""
    if [atom.symbol for atom in one.atoms] != [atom.symbol for atom in other.atoms]:
        return False
    return bool(np.abs(_distances(one) - _distances(other)).max() < SAME_PLACE)


def _distances(species: Species) -> np.ndarray:
    """Between each two atoms, in angstrom, shape (atoms, atoms)."""
    places = np.array([(atom.x, atom.y, atom.z) for atom in species.atoms])
    return np.linalg.norm(places[:, None] - places[None, :], axis=2)


def _same_place(case: Case) -> Iterator[Finding]:
    if not _vertical(case) or not isinstance(case.question, IonisationQuestion):
        return
    start, end = (case.brief.by_name[name] for name in (case.question.start, case.question.to))
    name = "ionisation energy" if end.charge > start.charge else "energy of attaching an electron"
    yield Finding(
        code="vertical-ionisation",
        severity="note",
        headline=f"{start.name} and {end.name} have one geometry, so this is a vertical {name}.",
        consequence=f"The adiabatic one, with {end.name} at its own geometry, is lower; give that geometry "
        "where it is meant.",
        evidence=(Evidence(reading="geometry", value="the same", source="arithmetic"),),
        remedies=(advice(f"For the adiabatic value, give {end.name} at its own optimised geometry"),),
    )


def _sign(case: Case) -> Iterator[Finding]:
    standing, question = case.standing, case.question
    if standing is None or not isinstance(question, SpinGapQuestion) or standing.value >= 0:
        return
    unsure = standing.uncertainty is not None and abs(standing.value) <= standing.uncertainty
    yield Finding(
        code="spin-gap-negative",
        severity="note",
        headline=f"The gap is negative: {question.low}, named as the low state, is the higher one.",
        consequence=(
            "The gap is smaller than its bar, so the order of the two states is not settled."
            if unsure
            else f"{question.high} lies {in_unit(standing.value, case.unit)} below {question.low} by "
            f"{standing.rung}."
        ),
        evidence=(Evidence(reading="gap", value=standing.value, threshold=0.0, unit=case.unit),),
    )


_BOND: Mapping[str, Any] = {"kind": "bond", "species": "n2", "fragments": ["n", "n"]}
_BOTH = {"n2": Molecule(), "n": Molecule(xyz="N 0 0 0", multiplicity=4)}


def _ionised(length: float, xyz: str = "N 0 0 0; N {0} 0 0") -> Example:
    ion = Molecule(xyz=xyz.format(length), charge=1, multiplicity=2)
    return Example(
        molecules={"n2": Molecule(xyz=xyz.format("1.1")), "n2+": ion},
        question={"kind": "ionisation", "from": "n2", "to": "n2+"},
    )


def _gap(value: float, uncertainty: float | None = 5.0) -> Example:
    return Example(
        molecules={
            "singlet": Molecule(xyz="O 0 0 0; O 0 0 1.21"),
            "triplet": Molecule(xyz="O 0 0 0; O 0 0 1.21", multiplicity=3),
        },
        question={"kind": "spin gap", "low": "singlet", "high": "triplet"},
        standing=Standing("CCSD(T)", value, uncertainty),
    )


RULES = (
    Rule(
        code="electronic-energy",
        severity="note",
        stage="after",
        reads=("the kind of question",),
        source=SCALES,
        judge=_electronic,
        quiet=(Example(), _ionised(0.0, "N 0 0 {0}")),
        loud=(Example(molecules=_BOTH, question=_BOND), _gap(90.0), _ionised(1.12), _ionised(1.1)),
    ),
    Rule(
        code="vertical-ionisation",
        severity="note",
        stage="always",
        reads=("atoms",),
        source="arithmetic",
        judge=_same_place,
        quiet=(Example(), _ionised(1.12), _ionised(0.0, "N 0 0 {0}")),
        loud=(_ionised(1.1),),
    ),
    Rule(
        code="spin-gap-negative",
        severity="note",
        stage="answer",
        reads=("the answer",),
        source="arithmetic",
        judge=_sign,
        quiet=(_gap(90.0), Example()),
        loud=(_gap(-90.0), _gap(-3.0)),
    ),
)
