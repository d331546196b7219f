"""Does one determinant describe a species? Independent families of readings, each graded 0 to 3.

No single reading decides about coupled cluster. The families are the stability of the reference, the doubles
and the singles amplitudes, the weight of the triples, the natural occupations, the weight of the reference
determinant, the spin, and whether CCSD converged. Grades: 0 calm, 1 raised,
2 serious, 3 broken. Limits are published ones where there are any; how far beyond them is serious is our own
calibration (`thresholds.json` names each).
"""

from collections.abc import Callable, Mapping
from dataclasses import dataclass

from plumbrule_core.documents.findings import Evidence
from plumbrule_core.documents.species import Species
from plumbrule_core.elements import ELEMENTS
from plumbrule_core.judgement.case import Case, SpeciesView
from plumbrule_core.judgement.thresholds import THRESHOLDS, Threshold

Limits = tuple[str, ...]
"""Names of thresholds for grades 1, 2, 3."""


_DOUBLES = ("t2_notable", "t2_serious", "t2_broken")
_UPPER: Mapping[str, Limits] = {
    "largest_t2": _DOUBLES,
    "mp2_largest_t2": _DOUBLES,
    "D2": ("d2",),
    "%TAE[(T)]": ("tae_moderate", "tae_severe"),
    "share_of_triples": ("share_of_triples_raised", "share_of_triples_serious", "share_of_triples_broken"),
    "M": ("m_large", "m_serious"),
    "s2_excess": ("spin_care", "spin_stop"),
}
_RESTRICTED: Mapping[str, Limits] = {
    "instability_depth": ("instability_depth_care",),
    "uhf_fractional": ("uhf_fractional_serious", "uhf_fractional_diradical"),
}
"""Upper limits that hold of closed shells alone."""

LOWER: Mapping[str, Limits] = {
    "c0_squared": ("c0_squared",),
    "homo_lumo_gap": ("gap_small",),
    "overlap_condition": ("overlap_small",),
}
"""Readings that should stay above a limit; the others stay below."""


def limits_of(reading: str, species: Species) -> Limits:
    """The limits of a reading that fit the species, the first first; empty where it has none."""
    if reading in ("T1", "D1"):
        return (singles_limits(species)[reading == "D1"],)
    upper = {**_UPPER, **_RESTRICTED} if species.multiplicity == 1 else _UPPER
    return upper.get(reading) or LOWER.get(reading, ())


@dataclass(frozen=True, slots=True)
class Grade:
    """How one family speaks, with the readings that made it."""

    family: str
    grade: int
    evidence: tuple[Evidence, ...] = ()


def evidence_of(reading: str, value: float, limit: Threshold) -> Evidence:
    """One reading beside the limit it passed."""
    return Evidence(reading=reading, value=value, threshold=limit.value, unit=limit.unit, source=limit.source)


def _grade(view: SpeciesView, reading: str, value: float | None) -> tuple[int, tuple[Evidence, ...]]:
    if value is None:
        return 0, ()
    limits = limits_of(reading, view.species)
    passed = [THRESHOLDS[name] for name in limits if value > THRESHOLDS[name].value]
    return len(passed), (evidence_of(reading, value, passed[0]),) if passed else ()


def _worst(family: str, *graded: tuple[int, tuple[Evidence, ...]]) -> Grade:
    return Grade(family, max(g for g, _ in graded), tuple(one for _, shown in graded for one in shown))


def reference_grade(view: SpeciesView) -> Grade:
    """The stability of a restricted reference: how deep a lower solution lies, how unpaired it is."""
    depth, unpaired = view.number("instability_depth"), view.number("uhf_fractional")
    if not view.closed_shell or depth is None or depth <= THRESHOLDS["instability_depth_care"].value:
        return Grade("reference", 0)
    shown = [evidence_of("instability_depth", depth, THRESHOLDS["instability_depth_care"])]
    grade = 1
    if unpaired is not None and unpaired > THRESHOLDS["uhf_fractional_serious"].value:
        diradical = unpaired > THRESHOLDS["uhf_fractional_diradical"].value
        deep = depth > THRESHOLDS["instability_depth_broken"].value
        grade = 3 if diradical or deep else 2
        limit = "uhf_fractional_diradical" if diradical else "uhf_fractional_serious"
        shown.append(evidence_of("uhf_fractional", unpaired, THRESHOLDS[limit]))
    return Grade("reference", grade, tuple(shown))


