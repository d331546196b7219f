"""The mean field that correlation starts from, and whether there is anything to correlate.

An ROHF determinant is taken over in semicanonical orbitals: alpha and beta Fock matrices are made diagonal
within the frozen, occupied and virtual orbitals. Perturbation theory on ROHF is defined in them (P. J.
Knowles et al., Chem. Phys. Lett. 186, 130 (1991)), (T) too (J. D. Watts, J. Gauss and R. J. Bartlett, J.
Chem. Phys. 98, 8718 (1993)), and CCSD and CISD energies do not depend on the choice.
"""

from typing import Any

import numpy as np

from plumbrule_core.errors import PlumbruleError
from plumbrule_core.rungs.protocol import Bench, Given


def correlated_reference(bench: Bench) -> Any:
    """The RHF or UHF object to correlate; raises PlumbruleError where HF has not been done."""
    if bench.mean_field is None:
        raise PlumbruleError("Hartree-Fock has not been computed, and this method starts from it")
    if bench.correlated_reference is None:
        field = bench.mean_field
        bench.correlated_reference = semicanonical(field, bench.frozen) if field.istype("ROHF") else field
    return bench.correlated_reference


def is_unrestricted(reference: Any) -> bool:
    """Whether alpha and beta orbitals differ."""
    return bool(reference.istype("UHF"))


def reference_name(bench: Bench) -> str:
    """RHF, UHF or ROHF."""
    field = bench.mean_field
    return "UHF" if field.istype("UHF") else "ROHF" if field.istype("ROHF") else "RHF"


def correlated_counts(bench: Bench) -> tuple[tuple[int, int], tuple[int, int]]:
    """Correlated occupied and virtual orbitals, alpha and beta."""
    reference = correlated_reference(bench)
    orbitals = np.asarray(reference.mo_coeff).shape[-1]
    filled = reference.mol.nelec
    occupied = tuple(count - bench.frozen for count in filled)
    virtual = tuple(orbitals - count for count in filled)
    return (occupied[0], occupied[1]), (virtual[0], virtual[1])


def has_pairs(bench: Bench) -> bool:
    """Whether any two electrons can be excited together; without that the correlation energy is zero."""
    (alpha, beta), (empty_alpha, empty_beta) = correlated_counts(bench)
    unlike = alpha and beta and empty_alpha and empty_beta
    like = (alpha > 1 and empty_alpha > 1) or (beta > 1 and empty_beta > 1)
    return bool(unlike or like)


NO_PAIRS = "no two electrons can be correlated in this basis, so the correlation energy is zero"


def correlated_used(given: Given) -> dict[str, str]:
    """What was really used, as far as the correlated rungs share it."""
    bench = given.bench
    used = {"frozen orbitals": str(bench.frozen), "threads": str(given.threads)}
    if reference_name(bench) == "ROHF":
        used["orbitals"] = "ROHF determinant, semicanonical unrestricted orbitals"
    if given.spec.settings.density_fitting:
        used["density fitting of the correlation"] = str(fitting_of(given).auxbasis)
    return used


def fitting_of(given: Given) -> Any:
    """The density fitting of correlation energies: the set made for them, else that of the field."""
    from pyscf import df

    from plumbrule_core.rungs.molecule import basis_of

    reference = correlated_reference(given.bench)
    pair = basis_of(given.spec).fitting
    if pair is None:
        return reference.with_df
    fitting = df.DF(reference.mol, auxbasis=pair[1])
    fitting.max_memory = given.memory_mb
    return fitting


def semicanonical(field: Any, frozen: int) -> Any:
    """The same determinant as an unrestricted field, its Fock matrices diagonal within each block."""
    unrestricted = field.to_uhf()
    focks = np.asarray(unrestricted.get_fock())
    orbitals, energies = np.array(unrestricted.mo_coeff), np.zeros_like(unrestricted.mo_occ)
    for spin, fock in enumerate(focks):
        filled = np.flatnonzero(unrestricted.mo_occ[spin] > 0)
        for block in (filled[:frozen], filled[frozen:], np.flatnonzero(unrestricted.mo_occ[spin] == 0)):
            old = orbitals[spin][:, block]
            energies[spin][block], turn = np.linalg.eigh(old.T @ fock @ old)
            orbitals[spin][:, block] = old @ turn
    unrestricted.mo_coeff, unrestricted.mo_energy, unrestricted.converged = orbitals, energies, True
    return unrestricted
