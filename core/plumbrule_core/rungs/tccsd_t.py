"""TCCSD(T): the triples added to TCCSD, with the active amplitudes left out of them."""

from collections.abc import Mapping

import numpy as np

from plumbrule_core.correlation.tailored import Tailored, triples_energy
from plumbrule_core.documents.plan import Forecast, Machine
from plumbrule_core.errors import PlumbruleError
from plumbrule_core.rungs.correlated.reference import NO_PAIRS, correlated_used, has_pairs, reference_name
from plumbrule_core.rungs.correlated.solvers import coupled_cluster, integrals
from plumbrule_core.rungs.correlated.tailored_frame import frame_of
from plumbrule_core.rungs.correlated.tailored_values import tailored_value
from plumbrule_core.rungs.costs import triples_forecast
from plumbrule_core.rungs.protocol import Given, Kind, Outcome, Published, Size, Tell
from plumbrule_core.rungs.tccsd import SIZES_FORECAST, growth, size_taken, space_used


class TCCSDT:
    """The usual triples, with all amplitudes zero whose indices are all active; nothing else differs.

    The energy is taken from the same size of the space as that of TCCSD.
    """

    name: str = "TCCSD(T)"
    says = "TCCSD with triples outside the active space: the best answer where one determinant fails."
    kind: Kind = "wave function"
    needs: tuple[str, ...] = ("HF", "Active space", "TCCSD")
    rank = 38
    single_reference = False
    citation = "D. I. Lyakh, V. F. Lotrich and R. J. Bartlett, Chem. Phys. Lett. 501, 166 (2011)"
    published: tuple[Published, ...] = (
        tailored_value("T02", -14.4197890821),
        tailored_value("T09", -109.280542),
        tailored_value("T11", -76.238261521 - 0.002914227),
        tailored_value("T12", -75.9473359 - 0.003244343),
    )

    def forecast(self, size: Size, machine: Machine) -> Forecast:
        """The triples at every size of the series, which cost the same at each."""
        single = triples_forecast(size, machine)
        whole = single
        for _ in range(SIZES_FORECAST - 1):
            whole = whole.plus(single)
        return whole

    def compute(self, given: Given, tell: Tell) -> Outcome:
        """The energy and the growth; a size that is finished is not computed again after a stop."""
        bench = given.bench
        reference, energy, used = reference_name(bench), float(bench.mean_field.e_tot), correlated_used(given)
        if not has_pairs(bench):
            return Outcome(energy=energy, reference=reference, correlation=0.0, notes=(NO_PAIRS,), used=used)
        if not bench.tailored:
            raise PlumbruleError("TCCSD has not been computed, and its triples stand on its amplitudes")
        taken = size_taken(bench, given.spec.space)
        if taken.energy is None or not taken.converged:
            raise PlumbruleError(
                f"TCCSD did not converge for {given.spec.species.name} in the space {taken.space.label}, so "
                "(T) on its amplitudes would mean nothing"
            )
        triples = _triples(given, tell)
        total = taken.energy + triples[taken.space.orbitals]
        return Outcome(
            energy=total,
            reference=reference,
            correlation=total - energy,
            used={**used, **space_used(bench, given.spec.space)},
            space=taken.space,
            growth=growth(bench.tailored, triples),
        )


def _triples(given: Given, tell: Tell) -> Mapping[tuple[int, ...], float]:
    """The triples at every size that converged, by its orbitals; carried on from the shelf."""
    usable = [size for size in given.bench.tailored if size.converged]
    done = _stored(given, usable)
    ground = frame_of(given).given
    for place, size in enumerate(usable):
        if size.space.orbitals in done:
            continue
        tell.progress(place / len(usable), f"triples in the space {size.space.label}")
        done[size.space.orbitals] = triples_energy(coupled_cluster(ground), size, integrals(ground))
        _keep(given, usable, done)
    tell.progress(1.0)
    return done


def _keep(given: Given, usable: list[Tailored], done: Mapping[tuple[int, ...], float]) -> None:
    kept = [size for size in usable if size.space.orbitals in done]
    given.shelf.save(
        {
            "energies": np.array([size.energy for size in kept], dtype=float),
            "triples": np.array([done[size.space.orbitals] for size in kept]),
        }
    )


def _stored(given: Given, usable: list[Tailored]) -> dict[tuple[int, ...], float]:
    """Triples of sizes whose TCCSD energy is still the same, which names the size and its amplitudes."""
    stored = given.shelf.load()
    if stored is None or not {"energies", "triples"} <= stored.keys():
        return {}
    found = {}
    for energy, value in zip(stored["energies"], stored["triples"], strict=True):
        for size in usable:
            if size.energy is not None and abs(size.energy - energy) < given.spec.settings.cc_tolerance:
                found[size.space.orbitals] = float(value)
    return found
