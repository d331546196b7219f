"""The rung "Active space": what it leaves on the bench, what it refuses, and that it can be stopped."""

from dataclasses import replace
from itertools import pairwise

import numpy as np
import pytest

from plumbrule_core.documents.active_space import SpaceRequest
from plumbrule_core.errors import PlumbruleError, Stopped
from plumbrule_core.judgement.readings import take
from plumbrule_core.rungs.active_space import ActiveSpace
from plumbrule_core.rungs.hartree_fock import HartreeFock
from plumbrule_core.rungs.protocol import Bench, Given, Size, Stability

WATER = "O 0 0 0.116847; H 0 0.762184 -0.467388; H 0 -0.762184 -0.467388"
NITROGEN = "N 0 0 0; N 0 0 1.9050379"
FLUORINE = "F 0 0 0; F 0 0 1.412"
OXYGEN = "O 0 0 0; O 0 0 1.2075"
LONG_HYDROGEN = "H 0 0 0; H 0 0 5.2917721"


class KeptShelf:
    def __init__(self):
        self.kept = None

    def load(self):
        return self.kept

    def save(self, arrays):
        self.kept = {name: np.array(array) for name, array in arrays.items()}


@pytest.fixture
def detect(make_task, ear):
    """HF and "Active space": (bench, outcome, readings, ear) of one molecule; the shelves may be given."""

    def run(xyz, request=None, shelves=None, listener=None, stability=None, **options):
        bench, shelves, listener = Bench(), shelves if shelves is not None else {}, listener or ear()
        for rung in (HartreeFock(), ActiveSpace()):
            spec = make_task(xyz, rung.name, **options).model_copy(update={"space": request})
            shelf = shelves.setdefault(rung.name, KeptShelf())
            given = Given(spec=spec, bench=bench, shelf=shelf, threads=1, memory_mb=2000)
            outcome = rung.compute(given, listener if rung.name == "Active space" else ear())
            if stability is not None:
                bench.stability = stability
        found = {reading.name: reading.value for reading in take(rung.name, bench, spec)}
        return bench, outcome, found, listener

    return run


def test_a_set_space_around_the_gap_is_in_the_canonical_orbitals_that_the_user_sees(detect):
    # The library's own CASCI on the same orbitals is the reference.
    from pyscf import mcscf

    request = SpaceRequest(choice="set", electrons=6, count=6, grow=False)
    bench, outcome, _, _ = detect(NITROGEN, request, basis="STO-3G")
    assert outcome.space.orbitals == bench.space.orbitals == (5, 6, 7, 8, 9, 10)
    solver = mcscf.CASCI(bench.mean_field, 6, 6)
    solver.fix_spin_(ss=0)
    assert outcome.energy == pytest.approx(solver.kernel()[0], abs=1e-7)
    assert bench.solved.energy == outcome.energy
    assert bench.growth_spaces == ()
    assert outcome.converged


@pytest.mark.slow
def test_fluorine_gets_its_bond_and_antibond_and_the_sizes_around_it(detect):
    bench, outcome, found, _ = detect(FLUORINE, basis="6-31G")
    assert bench.space.label == "(2,2)"
    assert bench.space.orbitals == (7, 10)
    assert bench.space in bench.growth_spaces
    for small, large in pairwise(bench.growth_spaces):
        assert set(small.orbitals) < set(large.orbitals)
    assert outcome.energy < bench.mean_field.e_tot
    assert found["s1_max"] == pytest.approx(max(outcome.arrays["entropies"]))
    assert set(found["strongest_pairs"][:2]) == {7, 10}
    assert found["profile_settled"] is True


def test_dissociated_hydrogen_has_the_closed_form(detect):
    # Check value E05: s = ln 2 for both orbitals, I = 2 ln 2; the energy is that of two atoms.
    bench, outcome, found, _ = detect(LONG_HYDROGEN, basis="STO-3G")
    assert bench.space.label == "(2,2)"
    assert outcome.energy == pytest.approx(2 * -0.46658185, abs=1e-6)
    assert found["s1_max"] == pytest.approx(np.log(2), abs=1e-5)
    assert found["s1_sum"] == pytest.approx(2 * np.log(2), abs=2e-5)
    assert found["zs1"] == pytest.approx(0.5, abs=1e-5)
    assert found["c0_squared"] == pytest.approx(0.5, abs=1e-3)
    assert found["strongest_pairs"] == pytest.approx((1, 2, 2 * np.log(2)), abs=2e-5)
    assert found["profile_change"] == 0


