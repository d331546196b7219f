"""From a mean field and its orbitals to the problem of an active space."""

from collections.abc import Sequence
from typing import Any

import numpy as np
from numpy.typing import NDArray

from plumbrule_core.correlation.protocol import Array, Problem
from plumbrule_core.errors import PlumbruleError


def problem_from(
    mean_field: Any,
    orbitals: NDArray[np.float64] | tuple[NDArray[np.float64], NDArray[np.float64]],
    core: Sequence[int],
    active: Sequence[int],
    multiplicity: int,
    fitting: Any = None,
) -> Problem:
    """The Hamiltonian of the electrons in the `active` orbitals, in the field of the filled `core` ones.

    `orbitals` (nao, nmo), or a pair of them (alpha, beta) or (2, nao, nmo) where the spins have their own;
    `core` and `active` are columns, the same for both spins, `active` with the reference's filled ones first.
    One-electron integrals come from the field, so that relativity and density fitting are in; `fitting`
    overrides the field's own fitting for the repulsion among active electrons. Raises PlumbruleError where
    the columns, the electrons and the multiplicity do not fit each other.
    """
    pair = np.asarray(orbitals, dtype=float)
    unrestricted = pair.ndim == 3
    spins = pair if unrestricted else pair[None]
    alpha, beta = _electrons(mean_field, spins.shape[-1], core, active, multiplicity)
    kernel, energy = _core_field(mean_field, spins[:, :, list(core)])
    chosen = spins[:, :, list(active)]
    one = np.einsum("spi,spq,sqj->sij", chosen, kernel, chosen)
    source = fitting or getattr(mean_field, "with_df", None)
    blocks = [(0, 0), (0, 1), (1, 1)] if unrestricted else [(0, 0)]
    two = np.stack([_repulsion(mean_field, source, chosen[a], chosen[b]) for a, b in blocks])
    return Problem(
        one=one if unrestricted else one[0],
        two=two if unrestricted else two[0],
        alpha=alpha,
        beta=beta,
        multiplicity=multiplicity,
        core_energy=energy,
        overlap=chosen[0].T @ mean_field.get_ovlp() @ chosen[1] if unrestricted else None,
    )


def _electrons(
    mean_field: Any, columns: int, core: Sequence[int], active: Sequence[int], multiplicity: int
) -> tuple[int, int]:
    used = [*core, *active]
    if len(set(used)) != len(used) or any(not 0 <= column < columns for column in used):
        raise PlumbruleError(
            f"core and active orbitals must be different ones out of the {columns} there are; found core "
            f"{list(core)} and active {list(active)} (numbered from 0)"
        )
    electrons = int(sum(mean_field.mol.nelec)) - 2 * len(core)
    unpaired = multiplicity - 1
    alpha, beta = (electrons + unpaired) // 2, (electrons - unpaired) // 2
    if (electrons + unpaired) % 2 or unpaired < 0 or beta < 0 or alpha > len(active):
        raise PlumbruleError(
            f"{electrons} electrons in {len(active)} active orbitals cannot have the multiplicity "
            f"{multiplicity}; choose more orbitals, or the multiplicity that fits"
        )
    return alpha, beta


def _core_field(mean_field: Any, core: Array) -> tuple[Array, float]:
    """One-electron operator (spins, nao, nao) with the core's field in it; energy of core and nuclei."""
    bare = mean_field.get_hcore()
    density = np.einsum("spi,sqi->spq", core, core)
    if len(density) == 1:
        density = np.concatenate([density, density])
    coulomb, exchange = mean_field.get_jk(mean_field.mol, density)
    field = coulomb.sum(axis=0) - exchange
    energy = np.einsum("pq,spq->", bare, density) + 0.5 * np.einsum("spq,spq->", field, density)
    return bare + field[: len(core)], float(energy + mean_field.energy_nuc())


def _repulsion(mean_field: Any, fitting: Any, first: Array, second: Array) -> Array:
    """(ij|kl) with ij of one spin and kl of the other, in chemists' order."""
    from pyscf import ao2mo

    four, n = (first, first, second, second), first.shape[1]
    if fitting is not None:
        found = fitting.ao2mo(four, compact=False)
    else:
        stored = mean_field._eri
        found = ao2mo.general(mean_field.mol if stored is None else stored, four, compact=False)
    return np.asarray(found, dtype=float).reshape(n, n, n, n)
