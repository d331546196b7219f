"""Citations: the basis sets by family and element, and the library that computed."""

import pytest

from plumbrule_core.basis_sets import BASES
from plumbrule_core.judgement import judge
from plumbrule_core.judgement.citations import PAPERS
from plumbrule_core.judgement.rules.example import Example, Molecule, case_of

DUNNING, KENDALL = "J. Chem. Phys. 90, 1007 (1989)", "J. Chem. Phys. 96, 6796 (1992)"
WOON, HEHRE = "J. Chem. Phys. 98, 1358 (1993)", "J. Chem. Phys. 56, 2257 (1972)"
CLARK, HARIHARAN = "J. Comput. Chem. 4, 294 (1983)", "Theor. Chim. Acta 28, 213 (1973)"
WEIGEND = "Phys. Chem. Chem. Phys. 7, 3297 (2005)"
ALL = (DUNNING, KENDALL, WOON, HEHRE, CLARK, HARIHARAN, WEIGEND)


def cited(basis: str, xyz: str, **energies: float) -> tuple[str, ...]:
    one = Example(
        molecules={"x": Molecule(xyz=xyz, energies=energies)},
        question={"kind": "energy", "species": "x", "within": 4.0},
        recipe={"basis": [basis], "rungs": ["HF"]},
    )
    case = case_of(one)
    return judge(case.brief, case.plan, case.results).citations


@pytest.mark.parametrize(
    ("basis", "xyz", "papers"),
    [
        ("cc-pVTZ", "N 0 0 0; N 0 0 1.1", {DUNNING}),
        ("aug-cc-pVTZ", "N 0 0 0; N 0 0 1.1", {DUNNING, KENDALL}),
        ("cc-pVTZ", "H 0 0 0; Cl 0 0 1.28", {DUNNING, WOON}),
        ("6-31G*", "N 0 0 0; N 0 0 1.1", {HEHRE, HARIHARAN}),
        ("6-31+G*", "N 0 0 0; N 0 0 1.1", {HEHRE, HARIHARAN, CLARK}),
        ("def2-TZVP", "N 0 0 0; N 0 0 1.1", {WEIGEND}),
    ],
)
def test_the_basis_set_is_cited_by_its_family_and_elements(basis, xyz, papers):
    found = cited(basis, xyz, HF=-100.0)
    assert {paper for paper in ALL if any(paper in one for one in found)} == papers
    assert sum("e1340 (2018)" in one for one in found) == 1
    assert sum("153, 024109 (2020)" in one for one in found) == 1
    assert not any("memory" in one for one in found)


def test_nothing_that_computed_nothing_is_cited():
    found = cited("cc-pVTZ", "N 0 0 0; N 0 0 1.1")
    assert not any(DUNNING in one or "Sun" in one for one in found)


def test_every_family_of_basis_sets_has_its_papers():
    assert {basis.family for basis in BASES.values()} == set(PAPERS["families"])
    named = [key for row in PAPERS["families"].values() for key in row["papers"]]
    named += [key for block in PAPERS["consistent"] for key in block["papers"]]
    assert set(named) <= set(PAPERS["papers"])
