"""HF: one determinant, converged to a minimum; the reference of every rung above."""

from typing import Any

import numpy as np

from plumbrule_core.basis_sets import frozen_orbitals
from plumbrule_core.documents.plan import Forecast, Machine, TaskSpec
from plumbrule_core.rungs.costs import field_forecast
from plumbrule_core.rungs.molecule import basis_of, empty_mean_field, reference_kind
from plumbrule_core.rungs.protocol import Given, Kind, Outcome, Published, Size, Tell
from plumbrule_core.rungs.published_systems import (
    AMIDOGEN,
    BORANE_CATION,
    FLUORIDE_ALL,
    HYDROGEN,
    MINIMAL,
    OXYGEN,
    WATER_DIFFUSE,
    WATER_OLSEN,
    WATER_SIX_D,
    WATER_STRETCHED,
)
from plumbrule_core.rungs.scf.solve import guess_words, solve
from plumbrule_core.rungs.scf.stored import Solved


class HartreeFock:
    """RHF for closed shells, UHF for open ones, ROHF where asked; an internal instability is followed."""

    name = "HF"
    says = "One determinant, no correlation: the start of the ladder."
    kind: Kind = "wave function"
    needs: tuple[str, ...] = ()
    rank = 0
    single_reference = True
    citation = "C. C. J. Roothaan, Rev. Mod. Phys. 23, 69 (1951)"
    published: tuple[Published, ...] = (
        WATER_OLSEN.gives(-76.024039),
        WATER_STRETCHED.gives(-75.587711),
        HYDROGEN.gives(-1.116714),
        FLUORIDE_ALL.gives(-100.0194112692),
        WATER_DIFFUSE.gives(-76.0413815332),
        AMIDOGEN.gives(-55.5751380525),
        BORANE_CATION.gives(-25.9451384287),
        *MINIMAL,
        WATER_SIX_D.gives(-76.0231586941),
        OXYGEN.gives(-149.671355172),
    )

    def forecast(self, size: Size, machine: Machine) -> Forecast:
        """Fock builds, the guesses of an open shell and the stability analysis included."""
        return field_forecast(size, machine)

    def compute(self, given: Given, tell: Tell) -> Outcome:
        """Converge, follow, measure; leaves the field, its stability and the frozen core on the bench."""
        mean_field = empty_mean_field(given)
        solved = solve(mean_field, given, tell)
        bench = given.bench
        bench.mean_field, bench.stability = mean_field, solved.stability
        bench.correlated_reference = None
        bench.frozen = core_orbitals(given.spec, mean_field)
        return Outcome(
            energy=float(mean_field.e_tot),
            reference=reference_kind(given.spec),
            correlation=0.0,
            iterations=solved.iterations,
            notes=(*solved.notes, *removed_functions(mean_field)),
            used=field_used(given, mean_field, solved),
            arrays=field_arrays(mean_field),
        )


def core_orbitals(spec: TaskSpec, mean_field: Any) -> int:
    """Frozen core orbitals, no more than are filled (a bare ion may hold fewer than its element)."""
    if spec.settings.core == "all":
        return 0
    symbols = [atom.symbol for atom in spec.species.atoms]
    return min(frozen_orbitals(symbols, basis_of(spec)), min(mean_field.mol.nelec))


def removed_functions(mean_field: Any) -> tuple[str, ...]:
    """A note where functions of the basis depend on each other so much that some were left out."""
    removed = mean_field.mol.nao - np.shape(mean_field.mo_coeff)[-1]
    if not removed:
        return ()
    many = f"{removed} combination{'s' if removed > 1 else ''} of basis functions"
    return (f"{many} left out, because the basis is nearly linearly dependent (eigenvalue below 1e-6)",)


def field_used(given: Given, mean_field: Any, solved: Solved) -> dict[str, str]:
    """What was really used."""
    settings = given.spec.settings
    used = {
        "starting guess": guess_words(solved),
        "converged with": solved.measure,
        "basis functions": str(mean_field.mol.nao),
        "d functions": "Cartesian" if mean_field.mol.cart else "spherical",
        "energy tolerance": f"{settings.scf_tolerance:g} hartree",
        "threads": str(given.threads),
    }
    if settings.density_fitting:
        used["density fitting of the field"] = str(mean_field.with_df.auxbasis)
    if settings.relativity != "none":
        used["relativity"] = "scalar, X2C"
    if mean_field.mol.ecp:
        used["core potential of"] = ", ".join(sorted(mean_field.mol.ecp))
    return used


def field_arrays(mean_field: Any) -> dict[str, np.ndarray]:
    """Orbitals, their energies in hartree and occupations; two spins stacked where unrestricted."""
    return {
        "orbitals": np.asarray(mean_field.mo_coeff),
        "orbital_energies": np.asarray(mean_field.mo_energy),
        "occupations": np.asarray(mean_field.mo_occ),
    }
