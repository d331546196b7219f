"""The field reaches the right solution, says how, and refuses what makes no sense."""

import numpy as np
import pytest

from plumbrule_core.elements import ELEMENTS
from plumbrule_core.errors import PlumbruleError
from plumbrule_core.rungs.molecule import reference_kind
from plumbrule_core.rungs.scf import ladder, stability
from plumbrule_core.rungs.scf.guesses import needs_search
from plumbrule_core.rungs.scf.watch import course_of

OXIDE = "Ni 0 0 0; O 0 0 1.63"


def test_carbon_two_is_followed_from_a_saddle_point_and_says_how_far(climb):
    from pyscf import gto, scf

    xyz = "C 0 0 0; C 0 0 1.25"
    saddle = scf.RHF(gto.M(atom=xyz, basis="cc-pvdz", verbose=0)).run(conv_tol=1e-10)
    climbed = climb(xyz, "HF")
    gain = saddle.e_tot - climbed.energy("HF")
    assert gain > 0.03
    assert f"({gain:.6f}"[:7] in climbed.outcomes["HF"].notes[0]
    assert "kJ/mol lower" in climbed.outcomes["HF"].notes[0]
    assert climbed.bench.stability.internal
    assert "following an instability" in climbed.ears["HF"].stages


def test_the_followed_solution_is_stable_by_the_librarys_own_analysis(climb):
    field = climb("C 0 0 0; C 0 0 1.25", "HF").bench.mean_field
    field.verbose = 0
    assert field.stability(return_status=True)[2]


def unmoved_for(tries, monkeypatch):
    """So many descents end where they began, as those that fall back into a saddle."""
    descend, steps = stability.descend, []

    def stubborn(mean_field, watch, **start):
        steps.append(mean_field.e_tot)
        if len(steps) > tries:
            descend(mean_field, watch, **start)

    monkeypatch.setattr(stability, "descend", stubborn)
    return steps


@pytest.mark.parametrize("tries", [1, 3])
def test_a_steep_instability_is_tried_the_other_way_and_further_before_it_is_given_up(
    tries, climb, monkeypatch
):
    lowest = climb("C 0 0 0; C 0 0 1.25", "HF", basis="STO-3G").energy("HF")
    unmoved_for(tries, monkeypatch)
    climbed = climb("C 0 0 0; C 0 0 1.25", "HF", basis="STO-3G")
    assert climbed.energy("HF") == pytest.approx(lowest, abs=1e-6)
    assert climbed.bench.stability.internal


def test_a_steep_instability_that_leads_nowhere_is_not_called_flat(climb, monkeypatch):
    steps = unmoved_for(1000, monkeypatch)
    climbed = climb("C 0 0 0; C 0 0 1.25", "HF", basis="STO-3G", reference="UHF")
    assert len(steps) == 4
    assert not climbed.bench.stability.internal
    assert not climbed.readings["stable"]
    assert "could not be followed to a lower one" in climbed.outcomes["HF"].notes[-1]


@pytest.mark.parametrize("xyz", ["N 0 0 0; N 0 0 1.1", "O 0 0 0; H 0.96 0 0; H -0.24 0.93 0"])
def test_a_closed_shell_that_is_stable_towards_uhf_is_stable_within_rhf(xyz, climb):
    # The bound that spares the second search (R. Seeger and J. A. Pople, J. Chem. Phys. 66, 3045 (1977)).
    climbed = climb(xyz, "HF", basis="6-31G")
    field = climbed.bench.mean_field
    # The library's Hessian of one kind of orbitals counts every rotation four times.
    assert stability.internal_mode(field).value / 4 > stability.external_mode(field).value > 0
    assert climbed.bench.stability.external
    assert climbed.bench.stability.internal


