"""CCSD(T): the triples added to CCSD by perturbation theory."""

from plumbrule_core.documents.plan import Forecast, Machine
from plumbrule_core.errors import PlumbruleError
from plumbrule_core.rungs.correlated.reference import NO_PAIRS, correlated_used, has_pairs, reference_name
from plumbrule_core.rungs.correlated.solvers import integrals
from plumbrule_core.rungs.costs import triples_forecast
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


class PerturbativeTriples:
    """The usual best answer for one-determinant molecules; refused where CCSD did not converge."""

    name = "CCSD(T)"
    says = "The usual best answer, as long as one determinant describes the molecule."
    kind: Kind = "wave function"
    needs: tuple[str, ...] = ("HF", "CCSD")
    rank = 40
    single_reference = True
    citation = (
        "K. Raghavachari, G. W. Trucks, J. A. Pople and M. Head-Gordon, Chem. Phys. Lett. 157, 479 (1989)"
    )
    published: tuple[Published, ...] = (
        WATER_OLSEN.gives(-76.241202),
        WATER_STRETCHED.gives(-75.955485),
        HYDROGEN.gives(-1.137276),
        FLUORIDE_FROZEN.gives(-100.0194112692 - 0.2068152041 - 0.0019205007),
        FLUORIDE_ALL.gives(-100.0194112692 - 0.208743643 - 0.0019363897),
        WATER_DIFFUSE.gives(-76.0413815332 - 0.2271733453 - 0.00521238),
        AMIDOGEN.gives(-55.5751380525 - 0.1716495276 - 0.00381116),
        BORANE_CATION.gives(-25.9451384287 - 0.0811710557 - 0.00060401),
    )

    def forecast(self, size: Size, machine: Machine) -> Forecast:
        """The triples alone."""
        return triples_forecast(size, machine)

    def compute(self, given: Given, tell: Tell) -> Outcome:
        """The energy; the library has no hook inside the triples, so a stop in them ends the process."""
        bench = given.bench
        reference, energy, used = reference_name(bench), float(bench.mean_field.e_tot), correlated_used(given)
        if not has_pairs(bench):
            bench.triples = None
            return Outcome(energy=energy, reference=reference, correlation=0.0, notes=(NO_PAIRS,), used=used)
        solver = bench.coupled_cluster
        if solver is None:
            raise PlumbruleError("CCSD has not been computed, and (T) stands on its amplitudes")
        if not solver.converged:
            raise PlumbruleError(
                f"CCSD did not converge for {given.spec.species.name}, so (T) on its amplitudes would mean "
                "nothing"
            )
        tell.progress(0.0, "triples")
        bench.triples = float(solver.ccsd_t(eris=integrals(given)))
        tell.progress(1.0)
        correlation = float(solver.e_corr) + bench.triples
        return Outcome(energy=energy + correlation, reference=reference, correlation=correlation, used=used)
