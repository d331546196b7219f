"""The bar says what its lines stand on: spin states, cores, origins of geometries, errors of which method."""

from dataclasses import replace

import pytest

from plumbrule_core.documents.findings import BudgetLine, Judgement
from plumbrule_core.judgement import judge
from plumbrule_core.judgement.budget_physics import spin_orbit_line
from plumbrule_core.judgement.geometry_origin import origin_of
from plumbrule_core.judgement.rules.example import Example, Molecule, case_of


def judged(one: Example) -> Judgement:
    case = case_of(one)
    return judge(case.brief, case.plan, case.results)


def lines(found: Judgement) -> dict[str, BudgetLine]:
    return {line.cause: line for line in found.budget}


def gap(xyz: str, low: int, high: int, charge: int = 0) -> BudgetLine | None:
    """The spin-orbit line of low -> high, in cm-1-sized kcal/mol."""
    molecules = {
        "low": Molecule(xyz=xyz, multiplicity=low, charge=charge),
        "high": Molecule(xyz=xyz, multiplicity=high, charge=charge),
    }
    terms = {"high": 1.0, "low": -1.0}
    return spin_orbit_line(
        case_of(
            Example(molecules=molecules, question={"kind": "reaction", "terms": terms, "unit": "kcal/mol"})
        )
    )


CM = 1 / 349.755
"""One cm-1 in kcal/mol."""


def test_a_singlet_carbon_atom_is_not_lowered_but_its_triplet_is() -> None:
    """3P of C: levels 0, 16.417, 43.414 cm-1 (NIST Atomic Spectra Database); 1D is one level."""
    line = gap("C 0 0 0", 3, 1)
    assert line is not None
    assert line.shift == pytest.approx(29.6 * CM, abs=1e-3)
    assert line.size == 0.0


def test_the_lowering_of_hydroxyl_is_that_of_the_doublet_alone() -> None:
    """2Pi of OH: A = -139.2 cm-1 (Huber and Herzberg 1979), half of it the lowering."""
    line = gap("O 0 0 0; H 0 0 0.97", 2, 4)
    assert line is not None
    assert line.shift == pytest.approx(139.2 / 2 * CM, abs=1e-3)
    assert line.size > 0
    assert "HO (quartet)" in line.how


@pytest.mark.parametrize(
    ("xyz", "charge", "least"),
    [
        # known lowerings of radicals outside the table: HF+ 292.9/2, HCl+ 648/2 cm-1 (Huber and Herzberg)
        ("F 0 0 0; H 0 0 1.0", 1, 292.9 / 2),
        ("Cl 0 0 0; H 0 0 1.31", 1, 648 / 2),
        ("Si 0 0 0; F 0 0 1.6", 0, 161.9 / 2),
        ("Br 0 0 0; H 0 0 1.45", 1, 2653 / 2),
    ],
)
def test_a_diatomic_doublet_outside_the_table_is_unknown_and_the_line_holds_what_is_measured(
    xyz: str, charge: int, least: float
) -> None:
    molecules = {
        "ion": Molecule(xyz=xyz, multiplicity=2, charge=charge),
        "after": Molecule(xyz=xyz, multiplicity=1, charge=charge + 1),
    }
    question = {"kind": "ionisation", "from": "ion", "to": "after", "unit": "kcal/mol"}
    line = spin_orbit_line(case_of(Example(molecules=molecules, question=question)))
    assert line is not None
    assert line.size > least * CM
    assert "not in the table" in line.how


@pytest.mark.parametrize("xyz", ["C 0 0 0; N 0 0 1.17", "O 0 0 0; B 0 0 1.2"])
def test_a_sigma_radical_is_known_to_have_none(xyz: str) -> None:
    assert gap(xyz, 2, 2) is None


def hydrogen(core: str, **recipe: object) -> Judgement:
    molecules = {
        "h2": Molecule(xyz="H 0 0 0; H 0 0 0.74", energies={"HF": -1.13, "CCSD": -1.17}),
        "h": Molecule(xyz="H 0 0 0", multiplicity=2, energies={"HF": -0.5, "CCSD": -0.5}),
    }
    asked = {"kind": "bond", "species": "h2", "fragments": ["h", "h"]}
    chosen = {"rungs": ["HF", "CCSD"], "core": core, **recipe}
    return judged(Example(molecules=molecules, question=asked, recipe=chosen))


@pytest.mark.parametrize("core", ["all", "frozen"])
def test_hydrogen_has_no_core_whatever_is_asked(core: str) -> None:
    assert "core correlation" not in lines(hydrogen(core))


def nitrogen(core: str = "frozen", rung: str = "HF") -> Judgement:
    molecules = {
        "n2": Molecule(energies={"HF": -108.9, rung: -108.9}),
        "n": Molecule(xyz="N 0 0 0", multiplicity=4, energies={"HF": -54.3, rung: -54.3}),
    }
    asked = {"kind": "bond", "species": "n2", "fragments": ["n", "n"]}
    return judged(Example(molecules=molecules, question=asked, recipe={"rungs": [rung], "core": core}))


def test_a_core_that_is_correlated_in_a_valence_basis_is_not_called_frozen() -> None:
    assert "frozen" not in lines(nitrogen("all"))["core correlation"].how
    assert "not made for the core" in lines(nitrogen("all"))["core correlation"].how
    assert "frozen core" in lines(nitrogen("frozen"))["core correlation"].how


def test_the_basis_line_says_whose_errors_it_takes() -> None:
    hartree_fock, ladder = (lines(nitrogen(rung=rung))["basis set"] for rung in ("HF", "CCSD(T)"))
    for line in (hartree_fock, ladder):
        assert "CCSD(T)" in line.how
    assert "more than HF needs" in hartree_fock.how
    assert "Halkier" in hartree_fock.source
    assert "needs" not in ladder.how
    assert hartree_fock.shift is None, "the bias of CCSD(T) is not that of Hartree-Fock"
    assert ladder.shift is not None


ORIGINS = [
    ("not yet optimised", "unknown"),
    ("to be optimised", "unknown"),
    ("unoptimised", "unknown"),
    ("will be relaxed later", "unknown"),
    ("before optimisation the minimum is unknown", "unknown"),
    ("MMFF optimised from SMILES", "force field"),
    ("UFF minimum", "force field"),
    ("relaxed with a force-field", "force field"),
    ("read from MMFF-optimised.xyz", "unknown"),
    ("from water_optimised.xyz", "unknown"),
    ("read from my optimised water.xyz", "unknown"),
    ("from optimised.xyz, optimised at CCSD(T)/cc-pVTZ", "optimised"),
    ("optimised with CCSD(T)/cc-pVTZ", "optimised"),
    ("B3LYP/def2-TZVP, relaxed, no imaginary frequencies, minimum", "optimised"),
    ("experimental structure", "optimised"),
    ("published", "optimised"),
    ("", "unknown"),
]


@pytest.mark.parametrize(("said", "kind"), ORIGINS)
def test_an_origin_counts_as_optimised_only_where_it_says_so(said: str, kind: str) -> None:
    assert origin_of(replace(Molecule(), origin=said).species("n2")) == kind