def test_an_instability_towards_uhf_is_measured_and_not_followed(climb):
    from pyscf import gto, scf

    xyz = "F 0 0 0; F 0 0 1.4119"
    molecule = gto.M(atom=xyz, basis="cc-pvdz", verbose=0)
    restricted = scf.RHF(molecule).run(conv_tol=1e-10)
    broken = scf.UHF(molecule)
    broken.kernel(dm0=broken.make_rdm1(restricted.stability(external=True)[1], [restricted.mo_occ / 2] * 2))
    climbed = climb(xyz, "HF")
    assert climbed.outcomes["HF"].reference == "RHF"
    assert climbed.energy("HF") == pytest.approx(restricted.e_tot, abs=1e-8)
    found = climbed.bench.stability
    assert not found.external
    assert found.depth == pytest.approx(restricted.e_tot - broken.e_tot, abs=1e-6)


def test_uhf_of_stretched_hydrogen_is_two_atoms(climb):
    climbed = climb("H 0 0 0; H 0 0 10", "HF", reference="UHF")
    assert climbed.energy("HF") == pytest.approx(
        2 * climb("H 0 0 0", "HF", multiplicity=2).energy("HF"), abs=1e-6
    )
    assert climbed.readings["uhf_natural_occupations"][:2] == pytest.approx((1, 1), abs=1e-3)


def test_a_metal_oxide_is_started_from_several_guesses_and_followed_to_the_bottom(climb):
    # Own values of the field notes: five guesses of NiO end up to 0.17 hartree apart, and only following
    # instabilities finds the lowest; a bare run stops higher.
    from pyscf import gto, scf

    bare = scf.UHF(gto.M(atom=OXIDE, basis="def2-svp", spin=2, verbose=0)).run(max_cycle=200)
    climbed = climb(OXIDE, "HF", basis="def2-SVP", multiplicity=3)
    assert climbed.energy("HF") < bare.e_tot - 0.04
    assert climbed.outcomes["HF"].notes[0].startswith("3 starting guesses")
    assert sum(stage.startswith("guess") for stage in climbed.ears["HF"].stages) == 3


def test_open_shells_and_metals_are_searched_and_ordinary_closed_shells_are_not():
    assert needs_search(["O", "H"], 1)
    assert needs_search(["Ni"], 0)
    assert not needs_search(["C", "H"], 0)
    assert ELEMENTS["Ni"].is_transition_metal


def test_the_ladder_climbs_to_second_order_where_simpler_measures_fail(climb, monkeypatch):
    def crippled(first_guess, huckel):
        yield ladder.Measure(name="first guess", guess=first_guess, cycles=2)
        yield ladder.Measure(name="damped", cycles=2, damping=0.5)
        yield ladder.Measure(name="level shift", cycles=2, level_shift=0.5)
        yield ladder.Measure(name="second order", cycles=40, second_order=True)

    expected = climb("N 0 0 0; N 0 0 1.1", "HF")
    monkeypatch.setattr(ladder, "measures", crippled)
    climbed = climb("N 0 0 0; N 0 0 1.1", "HF")
    assert climbed.ears["HF"].stages == ["first guess", "damped", "level shift", "second order"]
    assert climbed.outcomes["HF"].used["converged with"] == "second order"
    assert climbed.energy("HF") == pytest.approx(expected.energy("HF"), abs=1e-8)
    assert climbed.outcomes["HF"].arrays["orbital_energies"] == pytest.approx(
        expected.outcomes["HF"].arrays["orbital_energies"], abs=1e-4
    )


@pytest.mark.parametrize("measure", ["damped", "level shift"])
def test_each_measure_converges_by_itself_and_leaves_no_trace_in_the_orbital_energies(
    measure, climb, monkeypatch
):
    expected = climb("N 0 0 0; N 0 0 1.1", "HF")
    only = [m for m in ladder.measures("minao") if m.name == measure]
    monkeypatch.setattr(ladder, "measures", lambda first_guess, huckel: iter(only))
    climbed = climb("N 0 0 0; N 0 0 1.1", "HF")
    assert climbed.energy("HF") == pytest.approx(expected.energy("HF"), abs=1e-8)
    assert climbed.outcomes["HF"].arrays["orbital_energies"] == pytest.approx(
        expected.outcomes["HF"].arrays["orbital_energies"], abs=1e-4
    )


