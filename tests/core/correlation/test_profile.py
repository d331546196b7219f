"""The profile of a window: what it holds, when it is settled, and that it survives a checkpoint."""

from dataclasses import replace

import numpy as np
import pytest

from plumbrule_core.correlation.integrals import problem_from
from plumbrule_core.correlation.profile import cheap_solver, profile_from
from plumbrule_core.correlation.protocol import Problem
from plumbrule_core.correlation.solvers.dmrg import reference_energy
from plumbrule_core.correlation.solvers.exact import Exact
from plumbrule_core.correlation.stored import (
    arrays_of,
    arrays_of_orbitals,
    orbitals_of_arrays,
    profile_of_arrays,
)
from plumbrule_core.correlation.window import orbital_set, window_of
from plumbrule_core.errors import PlumbruleError


@pytest.fixture(scope="module")
def looked_at(field_of):
    """(atoms, core, basis) -> field, orbitals, window, problem, exact solution."""

    def make(atoms, core, basis):
        field = field_of(atoms, basis)
        orbitals = orbital_set(field, core, "valence")
        window = window_of(orbitals, np.ones(len(orbitals.candidates)), 20)
        columns = [number - 1 for number in window.orbitals]
        problem = problem_from(
            field, orbitals.coefficients, orbitals.filled_outside(window.orbitals), columns, 1
        )
        solved = Exact().solve(problem, Silent(), threads=1, memory_mb=2000)
        return field, orbitals, window, problem, solved

    return make


class Silent:
    def iteration(self, n, energy, residual=None, stage=""):
        pass

    def progress(self, fraction, what=""):
        pass

    def note(self, text):
        pass


def test_the_profile_of_dissociated_hydrogen_has_the_closed_form(looked_at):
    # Check value E05: s = ln 2 for both orbitals, I = 2 ln 2 at 10 bohr; half a pair in each orbital.
    _, _, window, problem, solved = looked_at("H 0 0 0; H 0 0 5.2917721", 0, "STO-3G")
    profile = profile_from(window, problem, solved, "exact")
    assert profile.entropies == pytest.approx([np.log(2)] * 2, abs=2e-6)
    assert profile.mutual_information[0, 1] == pytest.approx(2 * np.log(2), abs=2e-6)
    assert profile.occupations == pytest.approx([1, 1], abs=1e-3)
    assert profile.zs1 == pytest.approx(0.5, abs=1e-5)
    assert profile.c0_squared == pytest.approx(0.5, abs=1e-3)
    assert profile.settled


def test_zs1_is_that_of_the_published_definition(looked_at):
    # Check value E07: the entropies of N2 in CASSCF(6,6) have Zs(1) = 0.1272 (Stein and Reiher 2017).
    _, _, window, problem, solved = looked_at("H 0 0 0; H 0 0 0.74", 0, "STO-3G")
    profile = profile_from(window, problem, solved, "exact")
    entropies = np.array([0.0937, 0.2176, 0.2176, 0.2174, 0.2174, 0.0942, 0.05])
    found = replace(profile, entropies=entropies, valence=(True,) * 6 + (False,))
    assert found.zs1 == pytest.approx(0.1272, abs=5e-5)
    assert found.largest == pytest.approx(0.2176)


def test_a_profile_that_moves_between_two_settings_is_not_settled(looked_at):
    _, _, window, problem, solved = looked_at("H 0 0 0; H 0 0 0.74", 0, "6-31G")
    near = replace(solved, narrow_entropies=solved.entropies + 0.01)
    far = replace(solved, narrow_entropies=solved.entropies + np.array([0.3, 0, 0, 0]))
    assert profile_from(window, problem, near, "DMRG").settled
    moved = profile_from(window, problem, far, "DMRG")
    assert not moved.settled
    assert moved.change == pytest.approx(0.3)
    assert any("changed by 0.30" in note for note in moved.notes)


def test_a_solution_above_its_reference_or_not_converged_is_not_settled(looked_at):
    field, _, window, problem, solved = looked_at("H 0 0 0; H 0 0 0.74", 0, "6-31G")
    assert reference_energy(problem) == pytest.approx(field.e_tot, abs=1e-9)
    high = profile_from(window, problem, replace(solved, energy=field.e_tot + 0.01), "DMRG")
    assert not high.settled
    assert any("wrong state" in note for note in high.notes)
    loose = replace(solved, converged=False)
    assert not profile_from(window, problem, loose, "exact").settled
    agreeing = replace(loose, narrow_entropies=solved.entropies)
    assert profile_from(window, problem, agreeing, "DMRG").settled


def test_a_profile_comes_back_from_plain_arrays(looked_at):
    _, _, window, problem, solved = looked_at("H 0 0 0; H 0 0 0.74", 0, "6-31G")
    moved = replace(solved, narrow_entropies=solved.entropies + 0.2, notes=("a note",))
    for profile in (
        profile_from(window, problem, solved, "exact"),
        profile_from(window, problem, moved, "DMRG"),
    ):
        again = profile_of_arrays(arrays_of(profile))
        for name in ("orbitals", "reference", "valence", "method", "settled", "notes"):
            assert getattr(again, name) == getattr(profile, name)
        for name in ("energies", "occupations", "entropies", "mutual_information"):
            assert np.array_equal(getattr(again, name), getattr(profile, name))
        assert (again.energy, again.c0_squared, again.change) == (
            profile.energy,
            profile.c0_squared,
            profile.change,
        )
        assert (again.narrow is None) == (profile.narrow is None)


def test_stored_orbitals_are_taken_where_they_are_of_the_same_determinant_and_no_other(field_of):
    nitrogen, stretched = (field_of(f"N 0 0 0; N 0 0 {r}", "6-31G") for r in (1.0977, 1.5))
    orbitals = orbital_set(nitrogen, 2, "valence")
    arrays = arrays_of_orbitals(orbitals)
    again = orbitals_of_arrays(arrays, orbitals, nitrogen.get_ovlp())
    assert again is not None
    assert np.array_equal(again.coefficients, orbitals.coefficients)
    assert (again.valence, again.others, again.core) == (orbitals.valence, orbitals.others, orbitals.core)
    other = orbital_set(stretched, 2, "valence")
    assert orbitals_of_arrays(arrays, other, stretched.get_ovlp()) is None
    canonical = orbital_set(nitrogen, 2, "canonical")
    assert orbitals_of_arrays(arrays, canonical, nitrogen.get_ovlp()) is None
    assert orbitals_of_arrays({}, orbitals, nitrogen.get_ovlp()) is None


def sized(orbitals, electrons):
    return Problem(
        one=np.zeros((orbitals, orbitals)),
        two=np.zeros((1, 1, 1, 1)),
        alpha=electrons // 2,
        beta=electrons // 2,
        multiplicity=1,
    )


def test_small_windows_are_solved_exactly_and_large_ones_with_a_narrow_bond():
    assert cheap_solver(sized(8, 10), 4000).name == "exact"
    pytest.importorskip("block2")
    assert cheap_solver(sized(20, 20), 4000).name == "DMRG"


def test_a_window_that_nothing_reaches_is_refused_with_the_reasons():
    with pytest.raises(PlumbruleError, match="cannot be looked at"):
        cheap_solver(sized(20, 20), 10)
