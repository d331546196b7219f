"""The problem of an active space against the reference library's own energies."""

from typing import Any

import numpy as np
import pytest

from plumbrule_core.correlation.integrals import problem_from
from plumbrule_core.correlation.solvers.dmrg import reference_energy
from plumbrule_core.errors import PlumbruleError

WATER = "O 0 0 0.117; H 0 0.757 -0.469; H 0 -0.757 -0.469"


def test_the_reference_determinant_of_any_space_has_the_energy_of_hartree_fock(field_of: Any) -> None:
    """A05: without mixing, the active space changes nothing (identity)."""
    field = field_of(WATER, "6-31g")
    for core, active in ((0, range(13)), (1, range(1, 7)), (5, range(5, 7))):
        problem = problem_from(field, field.mo_coeff, range(core), active, 1)
        assert reference_energy(problem) == pytest.approx(field.e_tot, abs=1e-9)


@pytest.mark.parametrize(("kind", "spin"), [("UHF", 2), ("ROHF", 2)])
def test_open_shells_keep_the_energy_of_their_field(field_of: Any, kind: str, spin: int) -> None:
    field = field_of("O 0 0 0; O 0 0 1.2", "6-31g", kind=kind, spin=spin)
    problem = problem_from(field, field.mo_coeff, range(2), range(2, 11), 3)
    assert (problem.alpha, problem.beta, problem.unrestricted) == (7, 5, kind == "UHF")
    assert reference_energy(problem) == pytest.approx(field.e_tot, abs=1e-9)


def test_relativity_and_density_fitting_of_the_field_are_in_the_problem() -> None:
    """The library's CASCI on the same field, which takes them over too."""
    from pyscf import gto, mcscf, scf

    molecule = gto.M(atom=WATER, basis="6-31g", verbose=0)
    for field in (scf.RHF(molecule).x2c().run(), scf.RHF(molecule).density_fit().run()):
        space = mcscf.CASCI(field, 4, 4)
        one, constant = space.get_h1eff()
        problem = problem_from(field, field.mo_coeff, range(3), range(3, 7), 1)
        assert problem.one == pytest.approx(one, abs=1e-10)
        assert problem.core_energy == pytest.approx(constant, abs=1e-9)
        assert problem.two.reshape(16, 16) == pytest.approx(
            _whole(space.get_h2eff(), 4).reshape(16, 16), abs=1e-10
        )


def _whole(packed: np.ndarray, size: int) -> np.ndarray:
    from pyscf import ao2mo

    return np.asarray(ao2mo.restore(1, packed, size))


def test_integrals_are_the_same_whether_the_field_keeps_its_repulsion_or_not(field_of: Any) -> None:
    from pyscf import gto, scf

    kept = field_of(WATER, "6-31g")
    molecule = gto.M(atom=WATER, basis="6-31g", verbose=0)
    direct = scf.RHF(molecule)
    direct.max_memory = 0
    direct.mo_coeff, direct.mo_occ = kept.mo_coeff, kept.mo_occ
    one, other = (problem_from(field, kept.mo_coeff, [0], range(1, 7), 1) for field in (kept, direct))
    assert other.two == pytest.approx(one.two, abs=1e-10)
    assert other.one == pytest.approx(one.one, abs=1e-10)


@pytest.mark.parametrize(
    ("core", "active", "multiplicity", "said"),
    [
        ([0, 1], [1, 2], 1, "different ones"),
        ([0], [1, 2, 3, 40], 1, "different ones"),
        ([0, 1, 2], [3, 4, 5], 2, "multiplicity 2"),
        ([0, 1, 2], [3, 4, 5], 7, "multiplicity 7"),
        ([0, 1, 2, 3, 4, 5], [6], 1, "-2 electrons"),
        ([], [0, 1], 1, "10 electrons in 2"),
    ],
)
def test_columns_electrons_and_spin_that_do_not_fit_are_refused(
    field_of: Any, core: list[int], active: list[int], multiplicity: int, said: str
) -> None:
    field = field_of(WATER, "6-31g")
    with pytest.raises(PlumbruleError, match=said):
        problem_from(field, field.mo_coeff, core, active, multiplicity)
