"""TCCSD as the space grows: the series, its warm starts, the size that is taken."""

from typing import Any

import numpy as np
import pytest

from plumbrule_core.correlation.integrals import problem_from
from plumbrule_core.correlation.solvers.exact import Exact
from plumbrule_core.documents.active_space import SpaceRequest
from plumbrule_core.documents.plan import TaskSpec
from plumbrule_core.rungs.published_systems import WATER_OLSEN
from plumbrule_core.rungs.tccsd import size_taken

SMALL, MIDDLE, LARGE = (5, 6), (4, 5, 6, 7), (3, 4, 5, 6, 7, 8)


def test_the_answer_is_followed_as_the_space_grows(stretched_water):
    at = stretched_water().choose(*MIDDLE, following=(SMALL, MIDDLE, LARGE, at_all := tuple(range(2, 11))))
    outcome = at.compute("TCCSD")
    assert [point.orbitals for point in outcome.growth] == [SMALL, MIDDLE, LARGE, at_all]
    assert [point.electrons for point in outcome.growth] == [2, 4, 6, 8]
    casci = [point.energies["CASCI"] for point in outcome.growth]
    assert casci == sorted(casci, reverse=True), "a larger space holds the smaller one"
    assert all(0 < point.c0_squared < 1 for point in outcome.growth)
    with_triples = at.compute("TCCSD(T)")
    for before, after in zip(outcome.growth, with_triples.growth, strict=True):
        assert after.energies["TCCSD"] == before.energies["TCCSD"]
        assert after.energies["TCCSD(T)"] <= after.energies["TCCSD"]


def test_a_size_of_the_series_is_what_it_is_alone(stretched_water):
    series = stretched_water().choose(*SMALL, following=(MIDDLE, LARGE)).compute("TCCSD")
    for point in series.growth:
        alone = stretched_water().choose(*point.orbitals).compute("TCCSD")
        assert alone.energy == pytest.approx(point.energies["TCCSD"], abs=1e-8)


def test_a_warm_start_saves_iterations(stretched_water):
    at = stretched_water().choose(*SMALL, following=(MIDDLE, LARGE))
    at.compute("TCCSD")
    cold = [
        stretched_water().choose(*size.space.orbitals).compute("TCCSD").iterations
        for size in at.bench.tailored
    ]
    warm = [size.iterations for size in at.bench.tailored]
    assert warm[0] == cold[0]
    assert sum(warm[1:]) < sum(cold[1:])


def test_amplitudes_of_ccsd_on_the_bench_are_the_start(scene):
    cold = scene(WATER_OLSEN.xyz, basis="6-31G").choose(4, 5, 6, 7).compute("TCCSD")
    at = scene(WATER_OLSEN.xyz, basis="6-31G").choose(4, 5, 6, 7)
    at.compute("CCSD")
    before = at.bench.coupled_cluster
    warm = at.compute("TCCSD")
    assert warm.energy == pytest.approx(cold.energy, abs=1e-8)
    assert warm.iterations < cold.iterations
    assert at.bench.coupled_cluster is before, "what CCSD left for its own triples stays"
    assert at.compute("CCSD(T)").energy == pytest.approx(float(before.e_tot + before.ccsd_t()), abs=1e-8)


def test_the_energy_is_taken_where_the_curve_is_flattest(stretched_water):
    at = stretched_water().choose(*SMALL, following=(MIDDLE, LARGE))
    outcome = at.compute("TCCSD")
    energies = [point.energies["TCCSD"] for point in outcome.growth]
    steps = np.abs(np.diff(energies))
    place = int(np.argmin(steps)) + 1
    assert outcome.energy == energies[place]
    assert outcome.space is not None
    assert outcome.space.orbitals == outcome.growth[place].orbitals
    assert outcome.used["spread over the sizes"] == f"{max(energies) - min(energies):.6f} hartree"


def test_species_with_partners_keep_the_size_they_share(stretched_water):
    at = stretched_water().choose(*SMALL, following=(MIDDLE, LARGE))
    at.request = SpaceRequest(partners=("hydroxyl",))
    outcome = at.compute("TCCSD")
    assert outcome.space == at.bench.space
    assert len(outcome.growth) == 3
    assert at.compute("TCCSD(T)").space == at.bench.space


