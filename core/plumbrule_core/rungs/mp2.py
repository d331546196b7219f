"""MP2: pairs of electrons correlated one by one, to second order."""

import numpy as np

from plumbrule_core.documents.plan import Forecast, Machine
from plumbrule_core.rungs.correlated.reference import (
    NO_PAIRS,
    correlated_reference,
    correlated_used,
    has_pairs,
    is_unrestricted,
    reference_name,
)
from plumbrule_core.rungs.correlated.solvers import perturbation
from plumbrule_core.rungs.costs import perturbation_forecast
from plumbrule_core.rungs.protocol import Given, Kind, Outcome, Published, Size, Tell
from plumbrule_core.rungs.published_systems import (
    AMIDOGEN,
    BORANE_CATION,
    FLUORIDE_ALL,
    FLUORIDE_FROZEN,
    HYDROGEN,
    WATER_DIFFUSE,
    WATER_OLSEN,
    WATER_STRETCHED,
)


class MP2:
    """Second-order perturbation theory; on ROHF with its singles, in semicanonical orbitals."""

    name = "MP2"
    says = "Pairs of electrons correlated to second order: cheap, and too eager where orbitals lie close."
    kind: Kind = "wave function"
    needs: tuple[str, ...] = ("HF",)
    rank = 10
    single_reference = True
    citation = "C. Moller and M. S. Plesset, Phys. Rev. 46, 618 (1934)"
    published: tuple[Published, ...] = (
        WATER_OLSEN.gives(-76.228729),
        WATER_STRETCHED.gives(-75.896935),
        HYDROGEN.gives(-1.116714 - 0.013158),
        FLUORIDE_FROZEN.gives(-100.0194112692 - 0.201627516796),
        FLUORIDE_ALL.gives(-100.0194112692 - 0.20378191195),
        WATER_DIFFUSE.gives(-76.0413815332 - 0.2194081478),
        AMIDOGEN.gives(-55.5751380525 - 0.152427554),
        BORANE_CATION.gives(-25.9451384287 - 0.0584235138),
    )

    def forecast(self, size: Size, machine: Machine) -> Forecast:
        """The transformation of the integrals with two occupied and two virtual indices."""
        return perturbation_forecast(size, machine)

    def compute(self, given: Given, tell: Tell) -> Outcome:
        """The energy; leaves the MP2 object with its amplitudes on the bench."""
        bench = given.bench
        reference = correlated_reference(bench)
        correlation = 0.0
        notes: tuple[str, ...] = (NO_PAIRS,)
        bench.perturbation = None
        if has_pairs(bench):
            tell.progress(0.0, "integrals and amplitudes")
            solver = perturbation(given)
            pairs, _ = solver.kernel()
            bench.perturbation, correlation, notes = solver, float(pairs), ()
        if reference_name(bench) == "ROHF":
            correlation += singles(reference, bench.frozen)
        tell.progress(1.0)
        return Outcome(
            energy=float(bench.mean_field.e_tot) + correlation,
            reference=reference_name(bench),
            correlation=correlation,
            notes=notes,
            used=correlated_used(given),
        )


def singles(reference: object, frozen: int) -> float:
    """The second-order energy of single excitations, in hartree: zero unless the orbitals are ROHF's."""
    assert is_unrestricted(reference)
    total = 0.0
    for spin, fock in enumerate(np.asarray(reference.get_fock())):  # type: ignore[attr-defined]
        orbitals, energies, occupation = (
            np.asarray(getattr(reference, name)[spin]) for name in ("mo_coeff", "mo_energy", "mo_occ")
        )
        filled, empty = np.flatnonzero(occupation > 0)[frozen:], np.flatnonzero(occupation == 0)
        couplings = orbitals[:, filled].T @ fock @ orbitals[:, empty]
        total += float(np.sum(couplings**2 / (energies[filled][:, None] - energies[empty])))
    return total
