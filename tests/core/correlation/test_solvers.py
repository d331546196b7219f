"""Three solvers, one answer: exact, DMRG and selected CI against published values and against each other."""

import os
import subprocess
import sys
import time
from pathlib import Path
from typing import Any

import numpy as np
import psutil
import pytest

from plumbrule_core.correlation.amplitudes import cluster_amplitudes
from plumbrule_core.correlation.integrals import problem_from
from plumbrule_core.correlation.protocol import Problem, Solved
from plumbrule_core.correlation.solvers import SOLVERS, choose
from plumbrule_core.correlation.solvers import dmrg as dmrg_module
from plumbrule_core.correlation.solvers.dmrg import DMRG, extrapolate, reference_energy
from plumbrule_core.correlation.solvers.exact import Exact
from plumbrule_core.correlation.solvers.selected import SelectedCI
from plumbrule_core.errors import PlumbruleError, Stopped

needs_dmrg = pytest.mark.skipif(
    bool(DMRG().missing()), reason="block2, the extra called dmrg, is not installed"
)
NITROGEN = "N 0 0 0; N 0 0 2.118"
TWISTED = "C 0 0 0.67; C 0 0 -0.67; H 0 0.92 1.23; H 0 -0.92 1.23; H 0.92 0 -1.23; H -0.92 0 -1.23"
FOUR = "H 0 0 0; H 0.3 0 1.7; H 0 1.5 0.3; H 1.0 0 3.5"


def solve(solver: Any, problem: Problem, listener: Any) -> Solved:
    found = solver.solve(problem, listener, threads=1, memory_mb=1000)
    assert isinstance(found, Solved)
    return found


def same_amplitudes(one: Solved, other: Solved, within: float) -> None:
    first, second = cluster_amplitudes(one.coefficients), cluster_amplitudes(other.coefficients)
    for name in ("t1a", "t1b", "t2aa", "t2ab", "t2bb"):
        assert getattr(first, name) == pytest.approx(getattr(second, name), abs=within)


def test_exact_nitrogen_in_six_orbitals_has_the_tabulated_energy(space_of: Any, listener: Any) -> None:
    """A03: CAS(6,6) of N2/cc-pVDZ at 2.118 bohr, -109.0216796338, from two libraries."""
    problem = space_of(4, 6, 1, NITROGEN, "cc-pvdz", unit="bohr")
    solved = solve(Exact(), problem, listener)
    assert solved.energy == pytest.approx(-109.0216796338, abs=1e-8)
    assert solved.converged
    assert solved.spin_squared == pytest.approx(0, abs=1e-8)


def test_a_triplet_below_does_not_pass_for_a_singlet(space_of: Any, listener: Any) -> None:
    """The library's CASCI of C2 at 1.6 angstrom without spin fixed gives <S2> = 2 here."""
    solved = solve(Exact(), space_of(2, 8, 1, "C 0 0 0; C 0 0 1.6", "sto-3g"), listener)
    assert solved.spin_squared == pytest.approx(0, abs=1e-6)


def test_of_two_states_of_one_energy_the_one_nearest_to_the_reference_is_taken(
    space_of: Any, listener: Any
) -> None:
    """OH is a degenerate doublet; a mixture would have half the reference weight."""
    problem = space_of(1, 5, 2, "O 0 0 0; H 0 0.3 1.2", "sto-3g", kind="ROHF", spin=1)
    solved = solve(Exact(), problem, listener)
    assert solved.reference_weight > 0.9
    assert any("share the lowest energy" in note for note in solved.notes)


@pytest.mark.parametrize("solver", [Exact(), SelectedCI(1e-6)], ids=["exact", "selected CI"])
def test_two_far_fragments_cost_the_sum_of_the_two(solver: Any, field_of: Any, listener: Any) -> None:
    """Size consistency, in orbitals of the whole and in the energy."""
    one = field_of("H 0 0 0; H 0 0 1.0", "sto-3g")
    two = field_of("H 0 0 0; H 0 0 1.0; H 0 60 0; H 0 60 1.0", "sto-3g")
    alone = solve(solver, problem_from(one, one.mo_coeff, [], range(2), 1), listener)
    both = solve(solver, problem_from(two, two.mo_coeff, [], range(4), 1), listener)
    assert both.energy == pytest.approx(2 * alone.energy, abs=1e-8)


