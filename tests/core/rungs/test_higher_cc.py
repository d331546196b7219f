"""CCSDT and CCSDT(Q): exact where they must be, equal to the bare library, carried on, refused in words."""

import pytest

from plumbrule_core.documents.plan import Machine
from plumbrule_core.documents.recipe import Recipe
from plumbrule_core.errors import PlumbruleError, Stopped
from plumbrule_core.planning.recipe_faults import recipe_faults
from plumbrule_core.rungs import RUNGS
from plumbrule_core.rungs.protocol import Size

FLUORIDE = "H 0 0 0; F 0 0 0.917"
HYDROXYL = "O 0 0 0; H 0 0 0.97"
MACHINE = Machine(cores=1, memory_mb=8000, disk_mb=50000, seconds_per_gigaflop=0.03)


def exact(xyz, basis, spin):
    """Full CI by the bare library, in restricted orbitals, all electrons."""
    from pyscf import fci, gto, scf

    molecule = gto.M(atom=xyz, basis=basis, spin=spin, verbose=0)
    field = (scf.ROHF if spin else scf.RHF)(molecule).run(conv_tol=1e-12)
    solver = fci.FCI(field)
    solver.conv_tol = 1e-12
    return solver.kernel()[0]


@pytest.mark.parametrize("reference", ["UHF", "ROHF"])
def test_ccsdt_of_three_electrons_is_full_ci_from_either_reference(reference, climb):
    # Theory: with three electrons there is nothing beyond triples.
    climbed = climb("Li 0 0 0", "CCSDT", basis="cc-pVDZ", core="all", multiplicity=2, reference=reference)
    assert climbed.energy("CCSDT") == pytest.approx(exact("Li 0 0 0", "cc-pvdz", 1), abs=1e-8)


def test_ccsdt_of_two_electrons_is_ccsd_and_quadruples_are_nothing(climb):
    climbed = climb("H 0 0 0; H 0 0 0.74", "CCSD", "CCSDT(Q)", basis="cc-pVDZ")
    assert climbed.energy("CCSDT") == pytest.approx(climbed.energy("CCSD"), abs=1e-8)
    assert climbed.energy("CCSDT(Q)") == pytest.approx(climbed.energy("CCSDT"), abs=1e-12)


def test_each_step_of_the_ladder_comes_nearer_to_full_ci(climb):
    xyz = "Li 0 0 0; H 0 0 1.6"
    climbed = climb(xyz, "CCSD", "CCSDT(Q)", basis="6-31G", core="all")
    limit = exact(xyz, "6-31g", 0)
    errors = [abs(climbed.energy(rung) - limit) for rung in ("CCSD", "CCSDT", "CCSDT(Q)")]
    assert errors[0] > 10 * errors[1] > 10 * errors[2]


@pytest.mark.parametrize(("xyz", "multiplicity"), [(FLUORIDE, 1), (HYDROXYL, 2)])
def test_ccsdt_is_that_of_the_bare_library(xyz, multiplicity, climb):
    from pyscf import gto, scf
    from pyscf.cc.rccsdt import RCCSDT
    from pyscf.cc.uccsdt import UCCSDT

    molecule = gto.M(atom=xyz, basis="6-31g", spin=multiplicity - 1, verbose=0)
    field = (scf.UHF if multiplicity > 1 else scf.RHF)(molecule).run(conv_tol=1e-12)
    library = (UCCSDT if multiplicity > 1 else RCCSDT)(field, frozen=1)
    library.conv_tol, library.conv_tol_normt = 1e-9, 1e-7
    library.kernel()
    climbed = climb(xyz, "CCSDT", basis="6-31G", multiplicity=multiplicity)
    assert climbed.energy("CCSDT") == pytest.approx(library.e_tot, abs=1e-7)


def test_density_fitting_shifts_triples_as_little_as_it_shifts_doubles(climb):
    fitted = climb(FLUORIDE, "CCSD", "CCSDT", density_fitting=True)
    plain = climb(FLUORIDE, "CCSD", "CCSDT")
    shifts = [fitted.energy(rung) - plain.energy(rung) for rung in ("CCSD", "CCSDT")]
    assert 1e-7 < abs(shifts[1]) < 3e-4
    assert shifts[1] == pytest.approx(shifts[0], abs=1e-5)


