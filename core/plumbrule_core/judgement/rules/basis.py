"""The basis set: enough, fit for the question, and honest about its limit."""

from collections.abc import Iterator

from plumbrule_core.basis_sets import Basis, find, frozen_orbitals
from plumbrule_core.documents.findings import Evidence, Finding
from plumbrule_core.documents.questions import EnergyQuestion
from plumbrule_core.elements import ELEMENTS
from plumbrule_core.judgement.case import Case, SpeciesView
from plumbrule_core.judgement.rules.base import Rule, each
from plumbrule_core.judgement.rules.example import Example, Molecule
from plumbrule_core.judgement.rules.remedies import change, covering, larger_basis, with_diffuse
from plumbrule_core.judgement.wording import listed, rough_range

PRACTICE = "common practice, no source"
STATISTICS = (
    "own statistics from public CCSD(T) energies to 6Z: DT is off by as much as TZ for closed-shell reactions"
)


def _anion(case: Case, view: SpeciesView) -> Finding | None:
    largest = case.largest
    if view.species.charge >= 0 or largest is None or largest.diffuse:
        return None
    return Finding(
        code="anion-not-diffuse",
        severity="care",
        species=view.name,
        headline=f"{view.name} is an anion, and {largest.name} has no diffuse functions.",
        consequence="The extra electron is squeezed into too small a space; its energy is too high, "
        f"typically by {rough_range(20, 300, case.unit)}, and an electron affinity from it is too small by "
        "as much.",
        evidence=(Evidence(reading="charge", value=float(view.species.charge), source=PRACTICE),),
        remedies=with_diffuse(case),
    )


def _core(case: Case) -> Iterator[Finding]:
    if case.recipe.core == "frozen" or not any(name != "HF" for name in case.wave_functions):
        return
    for basis in case.bases:
        cored = [
            one.name
            for one in case.species
            if not basis.missing(one.counts) and frozen_orbitals(one.counts, basis)
        ]
        if cored and not basis.core_valence:
            partners = [one.core_partner for one in case.bases if one.core_partner]
            yield Finding(
                code="core-without-functions",
                severity="stop",
                headline=f"All electrons are to be correlated, but {basis.name} describes the valence alone.",
                consequence=f"The core of {', '.join(cored)} would be correlated badly; the error "
                "exceeds what is to be gained.",
                evidence=(Evidence(reading="basis", value=basis.name, source=PRACTICE),),
                remedies=(
                    change("Freeze the core", "recipe.core", "frozen"),
                    *(
                        (change(f"Use {' and '.join(partners)}", "recipe.basis", partners),)
                        if partners
                        else ()
                    ),
                ),
            )


def _unfrozen(case: Case) -> Iterator[Finding]:
    largest = case.largest
    if case.recipe.core != "frozen" or largest is None or not any(n != "HF" for n in case.wave_functions):
        return
    symbols = dict.fromkeys(atom.symbol for one in case.species for atom in one.atoms)
    free = [symbol for symbol in symbols if _keeps_its_core(symbol, largest)]
    if not free:
        return
    replaced = [symbol for symbol in free if largest.potential_electrons(symbol)]
    yield Finding(
        code="core-not-frozen",
        severity="note",
        headline=f"The frozen core freezes nothing of {listed(free)}.",
        consequence=" ".join(_why_unfrozen([s for s in free if s not in replaced], replaced)),
        evidence=(
            Evidence(
                reading="frozen orbitals", value=0.0, source="the table of frozen cores of this program"
            ),
        ),
    )


def _keeps_its_core(symbol: str, basis: Basis) -> bool:
    """Whether an element has a core of which the table, or its potential, leaves nothing to freeze."""
    return (
        ELEMENTS[symbol].number > 2 and not basis.missing((symbol,)) and not frozen_orbitals((symbol,), basis)
    )


def _why_unfrozen(near: list[str], replaced: list[str]) -> Iterator[str]:
    if near:
        yield (
            f"The core of {listed(near)} lies close to the valence, so the table correlates it, in a basis "
            "set that is made for the valence."
        )
    if replaced:
        yield (
            f"The core potential replaces the inner core of {listed(replaced)}; every electron outside it is "
            "correlated."
        )


def _uncovered(case: Case) -> Iterator[Finding]:
    for basis in case.bases:
        lacking = {one.name: basis.missing(one.counts) for one in case.species if basis.missing(one.counts)}
        if lacking:
            elements = sorted({symbol for missing in lacking.values() for symbol in missing})
            yield Finding(
                code="basis-missing",
                severity="stop",
                species=next(iter(lacking)),
                headline=f"{basis.name} has no functions for {', '.join(elements)}.",
                consequence="Nothing can be run with this basis set.",
                evidence=(
                    Evidence(reading="basis", value=basis.name, source="the basis table of this program"),
                ),
                remedies=covering(case),
            )


