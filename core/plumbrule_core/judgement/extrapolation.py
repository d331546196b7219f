"""Two basis sets to their limit."""

import math

HF_SOURCE = "Hartree-Fock limit from two sets: Karton and Martin, Theor. Chem. Acc. 115, 330 (2006)"
CORRELATION_SOURCE = (
    "Correlation limit from two sets, X^-3: Helgaker, Klopper, Koch and Noga, J. Chem. Phys. 106, 9639 "
    "(1997); "
    "Halkier et al., Chem. Phys. Lett. 286, 243 (1998)"
)


def hartree_fock_limit(small: float, large: float, x: int, y: int) -> float:
    """The Hartree-Fock limit of energies at cardinal numbers x < y, any unit.

    E(L) = E + A (L + 1) exp(-9 sqrt(L)) (Karton and Martin 2006).
    """
    ratio = (y + 1) / (x + 1) * math.exp(-9 * (math.sqrt(y) - math.sqrt(x)))
    return large + (large - small) * ratio / (1 - ratio)


def correlation_limit(small: float, large: float, x: int, y: int) -> float:
    """The limit of correlation energies at cardinal numbers x < y, any unit; E(X) = E + A X^-3."""
    return (y**3 * large - x**3 * small) / (y**3 - x**3)
