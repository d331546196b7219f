"""Did the calculation arrive, and does the basis hold together numerically?"""

from collections.abc import Iterator

from plumbrule_core.documents.findings import Evidence, Finding
from plumbrule_core.documents.results import Result
from plumbrule_core.judgement.case import Case, SpeciesView
from plumbrule_core.judgement.evidence import evidence_of
from plumbrule_core.judgement.rules.base import Rule, each
from plumbrule_core.judgement.rules.example import Example, Molecule, measured
from plumbrule_core.judgement.rules.remedies import active_space, advice
from plumbrule_core.judgement.thresholds import THRESHOLDS
from plumbrule_core.judgement.wording import rough_range
from plumbrule_core.rungs import RUNGS


def _unconverged(case: Case) -> Iterator[Finding]:
    for view in case.views:
        for (rung, basis), result in view.results.items():
            if not result.converged:
                yield _not_arrived(case, view, rung, basis, result)


def _not_arrived(case: Case, view: SpeciesView, rung: str, basis: str, result: Result) -> Finding:
    blocked = stands_on(case, rung)
    above = (
        f", nor is anything above it ({', '.join(name for name in blocked if name != rung)})"
        if len(blocked) > 1
        else ""
    )
    return Finding(
        code="not-converged",
        severity="stop",
        species=view.name,
        rungs=blocked,
        headline=f"{rung} of {view.name} in {basis} did not converge.",
        consequence=f"Its energy is not a result{above}.",
        evidence=(Evidence(reading="iterations", value=float(result.iterations)),),
        remedies=(
            advice(
                "Check the geometry and the spin state first; a difficult convergence often has its "
                "reason there"
            ),
            *(active_space(case) if rung != "HF" else ()),
        ),
    )


def stands_on(case: Case, rung: str) -> tuple[str, ...]:
    """The rung and those above that need it."""
    return tuple(name for name in case.rungs if name == rung or rung in _all_needs(name))


def _all_needs(rung: str) -> frozenset[str]:
    direct = RUNGS[rung].needs
    return frozenset(direct).union(*(_all_needs(need) for need in direct if need in RUNGS))


def _dependent(case: Case, view: SpeciesView) -> Finding | None:
    removed, condition = view.number("removed_functions"), view.number("overlap_condition")
    limit = THRESHOLDS["overlap_small"]
    tight = condition is not None and condition < limit.value
    if not removed and not tight:
        return None
    shown = [Evidence(reading="removed_functions", value=removed, unit="functions")] if removed else []
    if condition is not None:
        shown.append(evidence_of("overlap_condition", condition, limit))
    return Finding(
        code="linear-dependence",
        severity="care" if removed else "note",
        species=view.name,
        headline=(
            f"{removed:.0f} functions of {view.name} were nearly copies of others and were removed."
            if removed
            else f"Basis functions of {view.name} are nearly copies of each other."
        ),
        consequence=(
            "The species of the question no longer have the same basis; the difference can be off by "
            f"{rough_range(1, 10, case.unit)}."
            if removed
            else "Rounding errors grow, but nothing was removed and the number stands."
        ),
        evidence=tuple(shown),
        remedies=(advice("Use the same family without the most diffuse functions"),) if removed else (),
    )


_LADDER = {"HF": -108.95, "MP2": -109.26, "CCSD": -109.26, "CCSD(T)": -109.27}

RULES = (
    Rule(
        code="not-converged",
        severity="stop",
        stage="after",
        reads=("converged",),
        source="arithmetic",
        judge=_unconverged,
        quiet=(Example(molecules={"n2": Molecule(energies=_LADDER)}), Example()),
        loud=(Example(molecules={"n2": Molecule(energies=_LADDER, converged=False)}),),
    ),
    Rule(
        code="linear-dependence",
        severity="care",
        stage="after",
        reads=("removed_functions", "overlap_condition"),
        source=THRESHOLDS["overlap_small"].source,
        judge=each(_dependent),
        quiet=(measured(removed_functions=0.0, overlap_condition=2e-3), measured()),
        loud=(measured(removed_functions=3.0), measured(removed_functions=0.0, overlap_condition=3e-8)),
    ),
)