@needs_dmrg
def test_dmrg_equals_exact_diagonalisation_for_a_closed_shell(space_of: Any, listener: Any) -> None:
    """DESIGN 7: energy to 1e-7, amplitudes to 1e-6, entropies and mutual information as well."""
    problem = space_of(0, 4, 1, FOUR, "sto-3g")
    exact, found = solve(Exact(), problem, listener), solve(DMRG(64), problem, listener)
    assert found.energy == pytest.approx(exact.energy, abs=1e-7)
    assert found.extrapolated == pytest.approx(exact.energy, abs=1e-7)
    assert found.entropies == pytest.approx(exact.entropies, abs=1e-6)
    assert found.mutual_information == pytest.approx(exact.mutual_information, abs=1e-6)
    assert found.densities == pytest.approx(exact.densities, abs=1e-6)
    same_amplitudes(found, exact, 1e-6)
    assert found.converged
    assert [det[1:] for det in found.leading[:2]] == [det[1:] for det in exact.leading[:2]]


@needs_dmrg
@pytest.mark.slow
@pytest.mark.parametrize(
    ("core", "active", "multiplicity", "atoms", "kind"),
    [
        (2, 8, 3, "O 0 0 0; O 0 0 1.2", "ROHF"),
        (1, 8, 2, "O 0 0 0; H 0 0.3 1.2", "UHF"),
        (1, 8, 2, "O 0 0 0; H 0 0.3 1.2", "ROHF"),
    ],
)
def test_dmrg_equals_exact_diagonalisation_for_open_shells(
    core: int, active: int, multiplicity: int, atoms: str, kind: str, space_of: Any, listener: Any
) -> None:
    """Triplet, spin-unrestricted orbitals, and a degenerate doublet, where amplitudes are right to 1e-5."""
    problem = space_of(core, active, multiplicity, atoms, "6-31g", kind=kind, spin=multiplicity - 1)
    exact, found = solve(Exact(), problem, listener), solve(DMRG(150), problem, listener)
    assert found.energy == pytest.approx(exact.energy, abs=1e-7)
    assert found.entropies == pytest.approx(exact.entropies, abs=1e-6)
    assert found.mutual_information == pytest.approx(exact.mutual_information, abs=1e-6)
    degenerate = any("share the lowest energy" in note for note in exact.notes)
    same_amplitudes(found, exact, 2e-5 if degenerate else 1e-6)
    assert found.spin_squared == pytest.approx(exact.spin_squared, abs=1e-5)


@needs_dmrg
@pytest.mark.slow
def test_narrow_dmrg_of_carbon_two_is_not_stuck(space_of: Any, listener: Any) -> None:
    """From a random start the bond dimension 64 ends 0.08 hartree too high (own measurement)."""
    problem = space_of(2, 8, 1, "C 0 0 0; C 0 0 1.25", "6-31g")
    exact, found = solve(Exact(), problem, listener), solve(DMRG(64), problem, listener)
    assert found.energy == pytest.approx(exact.energy, abs=1e-4)
    assert found.entropies == pytest.approx(exact.entropies, abs=1e-3)


@pytest.mark.slow
@pytest.mark.parametrize(
    "solver",
    [pytest.param(DMRG(64), marks=needs_dmrg, id="DMRG"), pytest.param(SelectedCI(), id="selected CI")],
)
def test_the_diradical_of_twisted_ethylene_is_found(solver: Any, space_of: Any, listener: Any) -> None:
    """Two determinants weigh about the same; a selection from the first alone misses it (own measurement)."""
    problem = space_of(2, 8, 1, TWISTED, "sto-3g")
    exact, found = solve(Exact(), problem, listener), solve(solver, problem, listener)
    assert found.energy == pytest.approx(exact.energy, abs=1e-3)
    assert found.entropies == pytest.approx(exact.entropies, abs=5e-3)
    assert exact.leading[1][0] > 0.4


