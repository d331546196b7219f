"""The limits of TCCSD and TCCSD(T) that are identities, and those that are not.

Check values T01 to T17 are the project's collection. "Own": a reference value computed twice outside this
program (spatial RCCSD and spin-orbital CCSD with the amplitudes held, PySCF 2.14). Method: T. Kinoshita, O.
Hino and R. J. Bartlett, J. Chem. Phys. 123, 074106 (2005); triples: D. I. Lyakh, V. F. Lotrich and R. J.
Bartlett, Chem. Phys. Lett. 501, 166 (2011).
"""

from typing import Any

import numpy as np
import pytest


def exact_energy(at: Any) -> float:
    """Full CI of the library on the field's orbitals."""
    from pyscf import fci

    solver = fci.FCI(at.bench.mean_field)
    solver.conv_tol, solver.verbose = 1e-12, 0
    solver = fci.addons.fix_spin_(solver, ss=at.bench.molecule.spin / 2 * (at.bench.molecule.spin / 2 + 1))
    return float(solver.kernel()[0])


def test_with_every_orbital_active_tccsd_is_full_ci_and_has_no_triples(scene):
    # T02 (own reference value, PySCF 2.14.0) and T01 (exact); the triples are exactly zero.
    at = scene("Li 0 0 0; Li 0 0 1.0", basis="STO-3G")
    at.choose(*at.everything)
    assert at.compute("TCCSD").energy == pytest.approx(-14.4197890821, abs=1e-8)
    assert at.compute("TCCSD(T)").energy == at.bench.tailored[0].energy


def test_two_electrons_in_the_full_space_are_exact_in_a_larger_basis(scene):
    at = scene("H 0 0 0; H 0 0 0.74", basis="cc-pVDZ")  # T01, T04: FCI -1.1633744903
    at.choose(*at.everything)
    assert at.compute("TCCSD").energy == pytest.approx(-1.1633744903, abs=1e-8)


OPEN_SHELLS = [
    ("O 0 0 0; O 0 0 1.2", 3, "ROHF", "STO-3G"),
    ("C 0 0 0; H 0 0.99 0.5; H 0 -0.99 0.5", 3, "ROHF", "STO-3G"),
    ("N 0 0 0; O 0 0 1.15", 2, "ROHF", "STO-3G"),
    ("Li 0 0 0", 2, "ROHF", "6-31G"),
    ("C 0 0 0; H 0 0.99 0.5; H 0 -0.99 0.5", 3, "UHF", "STO-3G"),
    ("Li 0 0 0", 2, "UHF", "6-31G"),
]


@pytest.mark.parametrize(("xyz", "multiplicity", "kind", "basis"), OPEN_SHELLS)
def test_an_open_shell_in_the_full_space_is_full_ci(xyz, multiplicity, kind, basis, scene):
    """Theory: a full space leaves nothing to solve for. The library's full CI on ROHF orbitals judges."""
    at = scene(xyz, kind, basis=basis, multiplicity=multiplicity)
    at.choose(*at.everything)
    outcome = at.compute("TCCSD")
    judge = scene(xyz, "ROHF", basis=basis, multiplicity=multiplicity)
    assert outcome.energy == pytest.approx(exact_energy(judge), abs=1e-8)
    assert at.compute("TCCSD(T)").energy == outcome.energy


@pytest.mark.parametrize(
    ("xyz", "kind", "multiplicity", "space"),
    [
        ("H 0 0 0; F 0 0 1.1", "RHF", 1, (3, 4, 5)),  # T03: no active virtual orbital
        ("H 0 0 0; F 0 0 1.1", "RHF", 1, (6, 7)),  # no active occupied orbital
        ("H 0 0 0; F 0 0 1.1", "RHF", 1, ()),  # nothing active: one determinant describes the molecule
        ("O 0 0 0; H 0 0 0.97", "UHF", 2, ()),
        ("O 0 0 0; H 0 0 0.97", "ROHF", 2, (5,)),  # the lone electron alone
    ],
)
def test_without_an_active_excitation_tccsd_is_ccsd(xyz, kind, multiplicity, space, scene):
    basis = "cc-pVDZ" if multiplicity == 1 else "6-31G"
    at = scene(xyz, kind, basis=basis, multiplicity=multiplicity)
    at.choose(*space)
    tailored = at.compute("TCCSD")
    with_triples = at.compute("TCCSD(T)")
    at.shelves.clear()
    assert tailored.energy == pytest.approx(at.compute("CCSD").energy, abs=1e-8)
    assert with_triples.energy == pytest.approx(at.compute("CCSD(T)").energy, abs=1e-8)


