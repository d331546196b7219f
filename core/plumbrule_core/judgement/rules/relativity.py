"""Heavy elements: relativity may not be left out."""

from collections.abc import Iterator

from plumbrule_core.basis_sets import find, nearest
from plumbrule_core.documents.findings import Evidence, Finding, Remedy
from plumbrule_core.elements import ELEMENTS
from plumbrule_core.judgement.case import Case
from plumbrule_core.judgement.rules.base import Rule
from plumbrule_core.judgement.rules.example import Example, Molecule
from plumbrule_core.judgement.rules.remedies import change
from plumbrule_core.judgement.wording import listed, rough_range

HEAVY = 36
"""Beyond krypton scalar relativity moves reactions by several kcal/mol (common practice, no source)."""
PRACTICE = "common practice, no source"


def _left_out(case: Case) -> Iterator[Finding]:
    if case.recipe.relativity == "X2C":
        return
    symbols = dict.fromkeys(atom.symbol for one in case.species for atom in one.atoms)
    heavy = [symbol for symbol in symbols if ELEMENTS[symbol].number > HEAVY]
    bare = [s for s in heavy if any(not basis.potential_electrons(s) for basis in case.bases)]
    if not bare:
        return
    yield Finding(
        code="relativity-left-out",
        severity="care",
        headline=f"{listed(bare)} {'is' if len(bare) == 1 else 'are'} treated without relativity.",
        consequence="Its effect on reaction and bond energies of elements this heavy is typically "
        f"{rough_range(10, 40, case.unit)}.",
        evidence=(
            Evidence(
                reading="heaviest element without a potential",
                value=float(max(ELEMENTS[symbol].number for symbol in bare)),
                threshold=float(HEAVY),
                source=PRACTICE,
            ),
        ),
        remedies=(*_x2c(case), *_potential(case, tuple(symbols), bare)),
    )


def _x2c(case: Case) -> tuple[Remedy, ...]:
    if any(basis.potentials for basis in case.bases):
        return ()
    return (change("Treat relativity with X2C and run", "recipe.relativity", "X2C", then_run=True),)


def _potential(case: Case, symbols: tuple[str, ...], bare: list[str]) -> tuple[Remedy, ...]:
    largest = case.largest
    if largest is None:
        return ()
    like = find("def2-TZVPP" if largest.zeta <= 3 else "def2-QZVPP")
    found = (*((like,) if like and not like.missing(symbols) else ()), *nearest(largest.name, symbols))
    fitting = [basis for basis in found if all(basis.potential_electrons(symbol) for symbol in bare)]
    label = "which holds relativity in a core potential"
    return tuple(
        change(f"Use {basis.name}, {label}", "recipe.basis", [basis.name], then_run=True)
        for basis in fitting[:1]
    )


def _tin(basis: str, **recipe: str) -> Example:
    tin = Molecule(xyz="Sn 0 0 0; H 1 1 1; H -1 -1 1; H -1 1 -1; H 1 -1 -1")
    return Example(molecules={"stannane": tin}, recipe={"basis": [basis], "rungs": ["HF"], **recipe})


RULES = (
    Rule(
        code="relativity-left-out",
        severity="care",
        stage="always",
        reads=("atoms", "basis", "relativity"),
        source=PRACTICE,
        judge=_left_out,
        quiet=(Example(), _tin("def2-TZVPP"), _tin("STO-3G", relativity="X2C")),
        loud=(_tin("STO-3G"),),
    ),
)
