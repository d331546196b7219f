"""Orbitals shared by both spins, where the field has two sets of its own.

An orbital entropy asks how one spatial orbital is occupied, so the orbitals of an active space are
those of RHF, or of ROHF for open shells. From an unrestricted field the restricted one is converged,
starting from the natural orbitals of the unrestricted one (P. Pulay and T. P. Hamilton, J. Chem. Phys.
88, 4926 (1988)).
"""

from typing import Any

import numpy as np

from plumbrule_core.correlation.protocol import Array
from plumbrule_core.errors import PlumbruleError

MOST_ITERATIONS = 100


def restricted_orbitals(mean_field: Any) -> Any:
    """The field itself where it is restricted, else the restricted field near it; raises PlumbruleError."""
    if not mean_field.istype("UHF"):
        return mean_field
    field = mean_field.to_rhf()
    alpha, beta = mean_field.mol.nelec
    occupations = np.zeros(mean_field.mo_occ.shape[-1])
    occupations[:alpha] += 1
    occupations[:beta] += 1
    field.verbose, field.chkfile = 0, None
    field.conv_tol, field.max_cycle = 1e-9, MOST_ITERATIONS
    field = field.newton()
    field.kernel(natural_orbitals(mean_field), occupations)
    if not field.converged:
        raise PlumbruleError(
            "orbitals shared by both spins, which an active space needs, did not converge from the "
            "unrestricted solution; choose ROHF as the reference"
        )
    return field.undo_soscf()


def natural_orbitals(mean_field: Any) -> Array:
    """Eigenvectors of the spin-summed density of an unrestricted field, the fullest first."""
    overlap = mean_field.get_ovlp()
    alpha = np.asarray(mean_field.mo_coeff[0])
    density = np.sum(mean_field.make_rdm1(), axis=0)
    turned = alpha.T @ overlap @ density @ overlap @ alpha
    return np.asarray(alpha @ np.linalg.eigh(turned)[1][:, ::-1])
