"""The orbitals of the window: cleanly parted in every basis, orthonormal, and the same determinant."""

from functools import cache

import numpy as np
import pytest

from plumbrule_core.correlation.estimate import estimated_entropies
from plumbrule_core.correlation.integrals import problem_from
from plumbrule_core.correlation.solvers.exact import Exact
from plumbrule_core.correlation.window import alike, orbital_set, window_of

NITROGEN = "N 0 0 0; N 0 0 1.0977"
ETHENE = """C 0 0 0.6695; C 0 0 -0.6695; H 0 0.929 1.232; H 0 -0.929 1.232; H 0 0.929 -1.232;
H 0 -0.929 -1.232"""
WATER = "O 0 0 0.116847; H 0 0.762184 -0.467388; H 0 -0.762184 -0.467388"
FLUORINE = "F 0 0 0; F 0 0 1.412"


class Silent:
    def iteration(self, n, energy, residual=None, stage=""):
        pass

    def progress(self, fraction, what=""):
        pass

    def note(self, text):
        pass


@cache
def field_of(xyz, basis, spin=0, kind="RHF"):
    from pyscf import gto, scf

    field = getattr(scf, kind)(gto.M(atom=xyz, basis=basis, spin=spin, verbose=0))
    field.conv_tol = 1e-11
    field.kernel()
    return field


def problem_of(field, orbitals, numbers):
    return problem_from(
        field,
        orbitals.coefficients,
        orbitals.filled_outside(numbers),
        [number - 1 for number in numbers],
        field.mol.spin + 1,
    )


@pytest.mark.parametrize(
    ("xyz", "core", "valence"),
    # Counting: atomic valence orbitals less the occupied valence orbitals.
    [(NITROGEN, 2, 8 - 5), (ETHENE, 2, 12 - 6), (WATER, 1, 6 - 4), (FLUORINE, 2, 8 - 7)],
)
@pytest.mark.parametrize("basis", ["cc-pVDZ", "aug-cc-pVDZ"])
def test_there_are_as_many_valence_orbitals_as_counting_says_in_any_basis(xyz, core, valence, basis):
    orbitals = orbital_set(field_of(xyz, basis), core, "valence")
    assert orbitals.valence == valence
    assert len(orbitals.full_valence) == orbitals.alpha - core + valence


def test_the_orbitals_are_orthonormal_and_describe_the_same_determinant():
    field = field_of(NITROGEN, "cc-pVDZ")
    orbitals = orbital_set(field, 2, "valence")
    overlap = field.get_ovlp()
    assert np.allclose(
        orbitals.coefficients.T @ overlap @ orbitals.coefficients, np.eye(orbitals.size), atol=1e-9
    )
    filled = orbitals.coefficients[:, :7]
    assert field.energy_tot(dm=2 * filled @ filled.T) == pytest.approx(field.e_tot, abs=1e-9)
    assert orbitals.energies[:7] == pytest.approx(field.mo_energy[:7], abs=1e-7)


def test_the_pi_orbitals_of_nitrogen_have_the_same_numbers_in_a_diffuse_basis():
    # In canonical orbitals of aug-cc-pVDZ none holds more than 57 % of an antibonding pi orbital.
    for basis in ("cc-pVDZ", "aug-cc-pVDZ"):
        field = field_of(NITROGEN, basis)
        orbitals = orbital_set(field, 2, "valence")
        assert orbitals.energies[7] == pytest.approx(orbitals.energies[8], abs=1e-6)
        labels = field.mol.ao_labels(fmt=None)
        perpendicular = [
            k for k, (_, _, shell, axis) in enumerate(labels) if "p" in shell and axis in ("x", "y")
        ]
        population = np.square(orbitals.coefficients[perpendicular][:, [7, 8]]).sum(axis=0)
        assert population.min() > 0.5


def test_canonical_orbitals_are_those_of_the_field():
    field = field_of(NITROGEN, "cc-pVDZ")
    orbitals = orbital_set(field, 2, "canonical")
    assert orbitals.energies == pytest.approx(field.mo_energy, abs=1e-8)
    density = orbitals.coefficients[:, 9:10] @ orbitals.coefficients[:, 9:10].T
    assert density == pytest.approx(field.mo_coeff[:, 9:10] @ field.mo_coeff[:, 9:10].T, abs=1e-6)