@pytest.mark.parametrize(
    ("multiplicity", "atoms", "kind"), [(1, FOUR, "RHF"), (3, "O 0 0 0; O 0 0 1.2", "ROHF")]
)
def test_selected_ci_with_nothing_left_out_equals_exact_diagonalisation(
    multiplicity: int, atoms: str, kind: str, space_of: Any, listener: Any
) -> None:
    core, active = (0, 4) if atoms is FOUR else (2, 8)
    problem = space_of(core, active, multiplicity, atoms, "sto-3g", kind=kind, spin=multiplicity - 1)
    exact, found = solve(Exact(), problem, listener), solve(SelectedCI(1e-8), problem, listener)
    assert found.energy == pytest.approx(exact.energy, abs=1e-8)
    assert found.entropies == pytest.approx(exact.entropies, abs=2e-5)
    assert found.mutual_information == pytest.approx(exact.mutual_information, abs=2e-5)


def test_mixing_orbitals_inside_the_space_does_not_change_the_energy(field_of: Any, listener: Any) -> None:
    field = field_of(FOUR, "sto-3g")
    turn = np.linalg.qr(np.random.default_rng(5).normal(size=(4, 4)))[0]
    energies = [
        solve(Exact(), problem_from(field, orbitals, [], range(4), 1), listener).energy
        for orbitals in (field.mo_coeff, field.mo_coeff @ turn)
    ]
    assert energies[0] == pytest.approx(energies[1], abs=1e-10)


def test_the_order_of_orbitals_only_reorders_entropies(field_of: Any, listener: Any) -> None:
    field = field_of(FOUR, "sto-3g")
    order = [1, 0, 3, 2]
    plain, turned = (
        solve(Exact(), problem_from(field, field.mo_coeff, [], columns, 1), listener)
        for columns in (range(4), order)
    )
    assert turned.entropies == pytest.approx(plain.entropies[order], abs=1e-9)
    assert turned.mutual_information == pytest.approx(
        plain.mutual_information[np.ix_(order, order)], abs=1e-9
    )