def doubles_grade(view: SpeciesView) -> Grade:
    """The largest doubles amplitude (of CCSD, else of MP2) and D2."""
    name = "largest_t2" if view.number("largest_t2") is not None else "mp2_largest_t2"
    return _worst(
        "doubles",
        _grade(view, name, view.number(name)),
        _grade(view, "D2", view.number("D2")),
    )


def singles_limits(species: Species) -> tuple[str, str]:
    """Which limits of T1 and of D1 fit the species."""
    if any(ELEMENTS[symbol].is_transition_metal for symbol in species.counts):
        return "t1_metal", "d1_metal"
    return ("t1_closed", "d1") if species.multiplicity == 1 else ("t1_open", "d1_open")


def singles_grade(view: SpeciesView) -> Grade:
    """T1 and D1 with the limits that fit the species; twice the limit of both, or a huge T1, is more."""
    t1_limit, d1_limit = singles_limits(view.species)
    t1, d1 = view.number("T1"), view.number("D1")
    graded = _worst("singles", _grade(view, "T1", t1), _grade(view, "D1", d1))
    if not graded.grade or t1 is None or d1 is None:
        return graded
    twice = t1 > 2 * THRESHOLDS[t1_limit].value and d1 > 2 * THRESHOLDS[d1_limit].value
    huge = t1 > THRESHOLDS["t1_broken"].value
    grade = 3 if huge and view.closed_shell else 2 if huge or twice else 1
    return Grade("singles", grade, graded.evidence)


def triples_grade(view: SpeciesView, case: Case) -> Grade:
    """The weight of (T) in the atomisation energy, where atoms were computed, and in correlation."""
    return _worst(
        "triples",
        _grade(view, "%TAE[(T)]", case.tae_triples(view)),
        _grade(view, "share_of_triples", view.share_of_triples),
    )


def occupations_grade(view: SpeciesView) -> Grade:
    """How far the MP2 natural occupations are from two and none, as M."""
    return _worst("occupations", _grade(view, "M", view.number("M")))


def spin_grade(view: SpeciesView) -> Grade:
    """How far <S^2> lies above that of the spin state."""
    return _worst("spin", _grade(view, "s2_excess", view.number("s2_excess")))


def configuration_grade(view: SpeciesView) -> Grade:
    """The weight of the reference determinant, of CISD or of the active space.

    The weight of CISD falls with the number of electrons too, so this family is raised, never more.
    """
    weight, limit = view.number("c0_squared"), THRESHOLDS["c0_squared"]
    if weight is None or weight >= limit.value:
        return Grade("configuration", 0)
    return Grade("configuration", 1, (evidence_of("c0_squared", weight, limit),))


def convergence_grade(view: SpeciesView) -> Grade:
    """CCSD that does not converge is raised: it often fails where one determinant does."""
    lost = [one for (rung, _), one in view.results.items() if rung in ("CCSD", "CCSDT") and not one.converged]
    if not lost:
        return Grade("convergence", 0)
    shown = Evidence(reading=f"iterations of {lost[0].rung}", value=float(lost[0].iterations))
    return Grade("convergence", 1, (shown,))


def grades(case: Case, view: SpeciesView) -> tuple[Grade, ...]:
    """Every family."""
    plain: tuple[Callable[[SpeciesView], Grade], ...] = (
        reference_grade,
        doubles_grade,
        singles_grade,
        occupations_grade,
        spin_grade,
        configuration_grade,
        convergence_grade,
    )
    return (*(family(view) for family in plain), triples_grade(view, case))


def corroborated(case: Case, view: SpeciesView, family: str) -> bool:
    """Whether another family than this one is raised as well."""
    return any(one.grade and one.family != family for one in grades(case, view))


FAMILY_WORDS: Mapping[str, str] = {
    "reference": "its Hartree-Fock reference is unstable",
    "doubles": "a pair of electrons is excited strongly",
    "singles": "the orbitals want to change",
    "triples": "triple excitations weigh heavily",
    "occupations": "orbitals are far from doubly occupied or empty",
    "spin": "the reference is not a clean spin state",
    "configuration": "the reference determinant has less weight than it should",
    "convergence": "coupled cluster did not converge",
}
"""What each family says, in words."""
