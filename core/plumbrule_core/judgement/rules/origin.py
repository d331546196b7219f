"""Where a geometry comes from, and whether it is one molecule."""

from collections.abc import Iterator, Sequence

from plumbrule_core.documents.bonding import pieces
from plumbrule_core.documents.findings import Evidence, Finding
from plumbrule_core.documents.questions import BondQuestion
from plumbrule_core.documents.species import Species
from plumbrule_core.judgement.case import Case, SpeciesView
from plumbrule_core.judgement.geometry_origin import origin_of
from plumbrule_core.judgement.rules.base import Rule, each
from plumbrule_core.judgement.rules.example import Example, Molecule
from plumbrule_core.judgement.rules.remedies import advice
from plumbrule_core.judgement.wording import listed, rough_range


def _pieces(case: Case, view: SpeciesView) -> Finding | None:
    parts = pieces(len(view.species.atoms), view.bonds)
    if len(parts) < 2:
        return None
    sizes = listed(str(len(part)) for part in parts)
    return Finding(
        code="unbonded-pieces",
        severity="note",
        species=view.name,
        headline=f"{view.name} consists of {len(parts)} pieces that no bond joins.",
        consequence="Each piece borrows basis functions of the others, which makes them stick together "
        f"too well: up to {rough_range(8, 13, case.unit)} in double zeta. If this was meant to be one "
        "molecule, its geometry is wrong.",
        evidence=(
            Evidence(reading="atoms in the pieces", value=sizes, source="own, water dimer in cc-pVDZ"),
        ),
        remedies=(advice("For a binding energy, use a large basis set with diffuse functions"),),
    )


def _origin(case: Case) -> Iterator[Finding]:
    for kind, headline in (
        ("force field", "The {geometry} of {names} built, not optimised."),
        ("unknown", "Nobody said where the {geometry} of {names} from."),
    ):
        named = [one for one in case.species if origin_of(one) == kind]
        if named:
            yield _said(kind, headline, named)


def _said(kind: str, headline: str, named: list[Species]) -> Finding:
    alone, names = len(named) == 1, listed(one.name for one in named)
    verb = {"force field": "was" if alone else "were", "unknown": "comes" if alone else "come"}[kind]
    given = list(dict.fromkeys(one.origin or "not given" for one in named))
    return Finding(
        code="geometry-origin",
        severity="note",
        species=named[0].name if alone else "",
        headline=headline.format(geometry="geometry" if alone else "geometries", names=f"{names} {verb}"),
        consequence="The strain that is left in it is in the number; the budget allows for a typical amount.",
        evidence=(Evidence(reading="origin", value="; ".join(given)[:400], source="arithmetic"),),
        remedies=(
            advice(
                "Give geometries that were optimised with a correlated method or a functional, and say so"
            ),
        ),
    )


def _unrelaxed(case: Case) -> Iterator[Finding]:
    question = case.question
    if not isinstance(question, BondQuestion) or not question.cut:
        return
    loose = [one.name for one in case.species if origin_of(one) == "cut"]
    if not loose:
        return
    yield Finding(
        code="fragments-not-relaxed",
        severity="note",
        species=question.species,
        headline="The fragments keep the shape that they had in the molecule.",
        consequence="Relaxed fragments lie lower, so a measured bond energy is smaller than this number.",
        evidence=(Evidence(reading="fragments", value=listed(loose)),),
        remedies=(
            advice("Give the optimised fragments as species of their own and name them in the question"),
        ),
    )


def _one(xyz: str, origin: str = "optimised at CCSD(T)/cc-pVTZ") -> Example:
    return Example(molecules={"molecule": Molecule(xyz=xyz, origin=origin)})


def _cut(xyz: str, cut: Sequence[int]) -> Example:
    molecule = Molecule(xyz=xyz)
    return Example(molecules={"m": molecule}, question={"kind": "bond", "species": "m", "cut": list(cut)})


_WATER = "O 0 0 0.1173; H 0 0.7572 -0.4692; H 0 -0.7572 -0.4692"
_PEROXIDE = "O 0 0.7264 -0.0555; O 0 -0.7264 -0.0555; H 0.8 0.88 0.444; H -0.8 -0.88 0.444"
_DIMER = f"{_WATER}; O 0 0 3.1173; H 0 0.7572 2.5308; H 0 -0.7572 2.5308"

RULES = (
    Rule(
        code="unbonded-pieces",
        severity="note",
        stage="always",
        reads=("atoms",),
        source="own, water dimer in cc-pVDZ",
        judge=each(_pieces),
        quiet=(_one(_WATER),),
        loud=(_one(_DIMER),),
    ),
    Rule(
        code="geometry-origin",
        severity="note",
        stage="always",
        reads=("origin",),
        source="arithmetic",
        judge=_origin,
        quiet=(_one(_WATER), _one("N 0 0 0", "")),
        loud=(_one(_WATER, ""), _one(_WATER, "built from SMILES by a force field")),
    ),
    Rule(
        code="fragments-not-relaxed",
        severity="note",
        stage="always",
        reads=("the cut",),
        source="arithmetic",
        judge=_unrelaxed,
        quiet=(Example(), _cut("N 0 0 0; N 0 0 1.1", (1, 2))),
        loud=(_cut(_PEROXIDE, (1, 2)),),
    ),
)
