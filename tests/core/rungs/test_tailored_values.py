"""TCCSD and TCCSD(T) against check values.

Check values T01 to T17 are the project's collection. "Own": a reference value computed twice outside this
program (spatial RCCSD and spin-orbital CCSD with the amplitudes held, PySCF 2.14). Method: T. Kinoshita, O.
Hino and R. J. Bartlett, J. Chem. Phys. 123, 074106 (2005); triples: D. I. Lyakh, V. F. Lotrich and R. J.
Bartlett, Chem. Phys. Lett. 501, 166 (2011). T14 has no geometry and is not tested.
"""

import numpy as np
import pytest

from plumbrule_core.rungs.published_systems import WATER_OLSEN, WATER_STRETCHED, from_bohr


def nitrogen(bohr: float) -> str:
    return from_bohr(f"N 0 0 0; N 0 0 {bohr}")


def test_nitrogen_in_a_minimal_basis_lies_above_full_ci_where_ccsd_does_not(scene):
    # T08, verified: correlation energy -0.46813811; FCI -108.5409370442.
    outcome = scene("N 0 0 0; N 0 0 1.8", basis="STO-6G").choose(5, 6, 7, 8, 9, 10).compute("TCCSD")
    assert outcome.correlation == pytest.approx(-0.46813811, abs=1e-7)
    assert outcome.energy > -108.5409370442


@pytest.mark.parametrize(
    ("xyz", "core", "space", "casci", "tccsd", "triples", "atol"),
    [
        pytest.param(
            nitrogen(2.118),
            "frozen",
            6,
            -109.0216796,
            -109.2741922,
            -109.280542 + 109.2741922,
            2e-6,
            id="T09",
        ),
        pytest.param(
            nitrogen(3.6), "frozen", 6, -108.7505009, -108.9727844, -108.9803211 + 108.9727844, 2e-6, id="T10"
        ),
        pytest.param(WATER_OLSEN.xyz, "all", 5, -76.02778812, -76.238261521, -0.002914227, 1e-6, id="T11"),
        pytest.param(WATER_STRETCHED.xyz, "all", 5, -75.770250519, -75.9473359, -0.003244343, 1e-6, id="T12"),
        pytest.param("H 0 0 0; F 0 0 1.1", "all", 6, -100.0219833546, -100.2072094005, None, 1e-7, id="T13"),
        pytest.param(
            "C 0 0 0; C 0 0 1.2425", "frozen", 8, -75.552895292, -75.718476834, -0.006114513, 2e-6, id="T17"
        ),
    ],
)
def test_check_values_in_double_zeta(xyz, core, space, casci, tccsd, triples, atol, scene):
    """Own reference values (module docstring); active orbitals around the gap, three occupied (C2: four)."""
    at = scene(xyz, core=core)
    occupied = at.bench.molecule.nelec[0]
    first = occupied - (4 if space == 8 else 3)
    outcome = at.choose(*range(first + 1, first + space + 1)).compute("TCCSD")
    assert outcome.growth[0].energies["CASCI"] == pytest.approx(casci, abs=atol)
    assert outcome.energy == pytest.approx(tccsd, abs=atol)
    if triples is not None:
        assert at.compute("TCCSD(T)").energy - outcome.energy == pytest.approx(triples, abs=2 * atol)


def test_the_triples_see_the_active_amplitudes_as_zero(scene):
    # T16, own; convention of Lyakh, Lotrich and Bartlett 2011. Were they left in it: -109.2221443.
    at = scene(nitrogen(4.2), core="frozen").choose(5, 6, 7, 8, 9, 10)
    at.compute("TCCSD")
    assert at.compute("TCCSD(T)").energy == pytest.approx(-108.9549924, abs=1e-5)


@pytest.mark.parametrize(
    ("angstrom", "c0", "tccsd", "triples"),
    [(1.0977, 0.973, -109.2730, -109.2792), (2.0, 0.596, -108.9600, -108.9677)],
)
def test_nitrogen_along_its_stretched_bond(angstrom, c0, tccsd, triples, scene):
    """The project's own table (PySCF 2.14, to a unit of its fourth decimal), orbitals of plain RHF."""
    at = scene(f"N 0 0 0; N 0 0 {angstrom}", core="frozen").choose(5, 6, 7, 8, 9, 10)
    outcome = at.compute("TCCSD")
    assert outcome.growth[0].c0_squared == pytest.approx(c0**2, abs=2e-3)
    assert outcome.energy == pytest.approx(tccsd, abs=1e-4)
    assert at.compute("TCCSD(T)").energy == pytest.approx(triples, abs=1e-4)


RECTANGLE = ((0.672, 0.783), (1.43222368, 1.54588201))
SQUARE = ((0.725, 0.725), (1.4858469, 1.4858469))


def cyclobutadiene(carbon: tuple[float, float], hydrogen: tuple[float, float]) -> str:
    signs = [(1, 1), (1, -1), (-1, 1), (-1, -1)]
    atoms = [("C", carbon), ("H", hydrogen)]
    return "; ".join(f"{name} {a * x} {b * y} 0" for a, b in signs for name, (x, y) in atoms)


@pytest.mark.slow
@pytest.mark.filterwarnings("ignore:remove_linear_dep_:DeprecationWarning")
def test_the_barrier_of_cyclobutadiene(scene):
    # T15, own: 9.59 and 3.84 kcal/mol; with the active amplitudes left in the triples it would be -35.6.
    found = {}
    for name, shape in (("rectangle", RECTANGLE), ("square", SQUARE)):
        # From the Huckel guess RHF finds the lower, symmetry-broken solution of the square.
        at = scene(cyclobutadiene(*shape), core="frozen", guess="huckel").choose(14, 15)
        found[name] = [at.compute(rung).energy for rung in ("TCCSD", "TCCSD(T)")]
    assert found["rectangle"] == pytest.approx([-154.2189578565, -154.2426686296], abs=2e-6)
    barrier = 627.509474 * (np.array(found["square"]) - found["rectangle"])
    assert barrier == pytest.approx([9.59, 3.84], abs=0.05)