def test_without_growth_only_the_chosen_space_is_solved(stretched_water):
    at = stretched_water().choose(*MIDDLE, following=(SMALL, MIDDLE, LARGE))
    at.request = SpaceRequest(grow=False)
    assert [point.orbitals for point in at.compute("TCCSD").growth] == [MIDDLE]


def test_the_wave_function_on_the_bench_is_not_solved_again(stretched_water, monkeypatch):
    at = stretched_water().choose(*MIDDLE)
    at.compute("TCCSD")
    kept = at.ears["TCCSD"].notes
    assert kept == ["solving the active space (4,4)"]
    solved = solve(at)
    again = stretched_water().choose(*MIDDLE)
    again.bench.solved = solved
    monkeypatch.setattr(Exact, "solve", None)
    assert again.compute("TCCSD").energy == pytest.approx(at.bench.tailored[0].energy, abs=1e-9)


def solve(at: Any) -> Any:
    """The space on the bench, solved as the rung of the active space does."""
    assert at.bench.space is not None
    numbers = at.bench.space.orbitals
    core = [k for k in range(at.bench.molecule.nelec[1]) if k + 1 not in numbers]
    active = [number - 1 for number in numbers]
    problem = problem_from(
        at.bench.mean_field, at.bench.mean_field.mo_coeff, core, active, at.bench.molecule.spin + 1
    )
    return Exact().solve(problem, at.ear(), threads=1, memory_mb=1000)


def test_the_requested_space_is_part_of_the_identity_and_its_absence_is_not(make_task):
    spec = make_task("H 0 0 0; H 0 0 0.74", "TCCSD")
    asked = spec.model_copy(update={"space": SpaceRequest()})
    other = spec.model_copy(update={"space": SpaceRequest(grow=False)})
    assert len({spec.identity, asked.identity, other.identity}) == 3
    assert "space" not in spec.to_data()
    assert TaskSpec.from_data(asked.to_data()) == asked


def test_hydrogen_atom_has_nothing_to_tailor(scene):
    outcome = scene("H 0 0 0", "UHF", basis="STO-3G", multiplicity=2).compute("TCCSD")
    assert outcome.correlation == 0.0


def test_the_size_taken_is_the_chosen_one_where_that_did_not_converge(stretched_water):
    from dataclasses import replace

    at = stretched_water().choose(*SMALL, following=(MIDDLE,))
    at.compute("TCCSD")
    at.bench.tailored = (replace(at.bench.tailored[0], converged=False), at.bench.tailored[1])
    assert size_taken(at.bench, None).space == at.bench.space


CHAIN = ("Active space", "TCCSD", "TCCSD(T)")


def test_the_space_that_was_looked_for_is_tailored_and_followed(scene):
    """Valence orbitals are not canonical: the judge is the library's full CI at the largest size."""
    at = scene("N 0 0 0; N 0 0 1.6", basis="STO-3G", core="frozen")
    outcomes = {rung: at.compute(rung) for rung in CHAIN}
    assert outcomes["TCCSD"].growth[0].energies["CASCI"] >= outcomes["TCCSD"].growth[-1].energies["CASCI"]
    chosen = next(p for p in outcomes["TCCSD"].growth if p.orbitals == at.bench.space.orbitals)
    assert chosen.energies["CASCI"] == pytest.approx(outcomes["Active space"].energy, abs=1e-8)
    everything = at.choose(*at.everything)
    everything.bench.solved = None
    exact = everything.compute("TCCSD").energy
    assert abs(outcomes["TCCSD"].energy - exact) < 0.02
    assert outcomes["TCCSD(T)"].energy <= outcomes["TCCSD"].energy


def test_an_open_shell_climbs_from_uhf_to_tailored_triples(scene):
    at = scene("O 0 0 0; H 0 0 1.6", "UHF", basis="6-31G", core="frozen", multiplicity=2)
    outcomes = {rung: at.compute(rung) for rung in CHAIN}
    assert outcomes["TCCSD"].converged
    assert outcomes["TCCSD"].energy < outcomes["Active space"].energy
    assert outcomes["TCCSD(T)"].energy < outcomes["TCCSD"].energy
