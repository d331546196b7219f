"""CASCI: every arrangement of the active electrons in the active orbitals, in the field of all others."""

from collections.abc import Mapping

from plumbrule_core.correlation.protocol import Solved
from plumbrule_core.correlation.solvers import SOLVERS
from plumbrule_core.documents.plan import Forecast, Machine
from plumbrule_core.errors import PlumbruleError
from plumbrule_core.rungs.active.counts import refuse_beyond
from plumbrule_core.rungs.active.division import Division, determinant_energy, division_of, problem_of
from plumbrule_core.rungs.active.prices import exact_forecast, space_guessed
from plumbrule_core.rungs.active.wording import leading_words, natural_occupations, occupation_words
from plumbrule_core.rungs.correlated.reference import reference_name
from plumbrule_core.rungs.correlated.tailored_values import tailored_value
from plumbrule_core.rungs.protocol import Given, Kind, Outcome, Published, Size, Tell

NO_SPACE = "no orbital is active, so this is the energy of the one determinant"


class CASCI:
    """In the orbitals that the active space is numbered in, which no energy is optimised for."""

    name = "CASCI"
    says = "The active space solved exactly in the orbitals as they are; the rest is left uncorrelated."
    kind: Kind = "wave function"
    needs: tuple[str, ...] = ("HF", "Active space")
    rank = 2
    single_reference = False
    citation = "B. O. Roos, P. R. Taylor and P. E. M. Siegbahn, Chem. Phys. 48, 157 (1980)"
    published: tuple[Published, ...] = (
        tailored_value("T09", -109.0216796),
        tailored_value("T11", -76.02778812),
        tailored_value("T12", -75.770250519),
        tailored_value("T13", -100.0219833546),
    )

    def forecast(self, size: Size, machine: Machine) -> Forecast:
        """One exact diagonalisation in the space."""
        return exact_forecast(*space_guessed(size), size, machine)

    def compute(self, given: Given, tell: Tell) -> Outcome:
        """The lowest state of the species' spin; raises PlumbruleError where the space is beyond memory."""
        division = division_of(given)
        if not division.active:
            return one_determinant(division, given)
        refuse_beyond(
            division.active,
            *division.electrons,
            given.memory_mb,
            f"the active space {division.space.label} of {given.spec.species.name}",
            "choose a smaller space, or the rung DMRG in place of CASCI",
        )
        problem = problem_of(division, given)
        solver = SOLVERS["exact"]
        beyond = solver.missing() or solver.reach(problem, given.memory_mb)
        if beyond:
            raise PlumbruleError(f"{beyond}; choose a smaller space, or the rung DMRG in place of CASCI")
        solved = solver.solve(problem, tell, threads=given.threads, memory_mb=given.memory_mb)
        return outcome_of(solved, division, given)


def one_determinant(division: Division, given: Given) -> Outcome:
    """What is left where the space is empty: the energy of the determinant."""
    energy = determinant_energy(division, given)
    return Outcome(
        energy=energy,
        reference=reference_name(given.bench),
        correlation=energy - float(given.bench.mean_field.e_tot),
        notes=(NO_SPACE,),
        used=division.used,
        space=division.space,
    )


def outcome_of(
    solved: Solved, division: Division, given: Given, used: Mapping[str, str] | None = None
) -> Outcome:
    """Energy, weights and occupations of a solved space, in words and arrays."""
    occupations = natural_occupations(solved)
    return Outcome(
        energy=solved.energy,
        reference=reference_name(given.bench),
        correlation=solved.energy - float(given.bench.mean_field.e_tot),
        converged=solved.converged,
        notes=(
            leading_words(solved.leading, division.active),
            *occupation_words(occupations),
            *solved.notes,
        ),
        used={
            **division.used,
            "weight of the reference": f"{solved.reference_weight:.4f}",
            "S squared": f"{solved.spin_squared:.4f}",
            "threads": str(given.threads),
            **(used or {}),
        },
        arrays={"active_occupations": occupations},
        space=division.space,
    )