@needs_dmrg
def test_a_stop_ends_the_engine_and_its_files_within_two_seconds(
    space_of: Any, listener: Any, tmp_path: Any, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(dmrg_module.tempfile, "tempdir", str(tmp_path))
    listener.stop_after = 2
    with pytest.raises(Stopped):
        solve(DMRG(200), space_of(0, 13, 1, "O 0 0 0; H 0 0 1; H 0 1 0", "6-31g"), listener)
    assert time.monotonic() - listener.asked_at < 2
    assert not list(tmp_path.iterdir())
    assert not psutil.Process().children()


@needs_dmrg
def test_an_engine_that_dies_is_a_clear_error(
    space_of: Any, listener: Any, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(dmrg_module, "ARRAYS", "elsewhere.npz")
    with pytest.raises(PlumbruleError, match=r"the DMRG engine failed: FileNotFoundError"):
        solve(DMRG(), space_of(0, 4, 1, FOUR, "sto-3g"), listener)


def test_a_missing_engine_says_how_to_get_it(monkeypatch: pytest.MonkeyPatch, space_of: Any) -> None:
    monkeypatch.setattr(dmrg_module.importlib.util, "find_spec", lambda name: None)
    assert "pip install plumbrule[dmrg]" in DMRG().missing()
    with pytest.raises(PlumbruleError, match="block2 is not installed"):
        choose("DMRG", space_of(0, 4, 1, FOUR, "sto-3g"), 1000)


def made(size: int, alpha: int, beta: int) -> Problem:
    return Problem(
        one=np.zeros((size, size)),
        two=np.zeros((size,) * 4),
        alpha=alpha,
        beta=beta,
        multiplicity=alpha - beta + 1,
    )


def test_auto_takes_exact_diagonalisation_where_it_is_quick_and_another_where_it_is_not() -> None:
    assert choose("auto", made(6, 3, 3), 2000).name == "exact"
    expected = "selected CI" if DMRG().missing() else "DMRG"
    assert choose("auto", made(20, 10, 10), 4000, bond_dimension=100).name == expected


def test_a_space_out_of_reach_is_refused_with_the_reason_of_each_solver() -> None:
    with pytest.raises(PlumbruleError, match=r"exact: 20 electrons in 20 orbitals have 3\.4e\+10"):
        choose("exact", made(20, 10, 10), 4000)
    with pytest.raises(PlumbruleError, match=r"smaller bond dimension would fit") as caught:
        choose("auto", made(20, 10, 10), 1)
    for name in SOLVERS:
        assert f"{name}: " in str(caught.value)
    with pytest.raises(PlumbruleError, match="no solver called FCI"):
        choose("FCI", made(2, 1, 1), 100)


def test_what_a_library_would_get_wrong_is_refused() -> None:
    """Its selected CI gives energies below the exact one without beta electrons (own measurement)."""
    assert "both spins" in SelectedCI().reach(made(4, 2, 0), 1000)
    assert "one orbital" in DMRG().reach(made(1, 1, 0), 1000)
    assert not Exact().reach(made(1, 1, 0), 1000)


def test_electrons_of_one_spin_alone_are_solved_exactly(listener: Any) -> None:
    """One electron: the lowest eigenvalue of the one-electron matrix (closed form)."""
    one = np.array([[0.3, -0.2, 0.1], [-0.2, -0.5, 0.4], [0.1, 0.4, 0.2]])
    problem = Problem(one=one, two=np.zeros((3,) * 4), alpha=1, beta=0, multiplicity=2)
    solved = solve(Exact(), problem, listener)
    assert solved.energy == pytest.approx(np.linalg.eigvalsh(one)[0], abs=1e-12)


def test_the_extrapolation_is_a_straight_line_to_no_discarded_weight() -> None:
    limit, error = extrapolate(np.array([4e-6, 2e-6]), np.array([-1.00, -1.01]))
    assert limit == pytest.approx(-1.02)
    assert error == pytest.approx(0.01)


def test_the_extrapolation_stays_where_nothing_is_discarded() -> None:
    limit, error = extrapolate(np.array([1e-5, 1e-20]), np.array([-1.0, -1.1]))
    assert (limit, error) == (-1.1, pytest.approx(0.1))


def test_no_solver_ends_above_its_reference_determinant(space_of: Any, listener: Any) -> None:
    problem = space_of(0, 4, 1, FOUR, "sto-3g")
    for solver in (Exact(), SelectedCI()):
        assert solve(solver, problem, listener).energy < reference_energy(problem)


ORPHAN = """
import sys
import numpy as np
from plumbrule_core.correlation.protocol import Problem
from plumbrule_core.correlation.solvers.dmrg import DMRG

class Loud:
    def iteration(self, *_): pass
    def progress(self, fraction, what=""): print(what, flush=True)

size = 12
rng = np.random.default_rng(2)
one = rng.normal(size=(size, size))
factor = rng.normal(size=(2, size, size))
factor += factor.transpose(0, 2, 1)
two = np.einsum("xpq,xrs->pqrs", factor, factor)
problem = Problem(one=one + one.T, two=two, alpha=6, beta=6, multiplicity=1)
DMRG(300).solve(problem, Loud(), threads=1, memory_mb=2000)
"""


@needs_dmrg
def test_the_engine_ends_with_the_process_that_asked_for_it(tmp_path: Path) -> None:
    paths = {"TMPDIR": str(tmp_path)}
    paths |= {"PYTHONPATH": os.pathsep.join(str(Path(entry).absolute()) for entry in sys.path if entry)}
    parent = subprocess.Popen(
        [sys.executable, "-c", ORPHAN], stdout=subprocess.PIPE, env=os.environ | paths, text=True
    )
    with parent:
        assert parent.stdout is not None
        while "start" not in parent.stdout.readline():
            assert parent.poll() is None
        engines = psutil.Process(parent.pid).children()
        assert len(engines) == 1
        parent.kill()
    patience = time.monotonic() + 2
    while any(computing(engine) for engine in engines) and time.monotonic() < patience:
        time.sleep(0.05)
    assert not any(computing(engine) for engine in engines)


def computing(engine: psutil.Process) -> bool:
    """A dead process may wait for the system to collect it."""
    try:
        return engine.status() != psutil.STATUS_ZOMBIE
    except psutil.NoSuchProcess:
        return False
