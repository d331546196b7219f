"""Entropies and mutual information against closed forms and against a partial trace done the long way."""

import itertools
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from plumbrule_core.correlation.entropies import (
    MOST,
    entropy,
    mutual_information,
    orbital_entropies,
    profile_of,
)
from plumbrule_core.correlation.solvers.exact import Exact
from plumbrule_core.correlation.wave import Wave

H2 = "H 0 0 0; H 0 0 1.4"


def strings_of(size: int, electrons: int) -> np.ndarray:
    return np.array(
        sorted(sum(1 << p for p in chosen) for chosen in itertools.combinations(range(size), electrons)),
        dtype=np.int64,
    )


def random_wave(size: int, alpha: int, beta: int, seed: int) -> Wave:
    up, down = strings_of(size, alpha), strings_of(size, beta)
    vector = np.random.default_rng(seed).normal(size=(len(up), len(down)))
    return Wave(alpha_strings=up, beta_strings=down, vector=vector / np.linalg.norm(vector), size=size)


def traced(wave: Wave, kept: tuple[int, ...]) -> float:
    """Entropy of some orbitals from the whole Fock space, orbitals moved to the front with their signs.

    The long way: each determinant is a list of spin orbitals, sorted kept ones first by counting exchanges.
    """
    order = [*kept, *(p for p in range(wave.size) if p not in kept)]
    rank = {(p, spin): 2 * order.index(p) + spin for p in range(wave.size) for spin in (0, 1)}
    amplitudes: dict[tuple[Any, Any], float] = {}
    for (a, up), (b, down) in itertools.product(enumerate(wave.alpha_strings), enumerate(wave.beta_strings)):
        filled = [(p, 0) for p in range(wave.size) if up >> p & 1]
        filled += [(p, 1) for p in range(wave.size) if down >> p & 1]
        ranks = [rank[one] for one in filled]
        exchanges = sum(x > y for x, y in itertools.combinations(ranks, 2))
        inside = frozenset(one for one in filled if one[0] in kept)
        outside = frozenset(one for one in filled if one[0] not in kept)
        amplitudes[inside, outside] = (-1) ** exchanges * float(wave.vector[a, b])
    rows = sorted({inside for inside, _ in amplitudes}, key=sorted)
    columns = sorted({outside for _, outside in amplitudes}, key=sorted)
    matrix = np.array([[amplitudes.get((row, column), 0.0) for column in columns] for row in rows])
    return entropy(np.linalg.eigvalsh(matrix @ matrix.T))


def test_the_largest_entropy_of_an_orbital_is_ln_4() -> None:
    """E01: Legeza and Solyom 2003; Rissler, Noack and White 2006."""
    assert pytest.approx(1.3862943611, abs=1e-10) == MOST
    quarter = np.array([0.25])
    assert orbital_entropies(2 * quarter, 2 * quarter, quarter) == pytest.approx(MOST, abs=1e-14)


def test_a_single_determinant_has_no_entropy_and_no_mutual_information() -> None:
    """E03."""
    vector = np.zeros((10, 10))
    vector[0, 0] = 1.0
    wave = Wave(alpha_strings=strings_of(5, 2), beta_strings=strings_of(5, 3), vector=vector, size=5)
    entropies, information = profile_of(wave)
    assert np.abs(entropies).max() == 0.0
    assert np.abs(information).max() == 0.0


def test_hydrogen_near_equilibrium_has_the_closed_form(space_of: Any, listener: Any) -> None:
    """E04: s = -c1^2 ln c1^2 - c2^2 ln c2^2, s_12 = 0, I = 2 s; STO-3G, 1.4 bohr."""
    problem = space_of(0, 2, 1, H2, "sto-3g", unit="bohr")
    solved = Exact().solve(problem, listener, threads=1, memory_mb=500)
    assert solved.entropies == pytest.approx([0.068090032] * 2, abs=1e-8)
    assert solved.mutual_information[0, 1] == pytest.approx(0.1361800641, abs=1e-8)
    assert np.diag(solved.mutual_information) == pytest.approx([0.0, 0.0])


