"""FCI: every arrangement of all correlated electrons in all orbitals; exact within the basis set."""

import numpy as np

from plumbrule_core.correlation.integrals import problem_from
from plumbrule_core.correlation.restricted import restricted_orbitals
from plumbrule_core.correlation.solvers import SOLVERS
from plumbrule_core.documents.plan import Forecast, Machine
from plumbrule_core.errors import PlumbruleError
from plumbrule_core.rungs.active.counts import refuse_beyond
from plumbrule_core.rungs.active.prices import exact_forecast
from plumbrule_core.rungs.active.wording import leading_words
from plumbrule_core.rungs.correlated.reference import correlated_used, reference_name
from plumbrule_core.rungs.protocol import Given, Kind, Outcome, Published, Size, Tell
from plumbrule_core.rungs.published_systems import (
    AMIDOGEN_SMALL,
    HELIUMS_TWO,
    HYDROGEN,
)

INSTEAD = "choose CCSDT(Q) or CCSD(T), or an active space"


class FCI:
    """On RHF or ROHF orbitals; from a UHF reference the restricted orbitals near it are converged first."""

    name = "FCI"
    says = "Exact within the basis set, for the smallest molecules: all arrangements of all electrons."
    kind: Kind = "wave function"
    needs: tuple[str, ...] = ("HF",)
    rank = 70
    single_reference = False
    citation = "P. J. Knowles and N. C. Handy, Chem. Phys. Lett. 111, 315 (1984)"
    published: tuple[Published, ...] = (
        HYDROGEN.gives(-1.137276),
        AMIDOGEN_SMALL.gives(-55.633264),
        HELIUMS_TWO.gives(-5.74032427777),
    )

    def forecast(self, size: Size, machine: Machine) -> Forecast:
        """By the number of determinants; the memory exceeds the machine where they do not fit."""
        orbitals = size.occupied + size.virtual
        return exact_forecast(orbitals, size.occupied, size.occupied, size, machine, known=True)

    def compute(self, given: Given, tell: Tell) -> Outcome:
        """The lowest state of the species' spin; raises PlumbruleError where it is beyond this machine."""
        bench, species = given.bench, given.spec.species
        frozen = bench.frozen
        alpha, beta = (int(count) - frozen for count in bench.mean_field.mol.nelec)
        count = int(np.shape(bench.mean_field.mo_coeff)[-1]) - frozen
        what = f"FCI of {species.name} with {alpha + beta} correlated electrons in {count} orbitals"
        refuse_beyond(count, alpha, beta, given.memory_mb, what, INSTEAD)
        field = restricted_orbitals(bench.mean_field)
        problem = problem_from(
            field, field.mo_coeff, range(frozen), range(frozen, frozen + count), species.multiplicity
        )
        solver = SOLVERS["exact"]
        if beyond := solver.reach(problem, given.memory_mb):
            raise PlumbruleError(f"{what} is beyond this program: {beyond}; {INSTEAD}")
        solved = solver.solve(problem, tell, threads=given.threads, memory_mb=given.memory_mb)
        return Outcome(
            energy=solved.energy,
            reference=reference_name(bench),
            correlation=solved.energy - float(bench.mean_field.e_tot),
            converged=solved.converged,
            notes=(leading_words(solved.leading, count), *solved.notes),
            used={
                **correlated_used(given),
                "orbitals": "restricted, for both spins"
                if bench.mean_field.istype("UHF")
                else "of the reference",
                "weight of the reference": f"{solved.reference_weight:.4f}",
                "S squared": f"{solved.spin_squared:.4f}",
            },
        )