@pytest.mark.parametrize(("xyz", "multiplicity"), [(FLUORIDE, 1), (HYDROXYL, 2)])
def test_ccsdt_carries_on_where_it_was_stopped(xyz, multiplicity, climb, ear):
    options = {"basis": "6-31G", "multiplicity": multiplicity}
    whole = climb(xyz, "CCSDT", **options)
    first = climb(xyz, "HF", **options)
    with pytest.raises(Stopped):
        climb(xyz, "CCSDT", on=first, ears={"CCSDT": ear(stop_at=5)}, **options)
    again = climb(xyz, "CCSDT", on=first, **options)
    assert again.ears["CCSDT"].iterations[0][0] == 6
    assert again.outcomes["CCSDT"].iterations <= whole.outcomes["CCSDT"].iterations + 1
    assert again.energy("CCSDT") == pytest.approx(whole.energy("CCSDT"), abs=1e-7)
    assert again.outcomes["CCSDT"].notes == ("carried on from iteration 5",)


def test_quadruples_stand_on_ccsdt_that_was_computed_before(climb):
    first = climb(FLUORIDE, "CCSDT", basis="6-31G")
    again = climb(FLUORIDE, "CCSDT(Q)", basis="6-31G", on=first)
    assert len(again.ears["CCSDT"].iterations) <= 2
    fresh = climb(FLUORIDE, "CCSDT(Q)", basis="6-31G")
    assert again.energy("CCSDT(Q)") == pytest.approx(fresh.energy("CCSDT(Q)"), abs=1e-7)


@pytest.mark.parametrize("reference", ["UHF", "ROHF"])
def test_quadruples_of_an_open_shell_are_refused_with_what_to_take(reference, climb):
    with pytest.raises(PlumbruleError, match=r"closed shells on RHF only.*take CCSDT"):
        climb(HYDROXYL, "CCSDT(Q)", basis="6-31G", multiplicity=2, reference=reference)


def test_an_open_shell_with_too_few_electrons_for_quadruples_has_them_all(climb):
    climbed = climb("Li 0 0 0", "CCSDT(Q)", basis="cc-pVDZ", core="all", multiplicity=2)
    assert climbed.energy("CCSDT(Q)") == climbed.energy("CCSDT")
    assert "fewer than four electrons" in climbed.outcomes["CCSDT(Q)"].notes[0]


def test_an_atom_without_pairs_has_its_field_energy_on_every_rung(climb):
    climbed = climb("H 0 0 0", "CCSDT(Q)", multiplicity=2)
    assert climbed.energy("CCSDT(Q)") == climbed.energy("CCSDT") == climbed.energy("HF")


def test_triples_that_do_not_fit_are_counted_and_refused_before_the_start(climb):
    with pytest.raises(PlumbruleError, match=r"triple excitations and needs about .* GB .*choose CCSD\(T\)"):
        climb(FLUORIDE, "CCSDT", memory_mb=180)


@pytest.mark.parametrize("rung", ["CCSDT", "CCSDT(Q)"])
def test_the_forecast_of_a_large_molecule_exceeds_a_laptop_and_that_of_a_small_one_does_not(rung):
    small = RUNGS[rung].forecast(Size(atoms=3, functions=24, occupied=5, virtual=19), MACHINE)
    large = RUNGS[rung].forecast(Size(atoms=12, functions=264, occupied=15, virtual=243), MACHINE)
    assert small.memory_mb < 1000
    assert small.seconds_high < 600
    assert large.memory_mb > 100_000
    assert large.seconds > 1e6


def test_quadruples_of_an_open_shell_are_a_fault_of_the_recipe_before_anything_runs(make_task):
    recipe = Recipe(basis=("cc-pVDZ",), rungs=("HF", "CCSDT(Q)"))
    hydroxyl, fluoride, hydrogen = (
        make_task(xyz, "HF", multiplicity=spin).species
        for xyz, spin in ((HYDROXYL, 2), (FLUORIDE, 1), ("H 0 0 0", 2))
    )
    faults = recipe_faults(recipe, (hydroxyl, fluoride, hydrogen))
    assert [fault.where for fault in faults] == ["recipe.rungs"]
    assert "closed shells on RHF only" in faults[0].says
    assert "take CCSDT as the top rung" in faults[0].says
    assert not recipe_faults(Recipe(basis=("cc-pVDZ",), rungs=("HF", "CCSDT")), (hydroxyl,))
