"""Every rung reproduces the published energies that stand in its file, each with its source there."""

import pytest

from plumbrule_core.basis_sets import find
from plumbrule_core.rungs import RUNGS

CASES = [
    pytest.param(
        name,
        value,
        id=f"{name}-{value.check or value.basis}-{number}",
        marks=[pytest.mark.slow] if value.slow else [],
    )
    for name, rung in RUNGS.items()
    for number, value in enumerate(rung.published)
]


@pytest.mark.parametrize(("name", "value"), CASES)
def test_a_rung_reproduces_its_published_energies(name, value, climb):
    climbed = climb(
        value.xyz,
        name,
        basis=value.basis,
        core=value.core,
        charge=value.charge,
        multiplicity=value.multiplicity,
        space=value.space,
    )
    assert climbed.energy(name) == pytest.approx(value.energy, abs=value.atol), value.source


def test_every_rung_carries_published_values_with_a_source():
    for rung in RUNGS.values():
        assert len(rung.published) >= 2, rung.name
        assert all(value.source and value.atol > 0 for value in rung.published)


def test_the_cartesian_flag_of_a_published_value_is_what_the_basis_does():
    for rung in RUNGS.values():
        for value in rung.published:
            basis = find(value.basis)
            assert basis is not None
            if value.cartesian:
                assert basis.cartesian, value.basis


# A. Halkier et al., Chem. Phys. Lett. 286, 243 (1998): frozen-core CCSD correlation energies in millihartree,
# three decimals as printed (check values X01 and X02).
HALKIER = [
    ("Ne 0 0 0", "cc-pVDZ", -189.017),
    ("Ne 0 0 0", "cc-pVTZ", -266.347),
    ("O 0 0 0; H 0.9572 0 0; H -0.2399872 0 0.9266272", "cc-pVDZ", -211.188),
    ("O 0 0 0; H 0.9572 0 0; H -0.2399872 0 0.9266272", "cc-pVTZ", -267.378),
]


@pytest.mark.parametrize(("xyz", "basis", "millihartree"), HALKIER)
def test_ccsd_correlation_energies_are_those_of_the_extrapolation_papers(xyz, basis, millihartree, climb):
    outcome = climb(xyz, "CCSD", basis=basis).outcomes["CCSD"]
    assert 1000 * outcome.correlation == pytest.approx(millihartree, abs=6e-4)


def test_rohf_based_coupled_cluster_of_the_carbon_atom_is_the_published_one(climb):
    # A. Karton's worked example of %TAE[(T)] (check value D16): C, cc-pVTZ, frozen core, ROHF-based.
    climbed = climb("C 0 0 0", "CCSD(T)", basis="cc-pVTZ", multiplicity=3, reference="ROHF")
    assert climbed.energy("CCSD") == pytest.approx(-37.778529074216, abs=2e-8)
    assert climbed.energy("CCSD(T)") == pytest.approx(-37.780664543434, abs=2e-8)


def test_rohf_of_methylene_is_the_reference_value(climb):
    # Check value C12 (own reference, PySCF 2.14.0): C-H 1.0 angstrom, 125 degrees, six d functions.
    xyz = "C 0 0 0; H 1.0 0 0; H -0.5735764364 0 0.8191520443"
    climbed = climb(xyz, "HF", basis="6-31G**", multiplicity=3, reference="ROHF")
    assert climbed.energy("HF") == pytest.approx(-38.911369348, abs=1e-7)
    assert climbed.outcomes["HF"].reference == "ROHF"


def test_m06_2x_binds_the_hydrogen_molecule_as_strongly_as_measured(climb):
    # D_e of H2 is 109.5 kcal/mol (W. Kolos and L. Wolniewicz 1968, from memory); it is good to about 2.
    atom = climb("H 0 0 0", "M06-2X", basis="cc-pVTZ", multiplicity=2).energy("M06-2X")
    molecule = climb("H 0 0 0; H 0 0 0.7414", "M06-2X", basis="cc-pVTZ").energy("M06-2X")
    assert 627.5095 * (2 * atom - molecule) == pytest.approx(109.5, abs=3)
