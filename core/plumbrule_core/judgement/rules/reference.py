"""The Hartree-Fock reference: is it the right solution, and a stable one?"""

import re
from collections.abc import Iterable
from itertools import chain

from plumbrule_core.documents.findings import Evidence, Finding
from plumbrule_core.judgement.case import Case, SpeciesView
from plumbrule_core.judgement.evidence import evidence_of, grades
from plumbrule_core.judgement.rules.base import Rule, each
from plumbrule_core.judgement.rules.example import Example, Molecule, measured
from plumbrule_core.judgement.rules.remedies import active_space, change
from plumbrule_core.judgement.thresholds import THRESHOLDS
from plumbrule_core.judgement.wording import amount
from plumbrule_core.rungs import RUNGS
from plumbrule_core.units import to_hartree

LOWERED = re.compile(r"followed to one (\d+\.\d+) kJ/mol lower")
ARITHMETIC = "the second derivative of the Hartree-Fock energy"


def _saddle(case: Case, view: SpeciesView) -> Finding | None:
    if view.flag("stable") is not False:
        return None
    return Finding(
        code="hf-saddle",
        severity="stop",
        species=view.name,
        rungs=case.single_reference,
        headline=f"The Hartree-Fock solution of {view.name} is not a minimum.",
        consequence="A lower solution exists and could not be reached, so every number above it stands "
        "on the wrong one.",
        evidence=(Evidence(reading="stable", value="no", source=ARITHMETIC),),
        remedies=()
        if case.recipe.reference == "UHF"
        else (change("Use UHF and run", "recipe.reference", "UHF", True),),
    )


def _followed(case: Case, view: SpeciesView) -> Finding | None:
    notes = [result.notes for (rung, _), result in view.results.items() if rung == "HF"]
    gain = max(map(lowered_by, notes), default=0.0)
    if not gain:
        return None
    told = [note for note in dict.fromkeys(chain.from_iterable(notes)) if LOWERED.search(note)]
    correlated = [n for n in case.doubtful(view) if n != "HF" and RUNGS[n].kind == "wave function"]
    deep = gain > THRESHOLDS["instability_depth_care"].value
    far = deep and bool(correlated) and any(one.grade for one in grades(case, view))
    return Finding(
        code="hf-followed",
        severity="care" if far else "note",
        species=view.name,
        rungs=tuple(correlated) if far else (),
        headline=f"The first Hartree-Fock solution of {view.name} was not the lowest: the one that was taken "
        f"lies {amount(gain, case.unit)} below it.",
        consequence=_on_the_lower(far),
        evidence=tuple(Evidence(reading="Hartree-Fock", value=note[:400]) for note in told),
    )


def _on_the_lower(far: bool) -> str:
    curve = "On a curve, the same solution must be used at every point."
    if not far:
        return f"Everything above stands on the lower solution. {curve}"
    return (
        "A solution that much lower has as a rule less symmetry than the molecule. Correlated numbers on it "
        "can be far off, worse than on the first solution, although Hartree-Fock itself is lower. " + curve
    )


def lowered_by(notes: Iterable[str]) -> float:
    """The energy in hartree by which one run of Hartree-Fock followed instabilities down, by its notes."""
    gains = (LOWERED.search(note) for note in notes)
    return sum(to_hartree(float(gain[1]), "kJ/mol") for gain in gains if gain)


def _spread(case: Case, view: SpeciesView) -> Finding | None:
    said = [note for (rung, _), result in view.results.items() if rung == "HF" for note in result.notes]
    told = [note for note in dict.fromkeys(said) if "spread over" in note]
    if not told:
        return None
    return Finding(
        code="hf-guesses-spread",
        severity="note",
        species=view.name,
        headline=f"Different starts led to different Hartree-Fock solutions of {view.name}.",
        consequence="The lowest was taken. Another program, or another start, can end in a higher one "
        "and disagree.",
        evidence=tuple(Evidence(reading="Hartree-Fock", value=note[:400]) for note in told),
    )


