"""Two sets to their limit, held against published limits and worked arithmetic."""

import pytest

from plumbrule_core.judgement.extrapolation import correlation_limit, hartree_fock_limit


def test_neon_correlation_extrapolates_to_the_published_limit() -> None:
    # Halkier et al., Chem. Phys. Lett. 286, 243 (1998), frozen-core CCSD, TZ and QZ; check values X01 and X05
    assert correlation_limit(-266.347, -294.682, 3, 4) == pytest.approx(-315.359, abs=5e-4)


def test_water_correlation_extrapolates_to_the_published_limit() -> None:
    # the same paper, H2O; check value X02
    assert correlation_limit(-267.378, -285.969, 3, 4) == pytest.approx(-299.54, abs=5e-3)


def test_neon_hartree_fock_extrapolates_by_the_published_formula() -> None:
    # Karton and Martin, Theor. Chem. Acc. 115, 330 (2006); check value X06: Ne. The energies are PySCF's in
    # cc-pVQZ and cc-pV5Z; the exact limit is -128.547098 (numerical Hartree-Fock, from memory)
    assert hartree_fock_limit(-128.5434696591, -128.5467701295, 4, 5) == pytest.approx(-128.547322, abs=2e-6)
    assert hartree_fock_limit(-128.5434696591, -128.5467701295, 4, 5) == pytest.approx(-128.547098, abs=3e-4)


def test_a_law_that_holds_exactly_is_continued_exactly() -> None:
    assert correlation_limit(-1 + 0.5 / 27, -1 + 0.5 / 64, 3, 4) == pytest.approx(-1, abs=1e-14)
    tails = [(x + 1) * 2.718281828459045 ** (-9 * x**0.5) for x in (3, 4)]
    assert hartree_fock_limit(-1 + tails[0], -1 + tails[1], 3, 4) == pytest.approx(-1, abs=1e-14)