def test_a_calm_molecule_gets_no_space_and_the_energy_of_its_determinant(detect):
    bench, outcome, found, ear = detect(WATER, basis="6-31G")
    assert outcome.space.orbitals == ()
    assert outcome.energy == pytest.approx(bench.mean_field.e_tot)
    assert bench.solved is None
    assert bench.growth_spaces == ()
    assert any("One determinant describes it" in note for note in outcome.notes)
    assert list(outcome.notes) == [note for note in ear.notes if note in outcome.notes]
    assert found["s1_max"] < 0.15


def test_the_arrays_belong_to_the_window(detect):
    bench, outcome, _, _ = detect(WATER, basis="6-31G")
    arrays, size = outcome.arrays, len(bench.profile.orbitals)
    for name in ("window", "window_energies", "window_occupations", "entropies"):
        assert arrays[name].shape == (size,)
    assert arrays["mutual_information"].shape == (size, size)
    assert arrays["mutual_information"] == pytest.approx(arrays["mutual_information"].T)
    assert np.all(arrays["entropies"] >= 0)
    assert np.all(arrays["entropies"] <= np.log(4) + 1e-12)
    assert np.all(np.diff(arrays["window"]) > 0)
    assert arrays["window_occupations"].sum() == pytest.approx(sum(bench.profile.reference), abs=1e-6)


def test_carrying_on_looks_at_nothing_twice_and_keeps_the_orbitals(detect, ear):
    shelves = {}
    first, before, *_ = detect(LONG_HYDROGEN, shelves=shelves, basis="6-31G")
    second, after, _, heard = detect(LONG_HYDROGEN, shelves=shelves, basis="6-31G")
    assert heard.iterations == []
    assert np.array_equal(first.orbitals, second.orbitals)
    assert after.space == before.space
    assert after.energy == before.energy
    assert second.growth_spaces == first.growth_spaces
    assert second.solved is None, "who needs the wave function again solves it"


def test_a_checkpoint_of_another_molecule_is_left_alone(detect):
    shelves = {}
    detect(LONG_HYDROGEN, shelves=shelves, basis="6-31G")
    shelves.pop("HF")
    _, outcome, _, heard = detect("H 0 0 0; H 0 0 0.74", shelves=shelves, basis="6-31G")
    assert heard.iterations
    assert outcome.arrays["entropies"].max() < 0.3


@pytest.mark.parametrize("stage", ["looking at", "active space"])
def test_a_stop_is_passed_on_from_both_solutions(stage, detect, ear):
    listener = ear(stop_at=1, stop_stage=stage)
    with pytest.raises(Stopped):
        detect(LONG_HYDROGEN, listener=listener, basis="6-31G")
    assert any(said.startswith(stage) for said in listener.stages)


def test_an_open_shell_is_looked_at_in_orbitals_shared_by_both_spins(detect):
    # CASCI of the two single orbitals alone is the ROHF determinant.
    request = SpaceRequest(choice="set", electrons=4, count=3, grow=False)
    bench, outcome, _, _ = detect(
        "C 0 0 0; H 0 0.99 0.5; H 0 -0.99 0.5", request, multiplicity=3, basis="6-31G"
    )
    assert bench.mean_field.istype("UHF")
    assert bench.orbitals.ndim == 2
    assert bench.space.orbitals == (3, 4, 5)
    assert outcome.reference == "ROHF"
    assert bench.solved.spin_squared == pytest.approx(2, abs=1e-6)


def test_single_electrons_are_always_in_a_proposed_space(detect):
    _, outcome, _, _ = detect(OXYGEN, multiplicity=3, basis="STO-3G")
    assert {8, 9} <= set(outcome.space.orbitals) or outcome.space.orbitals == ()


