"""How heavily triples weigh, and how far orbitals are from doubly occupied or empty."""

from plumbrule_core.documents.findings import Evidence, Finding, Severity
from plumbrule_core.judgement.case import Case, SpeciesView
from plumbrule_core.judgement.evidence import corroborated, evidence_of
from plumbrule_core.judgement.rules.base import Rule, each
from plumbrule_core.judgement.rules.example import Example, Molecule, measured
from plumbrule_core.judgement.rules.remedies import active_space
from plumbrule_core.judgement.thresholds import THRESHOLDS
from plumbrule_core.judgement.wording import rough_range


def _triples(case: Case, view: SpeciesView) -> Finding | None:
    percent, share = case.tae_triples(view), view.share_of_triples
    shown = [*_passed("%TAE[(T)]", percent, "tae_moderate", "tae_severe")]
    shown += _passed("share_of_triples", share, "share_of_triples_raised", "share_of_triples_serious")
    if not shown:
        return None
    severe = percent is not None and percent > THRESHOLDS["tae_severe"].value
    serious = share is not None and share > THRESHOLDS["share_of_triples_serious"].value
    severity: Severity = "care" if severe or serious else "note"
    return Finding(
        code="triples-large",
        severity=severity,
        species=view.name,
        rungs=tuple(name for name in case.rungs if name in ("HF", "MP2", "CCSD", "CCSD(T)")),
        headline=_triples_headline(view.name, percent, share),
        consequence=(
            "Where (T) is this large, what lies beyond it is no longer small, and rungs below CCSD(T) "
            "are far off."
            if severity == "care"
            else f"Rungs below CCSD(T) are off by {rough_range(10, 40, case.unit)} here; the bar of CCSD(T) "
            "allows for what lies beyond it."
        ),
        evidence=tuple(shown),
        remedies=active_space(case) if severity == "care" else (),
    )


def _passed(reading: str, value: float | None, raised: str, serious: str) -> tuple[Evidence, ...]:
    if value is None or value <= THRESHOLDS[raised].value:
        return ()
    return (
        evidence_of(reading, value, THRESHOLDS[serious if value > THRESHOLDS[serious].value else raised]),
    )


def _triples_headline(name: str, percent: float | None, share: float | None) -> str:
    if percent is not None and percent > THRESHOLDS["tae_moderate"].value:
        return f"(T) makes up {percent:.1f} % of the atomisation energy of {name}."
    return f"(T) makes up {100 * (share or 0):.1f} % of the correlation energy of {name}."


def _occupations(case: Case, view: SpeciesView) -> Finding | None:
    value, limit = view.number("M"), THRESHOLDS["m_large"]
    if value is None or value <= limit.value or view.exact_from_ccsd:
        return None
    severity: Severity = "care" if corroborated(case, view, "occupations") else "note"
    return Finding(
        code="occupations-fractional",
        severity=severity,
        species=view.name,
        rungs=case.single_reference,
        headline=f"{view.name} has orbitals that are neither full nor empty: M is {value:.2f}, above "
        f"{limit.value:g}.",
        consequence="A second arrangement of electrons has noticeable weight, which methods on one "
        "determinant miss in part.",
        evidence=(evidence_of("M", value, limit),),
        remedies=active_space(case) if severity == "care" else (),
    )


def _diradical(case: Case, view: SpeciesView) -> Finding | None:
    value, limit = view.number("uhf_fractional"), THRESHOLDS["uhf_fractional_diradical"]
    if value is None or value <= limit.value or not view.closed_shell:
        return None
    return Finding(
        code="diradical",
        severity="care",
        species=view.name,
        rungs=case.doubtful(view),
        headline=f"{view.name} is a diradical in its unrestricted solution: two orbitals hold one "
        "electron each.",
        consequence="A singlet with two open orbitals needs two determinants; "
        + (
            "HF and MP2 have one and lie far too high. With two electrons, CCSD holds both and is exact."
            if view.exact_from_ccsd
            else "one of them gives an energy that is far too high."
        ),
        evidence=(evidence_of("uhf_fractional", value, limit),),
        remedies=active_space(case),
    )


_ATOM = {"HF": -54.39, "CCSD": -54.4779, "CCSD(T)": -54.4785}


def _bond(ccsd: float, full: float) -> Example:
    """N2 with its atom, as a bond question between named fragments (cc-pVDZ, PySCF 2.14)."""
    return Example(
        molecules={
            "n2": Molecule(energies={"HF": -108.9, "CCSD": ccsd, "CCSD(T)": full}),
            "n": Molecule(xyz="N 0 0 0", multiplicity=4, energies=_ATOM),
        },
        question={"kind": "bond", "species": "n2", "fragments": ["n", "n"]},
    )


RULES = (
    Rule(
        code="triples-large",
        severity="care",
        stage="after",
        reads=("%TAE[(T)]", "share_of_triples"),
        source=THRESHOLDS["tae_severe"].source,
        judge=each(_triples),
        quiet=(measured(share_of_triples=0.037), measured(), _bond(-109.26358, -109.27551)),
        loud=(measured(share_of_triples=0.06), measured(share_of_triples=0.15), _bond(-109.0894, -109.1245)),
    ),
    Rule(
        code="occupations-fractional",
        severity="care",
        stage="after",
        reads=("M",),
        source=THRESHOLDS["m_large"].source,
        judge=each(_occupations),
        quiet=(measured(M=0.066), measured()),
        loud=(measured(M=0.17),),
    ),
    Rule(
        code="diradical",
        severity="care",
        stage="after",
        reads=("uhf_fractional",),
        source=THRESHOLDS["uhf_fractional_diradical"].source,
        judge=each(_diradical),
        quiet=(measured(uhf_fractional=0.2), measured()),
        loud=(measured(uhf_fractional=1.0),),
    ),
)
