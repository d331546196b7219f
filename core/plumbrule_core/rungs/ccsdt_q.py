"""CCSDT(Q): quadruple excitations added to CCSDT by perturbation theory, for closed shells."""

from plumbrule_core.documents.plan import Forecast, Machine
from plumbrule_core.errors import PlumbruleError
from plumbrule_core.rungs.correlated.full_triples import triple_integrals
from plumbrule_core.rungs.correlated.reference import (
    NO_PAIRS,
    correlated_counts,
    correlated_used,
    has_pairs,
    reference_name,
)
from plumbrule_core.rungs.correlated.triples_prices import quadruples_forecast
from plumbrule_core.rungs.protocol import Given, Kind, Outcome, Published, Size, Tell
from plumbrule_core.rungs.published_systems import HYDROGEN, NITROGEN_FROZEN

NO_QUADRUPLES = "fewer than four electrons are correlated, so CCSDT is exact and (Q) is zero"


class PerturbativeQuadruples:
    """On RHF alone: the library has (Q) for closed shells only, and an open shell is refused in words."""

    name = "CCSDT(Q)"
    says = "Quadruples on top of CCSDT: next to exact for one-determinant molecules; closed shells only."
    kind: Kind = "wave function"
    needs: tuple[str, ...] = ("HF", "CCSDT")
    rank = 60
    single_reference = True
    closed_shells_only = True
    citation = "Y. J. Bomble, J. F. Stanton, M. Kallay and J. Gauss, J. Chem. Phys. 123, 054101 (2005)"
    published: tuple[Published, ...] = (
        HYDROGEN.gives(-1.137276),
        NITROGEN_FROZEN.slowly().gives(-108.9537962409 - 0.3217858675 - 0.0017003938),
    )

    def forecast(self, size: Size, machine: Machine) -> Forecast:
        """The quadruples alone."""
        return quadruples_forecast(size, machine)

    def compute(self, given: Given, tell: Tell) -> Outcome:
        """The energy; the library has no hook inside (Q), so a stop in it ends the process.

        Raises PlumbruleError for open shells, and where CCSDT is not there or not converged.
        """
        bench, name = given.bench, given.spec.species.name
        reference, energy, used = reference_name(bench), float(bench.mean_field.e_tot), correlated_used(given)
        if not has_pairs(bench):
            return Outcome(energy=energy, reference=reference, correlation=0.0, notes=(NO_PAIRS,), used=used)
        solver = bench.full_triples
        if sum(correlated_counts(bench)[0]) < 4 and solver is not None and solver.converged:
            total = energy + float(solver.e_corr)
            return Outcome(
                energy=total,
                reference=reference,
                correlation=total - energy,
                notes=(NO_QUADRUPLES,),
                used=used,
            )
        if reference != "RHF":
            raise PlumbruleError(
                f"(Q) is for closed shells on RHF only, and {name} stands on {reference}: take CCSDT as the "
                "top rung for every species of this question"
            )
        if solver is None:
            raise PlumbruleError("CCSDT has not been computed, and (Q) stands on its amplitudes")
        if not solver.converged:
            raise PlumbruleError(f"CCSDT did not converge for {name}, so (Q) on it would mean nothing")
        tell.progress(0.0, "quadruples")
        bracket, quadruples = (float(x) for x in solver.ccsdt_q(eris=triple_integrals(solver, given)))
        tell.progress(1.0)
        correlation = float(solver.e_corr) + quadruples
        return Outcome(
            energy=energy + correlation,
            reference=reference,
            correlation=correlation,
            used={
                **used,
                "(Q)": f"{quadruples:.8f} hartree",
                "[Q], its fifth-order part": f"{bracket:.8f} hartree",
            },
        )