def _unknown(case: Case) -> Iterator[Finding]:
    for name in case.recipe.basis:
        if find(name) is None:
            yield Finding(
                code="basis-unknown",
                severity="stop",
                headline=f"There is no basis set named {name} here.",
                consequence="Nothing can be run before a known one is chosen.",
                evidence=(Evidence(reading="basis", value=name, source="the basis table of this program"),),
                remedies=covering(case),
            )


def _minimal(case: Case) -> Iterator[Finding]:
    largest = case.largest
    if largest is None or largest.zeta > 1:
        return
    yield Finding(
        code="basis-minimal",
        severity="care",
        headline=f"{largest.name} is a minimal basis set.",
        consequence="It is good for a first look; reaction and bond energies from it are off by "
        f"{rough_range(40, 400, case.unit)}.",
        evidence=(Evidence(reading="basis", value=largest.name, source=PRACTICE),),
        remedies=larger_basis(case),
    )


def _not_a_limit(case: Case) -> Iterator[Finding]:
    if len(case.bases) != 2 or case.bases[0].cardinal != 2 or isinstance(case.question, EnergyQuestion):
        return
    yield Finding(
        code="extrapolation-from-double-zeta",
        severity="note",
        headline="An extrapolation from double and triple zeta is not a limit.",
        consequence="For reactions of closed-shell molecules it is no better than triple zeta alone; "
        "the bar is that of the pair.",
        evidence=(Evidence(reading="basis", value=case.recipe.basis_text, source=STATISTICS),),
        remedies=larger_basis(case),
    )


def _small(basis: list[str]) -> Example:
    return Example(recipe={"basis": basis})


def _asked(charge: int, basis: str) -> Example:
    ion = Molecule(xyz="O 0 0 0; H 0 0 0.96", charge=charge)
    return Example(molecules={"hydroxide": ion}, recipe={"basis": [basis]})


_PAIR = Example(
    molecules={"n2": Molecule(), "n": Molecule(xyz="N 0 0 0", multiplicity=4)},
    question={"kind": "bond", "species": "n2", "fragments": ["n", "n"]},
    recipe={"basis": ["cc-pVDZ", "cc-pVTZ"]},
)
_TQ = Example(molecules=_PAIR.molecules, question=_PAIR.question, recipe={"basis": ["cc-pVTZ", "cc-pVQZ"]})

RULES = (
    Rule(
        code="anion-not-diffuse",
        severity="care",
        stage="always",
        reads=("charge", "basis"),
        source=PRACTICE,
        judge=each(_anion),
        quiet=(_asked(-1, "aug-cc-pVTZ"), Example()),
        loud=(_asked(-1, "cc-pVTZ"), _asked(-1, "6-31G*")),
    ),
    Rule(
        code="core-without-functions",
        severity="stop",
        stage="always",
        reads=("core", "basis"),
        source=PRACTICE,
        judge=_core,
        quiet=(Example(), Example(recipe={"core": "all", "basis": ["cc-pCVTZ"]})),
        loud=(Example(recipe={"core": "all"}),),
    ),
    Rule(
        code="core-not-frozen",
        severity="note",
        stage="always",
        reads=("core", "basis"),
        source="the table of frozen cores of this program",
        judge=_unfrozen,
        quiet=(
            Example(),
            Example(recipe={"core": "all"}),
            Example(
                molecules={"be2": Molecule(xyz="Be 0 0 0; Be 0 0 2.45")}, recipe={"rungs": ["HF", "PBE"]}
            ),
        ),
        loud=(
            Example(molecules={"be2": Molecule(xyz="Be 0 0 0; Be 0 0 2.45")}),
            Example(
                molecules={"agh": Molecule(xyz="Ag 0 0 0; H 0 0 1.62")}, recipe={"basis": ["def2-TZVPP"]}
            ),
        ),
    ),
    Rule(
        code="basis-missing",
        severity="stop",
        stage="before",
        reads=("basis",),
        source="the basis table of this program",
        judge=_uncovered,
        quiet=(Example(),),
        loud=(Example(molecules={"iodine": Molecule(xyz="I 0 0 0; I 0 0 2.67")}),),
    ),
    Rule(
        code="basis-unknown",
        severity="stop",
        stage="before",
        reads=("basis",),
        source="the basis table of this program",
        judge=_unknown,
        quiet=(Example(), _small(["def2-svp"])),
        loud=(_small(["cc-pVTZZ"]),),
    ),
    Rule(
        code="basis-minimal",
        severity="care",
        stage="always",
        reads=("basis",),
        source=PRACTICE,
        judge=_minimal,
        quiet=(Example(), _small(["cc-pVDZ"])),
        loud=(_small(["STO-3G"]),),
    ),
    Rule(
        code="extrapolation-from-double-zeta",
        severity="note",
        stage="always",
        reads=("basis",),
        source=STATISTICS,
        judge=_not_a_limit,
        quiet=(_TQ, Example()),
        loud=(_PAIR,),
    ),
)
