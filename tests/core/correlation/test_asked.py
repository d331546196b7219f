"""A space set by the user, in the orbitals and with the energy of the check value."""

import pytest

from plumbrule_core.correlation.asked import space_asked
from plumbrule_core.correlation.integrals import problem_from
from plumbrule_core.correlation.solvers.exact import Exact
from plumbrule_core.correlation.window import orbital_set
from plumbrule_core.documents.active_space import SpaceRequest

REQUESTS = [{"electrons": 6, "count": 6}, {"orbitals": (10, 9, 8, 7, 6, 5)}]


@pytest.mark.parametrize("asked", REQUESTS)
def test_a_set_space_has_the_energy_of_the_check_value(asked, field_of, listener):
    # Check value T10: CASCI(6,6) of N2 at 3.6 bohr, cc-pVDZ, canonical RHF orbitals, -108.7505009 hartree.
    field = field_of("N 0 0 0; N 0 0 3.6", "cc-pVDZ", unit="bohr")
    orbitals = orbital_set(field, 2, "canonical")
    space = space_asked(SpaceRequest(choice="set", **asked), orbitals, 2)
    assert (space.electrons, space.orbitals) == (6, (5, 6, 7, 8, 9, 10))
    columns = [number - 1 for number in space.orbitals]
    problem = problem_from(field, orbitals.coefficients, orbitals.filled_outside(space.orbitals), columns, 1)
    assert Exact().solve(problem, listener, threads=1, memory_mb=2000).energy == pytest.approx(
        -108.7505009, abs=2e-6
    )