def test_an_unrestricted_open_shell_is_looked_at_in_the_orbitals_of_rohf():
    # The library's own restricted open-shell energy is the reference.
    unrestricted = field_of("O 0 0 0; O 0 0 1.2075", "cc-pVDZ", 2, "UHF")
    restricted = field_of("O 0 0 0; O 0 0 1.2075", "cc-pVDZ", 2, "ROHF")
    orbitals = orbital_set(unrestricted, 2, "valence")
    assert (orbitals.alpha, orbitals.beta, orbitals.valence) == (9, 7, 1)
    assert [orbitals.electrons(n) for n in (7, 8, 9, 10)] == [2, 1, 1, 0]
    alpha, beta = (orbitals.coefficients[:, :n] for n in (9, 7))
    found = unrestricted.energy_tot(dm=np.array([alpha @ alpha.T, beta @ beta.T]))
    assert found == pytest.approx(restricted.e_tot, abs=1e-7)


def test_estimated_entropies_are_near_the_exact_ones_of_a_calm_molecule():
    field = field_of(WATER, "6-31G")
    orbitals = orbital_set(field, 1, "valence")
    problem = problem_of(field, orbitals, orbitals.candidates)
    exact = Exact().solve(problem, Silent(), threads=1, memory_mb=2000).entropies
    estimate = estimated_entropies(problem)
    assert estimate == pytest.approx(exact, abs=0.05)
    assert np.corrcoef(estimate, exact)[0, 1] > 0.9


def test_estimated_entropies_of_two_electrons_follow_from_first_order_amplitudes():
    # H2 in a minimal basis has one double excitation: s = -p ln p - (1 - p) ln (1 - p) for both orbitals.
    field = field_of("H 0 0 0; H 0 0 0.74", "STO-3G")
    problem = problem_of(field, orbital_set(field, 0, "valence"), (1, 2))
    one, two = problem.one, problem.two
    energies = [one[p, p] + 2 * two[p, p, 0, 0] - two[p, 0, 0, p] for p in (0, 1)]
    coupling, gap = two[0, 1, 0, 1], 2 * (energies[1] - energies[0])
    amplitude = 2 * coupling / (gap + np.sqrt(gap**2 + 4 * coupling**2))
    weight = amplitude**2 / (1 + amplitude**2)
    expected = -weight * np.log(weight) - (1 - weight) * np.log(1 - weight)
    assert estimated_entropies(problem) == pytest.approx([expected, expected], abs=1e-8)


def test_estimated_entropies_of_an_open_shell_count_single_electrons():
    field = field_of("O 0 0 0; O 0 0 1.2075", "6-31G", 2, "ROHF")
    orbitals = orbital_set(field, 2, "valence")
    estimate = estimated_entropies(problem_of(field, orbitals, orbitals.full_valence))
    assert np.all(estimate >= 0)
    assert np.all(estimate < np.log(4))
    # Both single orbitals are alike by symmetry; the pi orbitals below them too.
    places = [orbitals.full_valence.index(n) for n in (8, 9)]
    assert estimate[places[0]] == pytest.approx(estimate[places[1]], abs=1e-6)


def test_a_narrow_window_keeps_the_orbitals_next_to_the_gap_and_parts_no_equals():
    orbitals = orbital_set(field_of(ETHENE, "cc-pVDZ"), 2, "valence")
    weak = np.full(len(orbitals.candidates), 0.01)
    weak[:3] = (0.5, 0.4, 0.4)
    window = window_of(orbitals, weak, 6)
    assert set(window.orbitals) >= {7, 8, 9, 10}
    assert 3 in window.orbitals
    assert 4 not in window.orbitals, "4 and 5 are equals, and both would be one too many"


def test_a_window_takes_in_what_the_user_asked_for():
    orbitals = orbital_set(field_of(NITROGEN, "cc-pVDZ"), 2, "valence")
    window = window_of(orbitals, np.ones(len(orbitals.candidates)), 20, include=(2, 25))
    assert {2, 25} <= set(window.orbitals)
    assert window.reference[0] == 2
    assert window.reference[-1] == 0
    assert window.valence[-1] is False


def test_runs_of_equals_are_found_in_a_descending_list():
    assert [list(run) for run in alike(np.array([1.0, 0.99, 0.5, 0.49, 0.48, 0.1]))] == [
        [0, 1],
        [2, 3, 4],
        [5],
    ]
    assert alike(np.zeros(0)) == ()