def test_tccsd_of_two_electrons_with_a_partial_space_is_not_full_ci(scene):
    # T04, own: the frozen amplitudes cannot relax.
    at = scene("H 0 0 0; H 0 0 0.74", basis="cc-pVDZ")
    energy = at.choose(1, 2).compute("TCCSD").energy
    assert energy - exact_energy(at) == pytest.approx(0.0002837582, abs=1e-7)


@pytest.mark.parametrize(
    ("one", "two", "space", "pair"),
    [
        # T05, exact: size consistency, F. M. Faulstich et al., J. Chem. Theory Comput. 15, 2206 (2019).
        ("H 0 0 0; H 0 0 1.5", "H 0 500 0; H 0 500 1.5", (1, 2), (1, 2, 3, 4)),
        # Theory, the same with lone pairs.
        ("F 0 0 0; F 0 0 1.8", "F 0 300 0; F 0 300 1.8", (9, 10), (17, 18, 19, 20)),
    ],
)
def test_two_far_fragments_cost_the_sum_of_both(one, two, space, pair, scene):
    basis = "6-31G" if one.startswith("H") else "STO-3G"
    single, double = scene(one, basis=basis), scene(f"{one}; {two}", basis=basis)
    for rung in ("TCCSD", "TCCSD(T)"):
        apart = single.choose(*space).compute(rung).energy
        together = double.choose(*pair).compute(rung).energy
        assert together == pytest.approx(2 * apart, abs=1e-7)
        if one.startswith("H"):
            assert apart == pytest.approx(-1.0528502534, abs=1e-7)  # T05, one H2


def test_far_lithium_hydrides_cost_the_sum_of_both(scene):
    # T06, theory; one LiH: CASCI -7.9098132733, TCCSD -7.9449121831 (own).
    single = scene("Li 0 0 0; H 0 0 3.0", basis="6-31G").choose(2, 3)
    double = scene("Li 0 0 0; H 0 0 3.0; Li 0 1000 0; H 0 1000 3.0", basis="6-31G").choose(3, 4, 5, 6)
    one = single.compute("TCCSD")
    assert one.growth[0].energies["CASCI"] == pytest.approx(-7.9098132733, abs=1e-8)
    assert one.energy == pytest.approx(-7.9449121831, abs=1e-7)
    assert double.compute("TCCSD").energy == pytest.approx(2 * one.energy, abs=1e-7)


def test_orbitals_may_turn_within_their_four_subspaces_and_nowhere_else(scene, turned):
    # T07, exact: -108.8795702 for every rotation inside a subspace; mixing across the gap changes it.
    at = scene("N 0 0 0; N 0 0 1.8", basis="6-31G").choose(5, 6, 7, 8, 9, 10)
    canonical = np.array(at.bench.mean_field.mo_coeff)
    assert at.compute("TCCSD").energy == pytest.approx(-108.8795702, abs=1e-7)
    for block in ([0, 1, 2, 3], [4, 5, 6], [7, 8, 9], list(range(10, 18))):
        at.bench.orbitals, at.shelves = turned(canonical, block), {}
        assert at.compute("TCCSD").energy == pytest.approx(-108.8795702, abs=1e-7)
    at.bench.orbitals, at.shelves = turned(canonical, [6, 7], angle=0.05), {}
    assert abs(at.compute("TCCSD").energy + 108.8795702) > 1e-6


def test_a_shared_determinant_beside_uhf_gives_what_rohf_gives(scene):
    rohf = scene("O 0 0 0; H 0 0 1.3", "ROHF", basis="6-31G", multiplicity=2).choose(3, 4, 5, 6)
    uhf = scene("O 0 0 0; H 0 0 1.3", "UHF", basis="6-31G", multiplicity=2).choose(3, 4, 5, 6)
    uhf.bench.orbitals = np.array(rohf.bench.mean_field.mo_coeff)
    for rung in ("TCCSD", "TCCSD(T)"):
        assert uhf.compute(rung).energy == pytest.approx(rohf.compute(rung).energy, abs=1e-7)


def test_a_symmetric_determinant_beside_a_lower_broken_one_gives_the_symmetric_answer(scene, climb):
    plain = scene("N 0 0 0; N 0 0 1.8", basis="STO-6G").choose(5, 6, 7, 8, 9, 10)
    climbed = climb(plain.xyz, "HF", basis="STO-6G", core="all")
    broken = scene("N 0 0 0; N 0 0 1.8", basis="STO-6G").choose(5, 6, 7, 8, 9, 10)
    broken.bench.mean_field = climbed.bench.mean_field
    assert climbed.energy("HF") < plain.bench.mean_field.e_tot - 1e-3
    broken.bench.orbitals = np.array(plain.bench.mean_field.mo_coeff)
    for rung in ("TCCSD", "TCCSD(T)"):
        assert broken.compute(rung).energy == pytest.approx(plain.compute(rung).energy, abs=1e-7)
