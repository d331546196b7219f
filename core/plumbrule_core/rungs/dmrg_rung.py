"""DMRG: the active space of CASCI where it is too large for exact diagonalisation."""

from dataclasses import replace

from plumbrule_core.correlation.solvers import choose
from plumbrule_core.documents.active_space import SpaceRequest
from plumbrule_core.documents.plan import Forecast, Machine
from plumbrule_core.rungs.active.division import division_of, problem_of
from plumbrule_core.rungs.active.prices import renormalised_forecast
from plumbrule_core.rungs.casci import one_determinant, outcome_of
from plumbrule_core.rungs.correlated.tailored_values import tailored_value
from plumbrule_core.rungs.protocol import Given, Kind, Outcome, Published, Size, Tell


class DMRG:
    """In the orbitals that the active space is numbered in; the bond dimension is the recipe's."""

    name = "DMRG"
    says = "CASCI for spaces too large to be exact: the density matrix renormalisation group."
    kind: Kind = "wave function"
    needs: tuple[str, ...] = ("HF", "Active space")
    rank = 3
    single_reference = False
    citation = (
        "S. R. White, Phys. Rev. Lett. 69, 2863 (1992); G. K.-L. Chan and M. Head-Gordon, J. Chem. Phys. "
        "116, 4462 (2002)"
    )
    published: tuple[Published, ...] = (
        replace(tailored_value("T09", -109.0216796338), slow=True),
        tailored_value("T13", -100.0219833546),
    )

    def forecast(self, size: Size, machine: Machine) -> Forecast:
        """Sweeps whose number hangs on the molecule: a wide range."""
        return renormalised_forecast(size, machine)

    def compute(self, given: Given, tell: Tell) -> Outcome:
        """The energy at the largest bond dimension; raises PlumbruleError where the engine is missing."""
        division = division_of(given)
        if not division.active:
            return one_determinant(division, given)
        request = given.spec.space or SpaceRequest()
        problem = problem_of(division, given)
        solver = choose("DMRG", problem, given.memory_mb, request.bond_dimension)
        solved = solver.solve(problem, tell, threads=given.threads, memory_mb=given.memory_mb)
        return outcome_of(solved, division, given, {"bond dimension": str(request.bond_dimension)})