def test_a_field_that_never_converges_is_refused_and_labelled(climb, monkeypatch):
    monkeypatch.setattr(
        ladder,
        "measures",
        lambda first_guess, huckel: iter([ladder.Measure(name="first guess", guess="minao", cycles=3)]),
    )
    with pytest.raises(PlumbruleError, match=r"did not converge .*\((oscillating|drifting|slow)\)"):
        climb("N 0 0 0; N 0 0 1.1", "CCSD")


@pytest.mark.parametrize(
    ("energies", "course"),
    [
        ([-1 + 0.1 * (-1) ** n for n in range(20)], "oscillating"),
        ([-0.1 * n for n in range(20)], "drifting"),
        ([-1 + 0.8**n for n in range(20)], "slow"),
    ],
)
def test_a_course_is_told_by_its_last_steps(energies, course):
    assert course_of(energies) == course


def test_a_reference_that_cannot_hold_the_spin_is_refused_before_anything_is_computed(climb, make_task):
    with pytest.raises(PlumbruleError, match=r"RHF pairs all electrons.*doublet"):
        climb("O 0 0 0; H 0 0 0.97", "HF", multiplicity=2, reference="RHF")
    closed, opened = make_task("He 0 0 0", "HF"), make_task("H 0 0 0", "HF", multiplicity=2)
    assert (reference_kind(closed), reference_kind(opened)) == ("RHF", "UHF")
    assert reference_kind(make_task("He 0 0 0", "HF", reference="ROHF")) == "RHF"


def test_relativity_is_not_counted_twice(climb):
    with pytest.raises(PlumbruleError, match="potential that already holds relativity"):
        climb("H 0 0 0; I 0 0 1.609", "HF", basis="def2-SVP", relativity="X2C")


@pytest.mark.parametrize(
    ("basis", "says"), [("cc-pVXZ", "is not known"), ("cc-pVDZ", "has no functions for I")]
)
def test_a_basis_that_will_not_do_is_refused_with_one_that_would(basis, says, climb):
    with pytest.raises(PlumbruleError, match=f"{says}.*would do"):
        climb("H 0 0 0; I 0 0 1.609", "HF", basis=basis)


def test_the_orbitals_of_a_field_are_handed_over_for_the_picture(climb):
    closed = climb("O 0 0 0; H 0 0 0.97", "HF", charge=-1).outcomes["HF"].arrays
    opened = climb("O 0 0 0; H 0 0 0.97", "HF", multiplicity=2).outcomes["HF"].arrays
    assert closed["orbitals"].shape == (19, 19)
    assert opened["orbitals"].shape == (2, 19, 19)
    assert opened["occupations"].sum() == 9
    assert np.all(np.diff(closed["orbital_energies"][closed["occupations"] == 0]) >= 0)


def test_triples_are_refused_on_amplitudes_that_did_not_converge(climb, monkeypatch):
    from plumbrule_core.rungs.correlated import iterations

    monkeypatch.setattr(iterations, "MOST_ITERATIONS", 3)
    halted = climb("N 0 0 0; N 0 0 1.1", "CCSD")
    assert not halted.outcomes["CCSD"].converged
    assert halted.outcomes["CCSD"].notes == ("CCSD did not converge in 3 iterations",)
    assert "T1" not in halted.readings
    with pytest.raises(PlumbruleError, match="CCSD did not converge"):
        climb("N 0 0 0; N 0 0 1.1", "CCSD(T)")


def test_a_method_without_its_ground_says_what_is_missing(make_task):
    from plumbrule_core.rungs import RUNGS
    from plumbrule_core.rungs.protocol import Bench, Given

    given = Given(spec=make_task("He 0 0 0", "MP2"), bench=Bench(), shelf=None, threads=1, memory_mb=500)
    with pytest.raises(PlumbruleError, match="Hartree-Fock has not been computed"):
        RUNGS["MP2"].compute(given, None)


def test_the_other_guess_is_one_that_the_molecule_admits():
    def others(first_guess, huckel):
        return [m.guess for m in ladder.measures(first_guess, huckel) if m.name == "other guess"]

    assert others("atom", huckel=True) == ["huckel"]
    assert others("atom", huckel=False) == ["minao"]
    assert others("minao", huckel=False) == ["atom"]