@pytest.mark.parametrize("localised", [False, True])
def test_dissociated_hydrogen_has_ln_2_and_2_ln_2(field_of: Any, listener: Any, localised: bool) -> None:
    """E05: closed form, delocalised and localised orbitals; STO-3G, 10 bohr."""
    from plumbrule_core.correlation.integrals import problem_from

    field = field_of("H 0 0 0; H 0 0 10", "sto-3g", unit="bohr")
    turn = np.array([[1, 1], [1, -1]]) / np.sqrt(2) if localised else np.eye(2)
    problem = problem_from(field, field.mo_coeff @ turn, [], [0, 1], 1)
    solved = Exact().solve(problem, listener, threads=1, memory_mb=500)
    assert solved.entropies == pytest.approx([0.693147] * 2, abs=2e-6)
    assert solved.mutual_information[0, 1] == pytest.approx(1.386294, abs=2e-6)


def test_the_determinant_of_hydrogen_in_localised_orbitals_has_the_largest_values() -> None:
    """E06: all four occupations weigh 1/4, s = ln 4 and I = 2 ln 4, although nothing is correlated."""
    vector = np.full((2, 2), 0.5)
    wave = Wave(alpha_strings=strings_of(2, 1), beta_strings=strings_of(2, 1), vector=vector, size=2)
    entropies, information = profile_of(wave)
    assert entropies == pytest.approx([1.3862943611] * 2, abs=1e-10)
    assert information[0, 1] == pytest.approx(2.7725887222, abs=1e-10)


@settings(max_examples=15, deadline=None)
@given(alpha=st.integers(0, 4), beta=st.integers(0, 4), seed=st.integers(0, 1000))
def test_pair_entropies_equal_the_partial_trace_and_keep_their_bounds(
    alpha: int, beta: int, seed: int
) -> None:
    """E02: 0 <= I <= min(2 s_i, 2 s_j); the partial trace is the definition, done without any shortcut."""
    wave = random_wave(4, alpha, beta, seed)
    entropies, information = profile_of(wave)
    assert entropies == pytest.approx([traced(wave, (p,)) for p in range(4)], abs=1e-12)
    assert np.all((entropies >= 0) & (entropies <= MOST + 1e-12))
    for p, q in itertools.combinations(range(4), 2):
        expected = entropies[p] + entropies[q] - traced(wave, (p, q))
        assert information[p, q] == information[q, p] == pytest.approx(expected, abs=1e-12)
        assert 0 <= information[p, q] <= 2 * min(entropies[p], entropies[q]) + 1e-12


def test_a_sparse_list_of_strings_gives_what_the_full_list_gives() -> None:
    """Strings whose partner is missing count as zero."""
    full = random_wave(5, 2, 3, 7)
    rows, columns = [0, 2, 3, 7], [1, 2, 5, 8]
    vector = np.zeros_like(full.vector)
    vector[np.ix_(rows, columns)] = full.vector[np.ix_(rows, columns)]
    vector /= np.linalg.norm(vector)
    whole = Wave(alpha_strings=full.alpha_strings, beta_strings=full.beta_strings, vector=vector, size=5)
    sparse = Wave(
        alpha_strings=full.alpha_strings[rows],
        beta_strings=full.beta_strings[columns],
        vector=vector[np.ix_(rows, columns)],
        size=5,
    )
    for one, other in zip(profile_of(whole), profile_of(sparse), strict=True):
        assert one == pytest.approx(other, abs=1e-13)


def test_mutual_information_carries_no_factor_of_one_half() -> None:
    information = mutual_information(np.array([0.5, 0.5]), np.array([[0.0, 0.2], [0.2, 0.0]]))
    assert information[0, 1] == pytest.approx(0.8)


@pytest.mark.slow
@pytest.mark.parametrize(
    ("distance", "indices", "weight"),
    [("1.0977", 0.1272, 0.9354), ("1.6", 0.3883, 0.7214)],
)
def test_nitrogen_has_the_tabulated_multiconfigurational_index(
    distance: str, indices: float, weight: float, listener: Any
) -> None:
    """E07 and E08: CASSCF(6,6)/cc-pVDZ; own reference values, no published table could be reached."""
    from pyscf import gto, mcscf, scf

    from plumbrule_core.correlation.integrals import problem_from

    molecule = gto.M(atom=f"N; N 1 {distance}", basis="cc-pvdz", verbose=0)
    field = scf.RHF(molecule).run()
    space = mcscf.CASSCF(field, 6, 6)
    space.natorb = True
    space.kernel()
    problem = problem_from(field, space.mo_coeff, range(4), range(4, 10), 1)
    solved = Exact().solve(problem, listener, threads=1, memory_mb=500)
    assert solved.energy == pytest.approx(space.e_tot, abs=1e-7)
    assert solved.entropies.sum() / (6 * MOST) == pytest.approx(indices, abs=5e-4)
    assert solved.reference_weight == pytest.approx(weight, abs=5e-4)
