"""Spin: contamination of an unrestricted reference, and a spin state that is not the ground state."""

from plumbrule_core.documents.findings import Evidence, Finding
from plumbrule_core.documents.ground_states import ground_multiplicity
from plumbrule_core.documents.questions import EnergyQuestion, SpinGapQuestion
from plumbrule_core.documents.species import SPIN_WORDS, Species, lowest_multiplicity
from plumbrule_core.judgement.case import Case, SpeciesView
from plumbrule_core.judgement.evidence import evidence_of
from plumbrule_core.judgement.rules.base import Rule, each
from plumbrule_core.judgement.rules.example import Example, Molecule
from plumbrule_core.judgement.rules.remedies import active_space, restricted_open_shell, spin_state
from plumbrule_core.judgement.thresholds import THRESHOLDS
from plumbrule_core.judgement.wording import rough_range
from plumbrule_core.rungs import RUNGS


def _contaminated(case: Case, view: SpeciesView) -> Finding | None:
    excess = view.number("s2_excess")
    care, stop = THRESHOLDS["spin_care"], THRESHOLDS["spin_stop"]
    if excess is None or excess <= care.value:
        return None
    bad = excess > stop.value
    return Finding(
        code="spin-contamination",
        severity="stop" if bad else "care",
        species=view.name,
        rungs=tuple(name for name in case.single_reference if RUNGS[name].kind == "wave function"),
        headline=f"The reference of {view.name} is mixed with other spin states: <S²> is {excess:.2f} "
        "too high.",
        consequence=(
            "It is no longer the state that was asked for, and correlated rungs inherit the mixture."
            if bad
            else "MP2 suffers most; CCSD and CCSD(T) repair a part of it."
        ),
        evidence=_spin_evidence(view, excess, bad),
        remedies=(*restricted_open_shell(case), *(active_space(case) if bad else ())),
    )


def _spin_evidence(view: SpeciesView, excess: float, bad: bool) -> tuple[Evidence, ...]:
    limit = THRESHOLDS["spin_stop" if bad else "spin_care"]
    beside = [
        Evidence(reading=name, value=value)
        for name in ("s2", "s2_ideal")
        if (value := view.number(name)) is not None
    ]
    return (evidence_of("s2_excess", excess, limit), *beside)


def _other_state(case: Case, view: SpeciesView) -> Finding | None:
    one = view.species
    ground = ground_multiplicity(one.atoms, one.charge)
    if (
        isinstance(case.question, SpinGapQuestion)
        or one.faults()
        or not _expects(view)
        or ground == one.multiplicity
    ):
        return None
    asked, known = (SPIN_WORDS.get(m, f"multiplicity {m}") for m in (one.multiplicity, ground))
    return Finding(
        code="spin-state",
        severity="care" if _known(one) and not isinstance(case.question, EnergyQuestion) else "note",
        species=one.name,
        headline=f"{one.name} ({one.formula}) is asked for as a {asked}; its ground state is expected "
        f"to be a {known}.",
        consequence=f"The wrong spin state shifts the number by {rough_range(20, 400, case.unit)}.",
        evidence=(
            Evidence(
                reading="multiplicity",
                value=float(one.multiplicity),
                threshold=float(ground),
                source=SPIN_SOURCE,
            ),
        ),
        remedies=spin_state(case, one.name, ground, f"Take {one.name} as a {known}"),
    )


def _expects(view: SpeciesView) -> bool:
    """Whether a ground state can be expected at all: not of molecules with metals, nor of atomic ions."""
    return view.species.charge == 0 if len(view.species.atoms) == 1 else not view.has_metal


def _known(species: Species) -> bool:
    """Whether the ground state is known, not merely the lowest spin that fits."""
    lowest = lowest_multiplicity((atom.symbol for atom in species.atoms), species.charge)
    known = ground_multiplicity(species.atoms, species.charge) != lowest
    return known or (len(species.atoms) == 1 and species.charge == 0)


SPIN_SOURCE = "atoms: NIST Atomic Spectra Database; small molecules: common practice; else the lowest spin"


def _radical(excess: float) -> Example:
    return Example(
        molecules={"cn": Molecule(xyz="C 0 0 0; N 0 0 1.17", multiplicity=2, readings={"s2_excess": excess})}
    )


def _oxygen(multiplicity: int) -> Example:
    return Example(molecules={"o2": Molecule(xyz="O 0 0 0; O 0 0 1.21", multiplicity=multiplicity)})


def _atom(symbol: str, multiplicity: int, charge: int) -> Example:
    return Example(
        molecules={"atom": Molecule(xyz=f"{symbol} 0 0 0", multiplicity=multiplicity, charge=charge)}
    )


RULES = (
    Rule(
        code="spin-contamination",
        severity="stop",
        stage="after",
        reads=("s2_excess", "s2", "s2_ideal"),
        source=THRESHOLDS["spin_care"].source,
        judge=each(_contaminated),
        quiet=(_radical(0.003), _radical(0.045)),
        loud=(_radical(0.4), _radical(0.94)),
    ),
    Rule(
        code="spin-state",
        severity="care",
        stage="always",
        reads=("multiplicity",),
        source=SPIN_SOURCE,
        judge=each(_other_state),
        quiet=(_oxygen(3), _atom("O", 4, 1), _atom("Ni", 3, 0)),
        loud=(_oxygen(1), _atom("O", 1, 0)),
    ),
)