def test_a_calm_profile_beside_unpaired_electrons_is_not_settled(detect):
    broken = Stability(
        internal=True, external=False, depth=0.02, natural_occupations=(2.0,) * 4 + (1.2, 0.8) + (0.0,) * 7
    )
    _, outcome, found, _ = detect(WATER, stability=broken, basis="6-31G")
    assert found["profile_settled"] is False
    assert any("unpaired electrons" in note for note in outcome.notes)


@pytest.mark.parametrize(
    ("options", "said"),
    [
        ({"electrons": 6}, "either the numbers"),
        ({"electrons": 6, "count": 6, "orbitals": (5, 6)}, "either the numbers"),
        ({"count": 4}, "number of its electrons"),
        ({"electrons": 3, "count": 4}, "do not fit 0 unpaired"),
        ({"electrons": 6, "count": 2}, "fill 3 orbitals"),
        ({"electrons": 4, "orbitals": (4, 5, 6, 60)}, "numbered from 1 to 13"),
        ({"electrons": 2, "orbitals": (4, 5, 6)}, "hold 4 electrons in the reference, not 2"),
        ({"electrons": 4, "orbitals": (1, 5, 6)}, "while the core is frozen"),
        ({"electrons": 4, "orbitals": (5, 5, 6)}, "more than once"),
        ({"electrons": 4, "orbitals": (4, 5)}, "no electron can move"),
        ({"electrons": 40, "count": 50}, "not there"),
    ],
)
def test_a_space_that_cannot_be_is_refused_in_words_before_anything_is_solved(options, said, detect, ear):
    listener = ear()
    with pytest.raises(PlumbruleError, match=said):
        detect(WATER, SpaceRequest(choice="set", **options), listener=listener, basis="6-31G")
    assert listener.iterations == []


def test_a_set_space_without_the_single_electron_is_refused(detect):
    request = SpaceRequest(choice="set", electrons=4, orbitals=(3, 4, 6))
    with pytest.raises(PlumbruleError, match="single electron"):
        detect("O 0 0 0; H 0 0 0.97", request, multiplicity=2, basis="6-31G")


def test_a_set_space_is_told_what_speaks_against_it(detect):
    request = SpaceRequest(choice="set", electrons=2, orbitals=(7, 8), grow=False)
    _, outcome, _, _ = detect(NITROGEN, request, basis="STO-3G")
    assert any("left out" in note for note in outcome.notes)


def test_a_set_space_may_be_in_the_valence_orbitals_that_proposals_number(detect):
    # The valence antibond correlates water's bonds better than the canonical one, which is diffuse.
    space = {"choice": "set", "electrons": 2, "orbitals": (3, 7), "grow": False}
    valence = detect(WATER, SpaceRequest(orbital_set="valence", **space), basis="6-31G")[1]
    canonical = detect(WATER, SpaceRequest(**space), basis="6-31G")[1]
    assert valence.used["orbitals"] != canonical.used["orbitals"]
    assert valence.energy < canonical.energy


def test_without_hartree_fock_the_rung_says_what_is_missing(make_task, ear):
    given = Given(
        spec=make_task(WATER, "Active space"), bench=Bench(), shelf=KeptShelf(), threads=1, memory_mb=500
    )
    with pytest.raises(PlumbruleError, match="Hartree-Fock has not been computed"):
        ActiveSpace().compute(given, ear())


def test_an_atom_with_one_electron_is_calm(detect):
    _, outcome, found, _ = detect("H 0 0 0", multiplicity=2, basis="6-31G")
    assert outcome.space.orbitals == ()
    assert found["s1_max"] == pytest.approx(0, abs=1e-9)


def test_the_forecast_grows_with_the_molecule():
    from plumbrule_core.documents.plan import Machine

    machine = Machine(cores=2, memory_mb=16000, disk_mb=1e5)
    small = Size(atoms=3, functions=24, occupied=4, virtual=19)
    large = replace(small, atoms=18, functions=180, occupied=24, virtual=150)
    first, second = (ActiveSpace().forecast(size, machine) for size in (small, large))
    assert first.seconds_low < first.seconds < first.seconds_high
    assert second.seconds > first.seconds
    assert second.memory_mb > first.memory_mb
