"""Where a number could be used to judge a hazard, say that it does not replace measurement."""

from plumbrule_core.documents.findings import Evidence, Finding
from plumbrule_core.judgement.case import Case, SpeciesView
from plumbrule_core.judgement.rules.base import Rule, each
from plumbrule_core.judgement.rules.example import Example, Molecule
from plumbrule_core.judgement.rules.shape import pair_name

UNEASY = frozenset({"N", "O", "F", "Cl", "Br", "I"})
"""Elements that form weak, energy-rich bonds with each other (common practice, no source)."""
PRACTICE = "common practice, no source"


def _energetic(case: Case, view: SpeciesView) -> Finding | None:
    one = view.species
    found = [
        pair_name(one, i, j)
        for i, j in view.bonds
        if len(one.atoms) > 2 and {one.atoms[i].symbol, one.atoms[j].symbol} <= UNEASY
    ]
    if not found:
        return None
    return Finding(
        code="hazard",
        severity="note",
        species=view.name,
        headline=f"{view.name} has an energy-rich bond ({found[0]}): compounds of this kind can "
        "decompose violently.",
        consequence="A calculated energy says nothing of rate, heat release or sensitivity. It does not "
        "replace "
        "measurement, local rules and the judgement of a qualified person.",
        evidence=(Evidence(reading="bond", value=", ".join(found)[:200], source=PRACTICE),),
    )


RULES = (
    Rule(
        code="hazard",
        severity="note",
        stage="always",
        reads=("atoms",),
        source=PRACTICE,
        judge=each(_energetic),
        quiet=(
            Example(
                molecules={"water": Molecule(xyz="O 0 0 0.1173; H 0 0.7572 -0.4692; H 0 -0.7572 -0.4692")}
            ),
            Example(molecules={"n2": Molecule()}),
        ),
        loud=(
            Example(
                molecules={
                    "peroxide": Molecule(
                        xyz="O 0 0.7264 -0.0555; O 0 -0.7264 -0.0555; H 0.8 0.88 0.444; H -0.8 -0.88 0.444"
                    )
                }
            ),
        ),
    ),
)