def _unstable(case: Case, view: SpeciesView) -> Finding | None:
    depth, limit = view.number("instability_depth"), THRESHOLDS["instability_depth_note"]
    if depth is None or depth <= limit.value:
        return None
    deep = depth > THRESHOLDS["instability_depth_care"].value
    shown = [evidence_of("instability_depth", depth, THRESHOLDS["instability_depth_care"] if deep else limit)]
    if (unpaired := view.number("uhf_fractional")) is not None:
        shown.append(Evidence(reading="uhf_fractional", value=unpaired, unit="electrons"))
    return Finding(
        code="hf-unstable-external",
        severity="care" if deep else "note",
        species=view.name,
        rungs=case.doubtful(view),
        headline=f"{view.name}: an unrestricted solution lies {amount(depth, case.unit)} below the "
        "restricted one.",
        consequence=(
            "The electron pairs are loosening; coupled cluster "
            f"{'of two electrons' if view.exact_from_ccsd else 'often'} repairs this, MP2 does not."
            if deep
            else "So little that it does not show in the number; it is the earliest sign of a loosening pair."
        ),
        evidence=tuple(shown),
        remedies=active_space(case) if deep else (),
    )


def _gap(case: Case, view: SpeciesView) -> Finding | None:
    gap, limit = view.number("homo_lumo_gap"), THRESHOLDS["gap_small"]
    if gap is None or gap >= limit.value:
        return None
    return Finding(
        code="gap-small",
        severity="care" if gap < 0 else "note",
        species=view.name,
        rungs=case.doubtful(view),
        headline=f"{view.name} has a small Hartree-Fock gap of {gap:.1f} eV.",
        consequence=(
            "An empty orbital lies below a filled one, so the state that was computed is probably not "
            "the ground state."
            if gap < 0
            else "MP2 and (T) divide by such gaps and overshoot when they are small."
        ),
        evidence=(evidence_of("homo_lumo_gap", gap, limit),),
    )


def _told(*notes: str, **readings: float) -> Molecule:
    return Molecule(energies={"HF": -108.9}, notes=notes, readings=readings)


RULES = (
    Rule(
        code="hf-saddle",
        severity="stop",
        stage="after",
        reads=("stable",),
        source=ARITHMETIC,
        judge=each(_saddle),
        quiet=(measured(stable=True), measured()),
        loud=(measured(stable=False),),
    ),
    Rule(
        code="hf-followed",
        severity="care",
        stage="after",
        reads=("notes of HF", "the grades of every reading"),
        source=ARITHMETIC,
        judge=each(_followed),
        quiet=(Example(molecules={"n2": _told("20 iterations")}),),
        loud=(
            Example(molecules={"n2": _told("followed to one 0.70 kJ/mol lower")}),
            Example(molecules={"n2": _told("followed to one 362.42 kJ/mol lower", largest_t2=0.36)}),
        ),
    ),
    Rule(
        code="hf-guesses-spread",
        severity="note",
        stage="after",
        reads=("notes of HF",),
        source=ARITHMETIC,
        judge=each(_spread),
        quiet=(Example(molecules={"cn": _told("3 starting guesses; all that converged agree")}),),
        loud=(
            Example(
                molecules={"cn": _told("3 starting guesses; they spread over 946.6 kJ/mol (0.3605 hartree)")}
            ),
        ),
    ),
    Rule(
        code="hf-unstable-external",
        severity="care",
        stage="after",
        reads=("instability_depth", "uhf_fractional"),
        source=THRESHOLDS["instability_depth_care"].source,
        judge=each(_unstable),
        quiet=(measured(instability_depth=0.0), measured(instability_depth=9e-6), measured()),
        loud=(measured(instability_depth=0.0036), measured(instability_depth=0.1, uhf_fractional=1.0)),
    ),
    Rule(
        code="gap-small",
        severity="care",
        stage="after",
        reads=("homo_lumo_gap",),
        source=THRESHOLDS["gap_small"].source,
        judge=each(_gap),
        quiet=(measured(homo_lumo_gap=12.0), measured()),
        loud=(measured(homo_lumo_gap=3.1), measured(homo_lumo_gap=-0.5)),
    ),
)
