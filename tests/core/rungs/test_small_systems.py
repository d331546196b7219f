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


@pytest.mark.parametrize(
    ("xyz", "multiplicity"),
    [("He 0 0 0", 3), ("Be 0 0 0", 3), ("Mg 0 0 0", 3), ("Be 0 0 0; H 0 0 1.34", 4)],
)
def test_spins_that_the_free_atoms_have_no_orbital_for_are_computed(xyz, multiplicity, climb):
    from pyscf import gto, scf

    climbed = climb(xyz, "HF", multiplicity=multiplicity)
    bare = scf.UHF(gto.M(atom=xyz, basis="cc-pvdz", spin=multiplicity - 1, verbose=0)).run(conv_tol=1e-10)
    assert climbed.energy("HF") <= bare.e_tot + 1e-7
    assert climbed.energy("HF") == pytest.approx(bare.e_tot, abs=0.05)
    assert climbed.outcomes["HF"].notes[0].startswith("2 starting guesses")


def test_a_guess_that_breaks_is_lost_and_the_others_go_on(climb, monkeypatch):
    from plumbrule_core.rungs.scf import guesses

    whole = climb("O 0 0 0; H 0 0 0.97", "HF", multiplicity=2).energy("HF")
    guessed = guesses.guessed_density

    def broken(mean_field, guess):
        if guess == "atom":
            raise RuntimeError("no atom today")
        return guessed(mean_field, guess)

    monkeypatch.setattr(guesses, "guessed_density", broken)
    climbed = climb("O 0 0 0; H 0 0 0.97", "HF", multiplicity=2)
    assert climbed.energy("HF") == pytest.approx(whole, abs=1e-7)
    assert "atomic densities: no atom today" in climbed.outcomes["HF"].notes[1]


def test_where_no_guess_can_be_made_the_task_fails_in_words(climb, monkeypatch):
    from plumbrule_core.errors import PlumbruleError
    from plumbrule_core.rungs.scf import guesses

    def broken(mean_field, guess):
        raise RuntimeError("no guess today")

    monkeypatch.setattr(guesses, "guessed_density", broken)
    with pytest.raises(PlumbruleError, match=r"no starting guess could be made.*no guess today"):
        climb("O 0 0 0; H 0 0 0.97", "HF", multiplicity=2)
