"""Cluster amplitudes from configuration coefficients, and where that division ceases to mean anything.

With intermediate normalisation t1 = c1/c0 and t2 = c2/c0 minus the antisymmetrised product of singles:
T. Kinoshita, O. Hino and R. J. Bartlett, J. Chem. Phys. 123, 074106 (2005).
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from plumbrule_core.correlation.protocol import Array, Coefficients
from plumbrule_core.errors import PlumbruleError

WEIGHT_LIMIT = 0.09
"""Below this reference weight (c0 = 0.3) no amplitudes are made: own measurement, no published limit."""
SHAKY_WEIGHT = 0.25
"""Below it (c0 = 0.5) they hang on the solver's convergence: own measurement, no published limit."""
_SAME = 1e-6
"""Two spins whose amplitudes differ by less are one closed shell."""

Leading = Sequence[tuple[float, tuple[int, ...], tuple[int, ...]]]


@dataclass(frozen=True, slots=True, kw_only=True)
class ClusterAmplitudes:
    """`t1a` (oa, va), `t1b` (ob, vb), `t2aa` (oa, oa, va, va), `t2ab` (oa, ob, va, vb), `t2bb`."""

    t1a: Array
    t1b: Array
    t2aa: Array
    t2ab: Array
    t2bb: Array
    reference_weight: float

    @property
    def shaky(self) -> bool:
        """Whether the reference weighs so little that the amplitudes hang on the solver's convergence."""
        return self.reference_weight < SHAKY_WEIGHT

    @property
    def closed_shell(self) -> bool:
        """Whether both spins have the same amplitudes, so that `restricted` says everything."""
        if self.t1a.shape != self.t1b.shape:
            return False
        exchanged = self.t2ab.transpose(1, 0, 2, 3)
        return all(
            np.allclose(one, other, rtol=_SAME, atol=_SAME)
            for one, other in (
                (self.t1a, self.t1b),
                (self.t2ab, self.t2ab.transpose(1, 0, 3, 2)),
                (self.t2aa, self.t2ab - exchanged),
                (self.t2bb, self.t2ab - exchanged),
            )
        )

    @property
    def restricted(self) -> tuple[Array, Array]:
        """t1 (o, v) and t2 (o, o, v, v) of a closed shell; raises PlumbruleError for any other."""
        if not self.closed_shell:
            raise PlumbruleError(
                "this wave function is no closed shell: alpha and beta electrons differ, so the "
                "spin-unrestricted amplitudes have to be used"
            )
        return (self.t1a + self.t1b) / 2, (self.t2ab + self.t2ab.transpose(1, 0, 3, 2)) / 2

    @property
    def unrestricted(self) -> tuple[tuple[Array, Array], tuple[Array, Array, Array]]:
        """(t1a, t1b), (t2aa, t2ab, t2bb)."""
        return (self.t1a, self.t1b), (self.t2aa, self.t2ab, self.t2bb)


def cluster_amplitudes(coefficients: Coefficients, leading: Leading = ()) -> ClusterAmplitudes:
    """Amplitudes of singles and doubles; looks at c0 before dividing.

    `leading`, from `Solved`, lets the refusal name the determinant that should be the reference. Raises
    PlumbruleError where the reference weighs less than `WEIGHT_LIMIT`.
    """
    c0 = coefficients.c0
    if c0**2 < WEIGHT_LIMIT:
        raise PlumbruleError(_too_light(coefficients, leading))
    t1a, t1b = coefficients.c1a / c0, coefficients.c1b / c0
    return ClusterAmplitudes(
        t1a=t1a,
        t1b=t1b,
        t2aa=coefficients.c2aa / c0 - _antisymmetric_product(t1a),
        t2ab=coefficients.c2ab / c0 - np.einsum("ia,jb->ijab", t1a, t1b),
        t2bb=coefficients.c2bb / c0 - _antisymmetric_product(t1b),
        reference_weight=c0**2,
    )


def _antisymmetric_product(singles: Array) -> Array:
    product = np.einsum("ia,jb->ijab", singles, singles)
    return np.asarray(product - product.transpose(1, 0, 2, 3))


def _too_light(coefficients: Coefficients, leading: Leading) -> str:
    alpha, beta = len(coefficients.c1a), len(coefficients.c1b)
    said = (
        f"the reference determinant makes up only {100 * coefficients.c0**2:.1f} % of the wave function in "
        f"the active space (at least {100 * WEIGHT_LIMIT:.0f} % are needed), so tailored coupled cluster "
        "cannot stand on it"
    )
    others = [det for det in leading if det[1:] != (tuple(range(alpha)), tuple(range(beta)))]
    if not others:
        return f"{said}; use CASSCF with NEVPT2 instead"
    weight, up, down = others[0]
    named = f"the heaviest determinant, {described(up, down)}, makes up {100 * weight:.1f} %"
    if weight >= WEIGHT_LIMIT:
        return f"{said}; {named}: make that one the reference, or use CASSCF with NEVPT2 instead"
    return f"{said}; even {named}: use CASSCF with NEVPT2 instead"


def described(up: tuple[int, ...], down: tuple[int, ...]) -> str:
    """A determinant in words; active orbitals are numbered from 1."""
    kinds = {
        "doubly filled": sorted(set(up) & set(down)),
        "one electron up": sorted(set(up) - set(down)),
        "one electron down": sorted(set(down) - set(up)),
    }
    said = [f"{', '.join(str(p + 1) for p in found)} ({kind})" for kind, found in kinds.items() if found]
    return "active orbitals " + " and ".join(said)
