"""Was anything measured that could speak against the number? A missing reading grades nothing."""

from collections.abc import Iterator, Mapping

from plumbrule_core.documents.findings import Evidence, Finding
from plumbrule_core.documents.results import Result
from plumbrule_core.judgement.case import Case, SpeciesView
from plumbrule_core.judgement.rules.base import Rule
from plumbrule_core.judgement.rules.convergence import stands_on
from plumbrule_core.judgement.rules.example import CALM, Example, Molecule
from plumbrule_core.judgement.rules.remedies import advice
from plumbrule_core.judgement.wording import listed
from plumbrule_core.rungs import SPACE

REQUIRED: Mapping[str, tuple[str, ...]] = {
    "HF": ("stable",),
    "MP2": ("mp2_largest_t2",),
    "CISD": ("c0_squared",),
    "CCSD": ("T1", "largest_t2"),
    "CCSD(T)": ("triples",),
    SPACE: ("s1_max",),
}
"""What each rung must have measured; without it nothing says whether its energy holds."""

RESTRICTED = ("stable_external",)
"""What HF must have measured as well where the reference is restricted."""


def missing(view: SpeciesView, rung: str, result: Result) -> tuple[str, ...]:
    """The readings that this result lacks; none are due where it has no pairs, or did not converge."""
    required = REQUIRED.get(rung, ())
    if rung == "HF":
        required += RESTRICTED if result.reference == "RHF" else ()
    elif view.correlated_electrons < 2 or result.correlation == 0.0:
        required = ()
    return tuple(name for name in required if result.reading(name) is None) if result.converged else ()


def _unchecked(case: Case) -> Iterator[Finding]:
    for view in case.views:
        lost = {
            key: gone
            for key, result in view.results.items()
            if (gone := missing(view, key[0], result)) or result.unchecked
        }
        if lost:
            yield _said(case, view, lost)


def _said(case: Case, view: SpeciesView, lost: Mapping[tuple[str, str], tuple[str, ...]]) -> Finding:
    rungs = tuple(dict.fromkeys(rung for rung, _ in lost))
    touched = {name for rung in rungs for name in _touched(case, rung)}
    return Finding(
        code="unchecked",
        severity="care",
        species=view.name,
        rungs=tuple(name for name in case.rungs if name in touched),
        headline=f"{listed(rungs)} of {view.name} could not be checked.",
        consequence="The readings that would show whether this energy holds are missing, so nothing "
        "speaks for it and nothing against it.",
        evidence=tuple(
            Evidence(
                reading=f"{rung} in {basis}",
                value=f"not measured: {', '.join(gone)}" if gone else "the readings could not be taken",
            )
            for (rung, basis), gone in lost.items()
        ),
        remedies=(advice("Run it again; if the readings stay away, save the report and send it"),),
    )


def _touched(case: Case, rung: str) -> tuple[str, ...]:
    """The rung and what stands on it; on Hartree-Fock only what stands on one determinant."""
    above = stands_on(case, rung)
    return tuple(name for name in above if name == rung or rung != "HF" or name in case.single_reference)


_ENERGIES = {"HF": -108.95, "MP2": -109.26, "CCSD": -109.26, "CCSD(T)": -109.27}
_READ = {name: value for readings in CALM.values() for name, value in readings.items()}


def _nitrogen(*lost: str) -> Example:
    readings = {"s2": 0.0, **{name: value for name, value in _READ.items() if name not in lost}}
    return Example(molecules={"n2": Molecule(energies=_ENERGIES, readings=readings)})


_ATOM = Molecule(
    xyz="H 0 0 0", multiplicity=2, energies={"HF": -0.5, "CCSD": -0.5}, readings={"stable": True}
)

RULES = (
    Rule(
        code="unchecked",
        severity="care",
        stage="after",
        reads=(*(name for names in REQUIRED.values() for name in names), *RESTRICTED),
        source="arithmetic",
        judge=_unchecked,
        quiet=(_nitrogen(), Example(), Example(molecules={"h": _ATOM})),
        loud=(_nitrogen("stable_external"), _nitrogen("largest_t2"), _nitrogen(*_READ)),
    ),
)
