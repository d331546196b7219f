"""Cluster amplitudes: the exact wave function must give back its own energy, and CCSD's own amplitudes."""

from typing import Any

import numpy as np
import pytest

from plumbrule_core.correlation.amplitudes import cluster_amplitudes, described
from plumbrule_core.correlation.protocol import Coefficients
from plumbrule_core.correlation.solvers.exact import Exact
from plumbrule_core.errors import PlumbruleError


def solve(problem: Any, listener: Any) -> Any:
    return Exact().solve(problem, listener, threads=1, memory_mb=500)


def energy_of(field: Any, amplitudes: Any) -> float:
    """The coupled-cluster energy formula of the reference library, all electrons correlated."""
    from pyscf import cc

    solver = cc.UCCSD(field.to_uhf()) if not field.istype("UHF") else cc.UCCSD(field)
    return float(field.e_tot + solver.energy(*amplitudes.unrestricted, solver.ao2mo()))


@pytest.mark.parametrize(
    ("atoms", "basis", "kind", "spin", "size"),
    [
        ("H 0 0 0; H 0 0 2.0; H 0 1.5 0.3; H 1.0 0 4.0", "sto-3g", "RHF", 0, 4),
        ("Li 0 0 0", "6-31g", "ROHF", 1, 9),
        ("C 0 0 0; H 0 0.98 0.55; H 0 -0.98 0.55", "sto-3g", "UHF", 2, 7),
        ("O 0 0 0; H 0 0 1.1", "sto-3g", "UHF", 1, 6),
    ],
)
def test_the_projected_energy_of_exact_amplitudes_is_the_exact_energy(
    atoms: str, basis: str, kind: str, spin: int, size: int, space_of: Any, field_of: Any, listener: Any
) -> None:
    """E = <0|H exp(T)|0> holds for the exact T1 and T2 (identity); the formula is the library's."""
    problem = space_of(0, size, spin + 1, atoms, basis, kind=kind, spin=spin)
    solved = solve(problem, listener)
    amplitudes = cluster_amplitudes(solved.coefficients, solved.leading)
    field = field_of(atoms, basis, kind=kind, spin=spin)
    assert energy_of(field, amplitudes) == pytest.approx(solved.energy, abs=1e-8)
    assert amplitudes.closed_shell is (spin == 0)


def test_two_electrons_have_the_amplitudes_of_ccsd(space_of: Any, field_of: Any, listener: Any) -> None:
    """CCSD is exact for two electrons, so the library's CCSD amplitudes check every sign."""
    from pyscf import cc

    atoms = "H 0 0 0; H 0 0 1.0"
    solved = solve(space_of(0, 4, 1, atoms, "6-31g"), listener)
    library = cc.CCSD(field_of(atoms, "6-31g")).run(conv_tol=1e-12, conv_tol_normt=1e-9, verbose=0)
    singles, doubles = cluster_amplitudes(solved.coefficients).restricted
    assert singles == pytest.approx(library.t1, abs=1e-7)
    assert doubles == pytest.approx(library.t2, abs=1e-7)


def test_coefficients_follow_the_signs_of_the_library(space_of: Any, listener: Any) -> None:
    """The library's own extraction of singles and doubles from a full CI vector, unequal spins."""
    from pyscf.ci import ucisd
    from pyscf.fci import cistring

    from plumbrule_core.correlation.wave import Wave, coefficients_of

    size, alpha, beta = 6, 4, 3
    up, down = (np.asarray(cistring.make_strings(range(size), count)) for count in (alpha, beta))
    vector = np.random.default_rng(3).normal(size=(len(up), len(down)))
    ours = coefficients_of(Wave(alpha_strings=up, beta_strings=down, vector=vector, size=size), alpha, beta)
    flat = ucisd.from_fcivec(vector, size, (alpha, beta))
    c0, (c1a, c1b), (c2aa, c2ab, c2bb) = ucisd.cisdvec_to_amplitudes(flat, (size, size), (alpha, beta))
    assert ours.c0 == c0
    for one, other in zip(
        (ours.c1a, ours.c1b, ours.c2aa, ours.c2ab, ours.c2bb), (c1a, c1b, c2aa, c2ab, c2bb), strict=True
    ):
        assert np.array_equal(one, other)


def test_the_sign_of_the_wave_function_does_not_matter(space_of: Any, listener: Any) -> None:
    solved = solve(space_of(0, 4, 1, "H 0 0 0; H 0 0 1.0", "6-31g"), listener)
    turned = {
        name: -getattr(solved.coefficients, name) for name in ("c0", "c1a", "c1b", "c2aa", "c2ab", "c2bb")
    }
    first, second = cluster_amplitudes(solved.coefficients), cluster_amplitudes(Coefficients(**turned))
    assert np.array_equal(first.t2ab, second.t2ab)


def test_a_reference_that_vanishes_is_refused_before_dividing_and_the_better_one_is_named(
    space_of: Any, listener: Any
) -> None:
    """Water at three times its bond lengths: c0 of the HF determinant is 0.00 (own measurement)."""
    water = "O 0 0 0; H 0 2.2866 1.7583; H 0 -2.2866 1.7583"
    solved = solve(space_of(1, 6, 1, water, "sto-3g"), listener)
    assert solved.reference_weight < 1e-3
    weight, up, down = solved.leading[0]
    with pytest.raises(PlumbruleError) as caught:
        cluster_amplitudes(solved.coefficients, solved.leading)
    assert described(up, down) in str(caught.value)
    assert f"{100 * weight:.1f} %" in str(caught.value)
    assert "or use CASSCF with NEVPT2" in str(caught.value)


@pytest.mark.parametrize(("c0", "shaky"), [(0.51, False), (0.49, True), (0.31, True)])
def test_a_light_reference_is_called_shaky(c0: float, shaky: bool) -> None:
    assert cluster_amplitudes(_two_orbitals(c0)).shaky is shaky


def test_a_reference_below_the_limit_is_refused_even_without_knowing_a_better_one() -> None:
    with pytest.raises(PlumbruleError, match=r"8\.4 %.*use CASSCF with NEVPT2 instead"):
        cluster_amplitudes(_two_orbitals(0.29))


def test_an_open_shell_has_no_restricted_form(space_of: Any, listener: Any) -> None:
    solved = solve(space_of(0, 9, 2, "Li 0 0 0", "6-31g", kind="ROHF", spin=1), listener)
    with pytest.raises(PlumbruleError, match="no closed shell"):
        _ = cluster_amplitudes(solved.coefficients).restricted


def _two_orbitals(c0: float) -> Coefficients:
    """Two electrons in two orbitals: the reference, and the pair moved up."""
    none = np.zeros((1, 1))
    return Coefficients(
        c0=c0,
        c1a=none,
        c1b=none,
        c2aa=np.zeros((1, 1, 1, 1)),
        c2ab=np.full((1, 1, 1, 1), np.sqrt(1 - c0**2)),
        c2bb=np.zeros((1, 1, 1, 1)),
    )
