"""Systems with nothing to correlate, or next to nothing, answer zero rather than break."""

import pytest

LADDER = ("MP2", "CISD", "CCSD(T)")


@pytest.mark.parametrize("reference", ["auto", "ROHF"])
def test_the_hydrogen_atom_has_no_correlation_energy(reference, climb):
    climbed = climb("H 0 0 0", *LADDER, multiplicity=2, basis="cc-pVTZ", reference=reference)
    # -0.49980981 hartree at any rung: A. Karton's worked example of %TAE[(T)], check value D16.
    for rung in ("HF", "MP2", "CISD", "CCSD", "CCSD(T)"):
        assert climbed.energy(rung) == pytest.approx(-0.49980981, abs=1e-8)
    assert climbed.outcomes["CCSD"].correlation == 0
    assert "no two electrons" in climbed.outcomes["CCSD"].notes[0]


@pytest.mark.parametrize(
    ("xyz", "options"),
    [
        ("He 0 0 0", {"basis": "STO-3G"}),
        ("H 0 0 0; H 0 0 0.74", {"basis": "STO-3G", "multiplicity": 3}),
    ],
)
def test_without_empty_orbitals_there_is_nothing_to_correlate(xyz, options, climb):
    climbed = climb(xyz, *LADDER, **options)
    assert {outcome.correlation for outcome in climbed.outcomes.values()} == {0.0}


def test_two_parallel_electrons_are_a_pair_and_ccsd_of_them_is_exact(climb):
    from pyscf import fci, gto, scf

    xyz = "H 0 0 0; H 0 0 0.74"
    field = scf.ROHF(gto.M(atom=xyz, basis="cc-pvdz", spin=2, verbose=0)).run()
    exact = fci.FCI(field).kernel()[0]
    climbed = climb(xyz, *LADDER, multiplicity=3)
    assert climbed.energy("CCSD") == pytest.approx(exact, abs=1e-7)
    assert climbed.energy("CISD") == pytest.approx(exact, abs=1e-7)
    assert climbed.bench.triples == pytest.approx(0, abs=1e-12)


def test_a_bare_ion_freezes_no_more_than_it_has(climb):
    climbed = climb("Be 0 0 0", "CCSD(T)", charge=3, multiplicity=2)
    assert climbed.bench.frozen == 0
    assert climbed.outcomes["CCSD(T)"].correlation == 0


def test_the_nitrogen_atom_correlates_its_three_parallel_electrons(climb):
    climbed = climb("N 0 0 0", *LADDER, multiplicity=4)
    assert climbed.bench.frozen == 1
    assert climbed.outcomes["CCSD(T)"].correlation < climbed.outcomes["CCSD"].correlation < -0.05
