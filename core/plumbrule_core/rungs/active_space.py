"""Active space: which orbitals one determinant cannot describe, and which of them to treat exactly."""

from dataclasses import dataclass, replace

import numpy as np

from plumbrule_core.basis_sets import frozen_orbitals
from plumbrule_core.correlation.asked import check, space_asked
from plumbrule_core.correlation.estimate import estimated_entropies
from plumbrule_core.correlation.growth import growth_spaces
from plumbrule_core.correlation.integrals import problem_from
from plumbrule_core.correlation.profile import Profile, cheap_solver, profile_from
from plumbrule_core.correlation.proposal import CALM, propose
from plumbrule_core.correlation.protocol import Problem
from plumbrule_core.correlation.solvers import choose
from plumbrule_core.correlation.solvers.dmrg import DMRG
from plumbrule_core.correlation.stored import (
    arrays_of,
    arrays_of_orbitals,
    orbitals_of_arrays,
    profile_of_arrays,
)
from plumbrule_core.correlation.window import Choice, OrbitalSet, Window, orbital_set, window_of
from plumbrule_core.documents.active_space import Space, SpaceRequest
from plumbrule_core.documents.plan import Forecast, Machine
from plumbrule_core.errors import PlumbruleError
from plumbrule_core.rungs.correlated.reference import fitting_of
from plumbrule_core.rungs.correlated.tailored_shelf import Staged
from plumbrule_core.rungs.correlated.tailored_values import tailored_value
from plumbrule_core.rungs.costs import PROGRAM_MB, TRANSFORM, forecast_of
from plumbrule_core.rungs.molecule import basis_of
from plumbrule_core.rungs.protocol import Given, Kind, Outcome, Published, Size, Tell

MOST_ORBITALS, MOST_WITHOUT_DMRG = 20, 12
"""Orbitals that are looked at: with DMRG, and where all must be solved exactly."""
DIRADICAL = 0.5
"""Natural occupation of UHF beyond pairs from which a calm profile contradicts it (own)."""
SWEEPS = 0.6
"""Operations (10^9) of the narrow DMRG solutions per orbital cubed (naphthalene, 19 orbitals: 100 s)."""
ENGINE_MB = 400.0


class ActiveSpace:
    """A cheap solution of a window of orbitals, the space it asks for, and that space solved accurately."""

    name = "Active space"
    says = "Looks for orbitals that one determinant cannot describe, and chooses which to treat exactly."
    kind: Kind = "detection"
    needs: tuple[str, ...] = ("HF",)
    rank = 0
    single_reference = False
    citation = "C. J. Stein and M. Reiher, J. Chem. Theory Comput. 12, 1760 (2016)"
    published: tuple[Published, ...] = (
        tailored_value("T11", -76.02778812),
        tailored_value("T12", -75.770250519),
    )

    def forecast(self, size: Size, machine: Machine) -> Forecast:
        """The integrals of the window, and its solutions."""
        window = min(MOST_ORBITALS, size.occupied + size.virtual)
        transformed = size.occupied + min(size.occupied, size.virtual) + window
        operations = TRANSFORM * size.functions**4 * transformed + SWEEPS * 1e9 * window**3
        memory = PROGRAM_MB + ENGINE_MB + min(2e-6 * size.functions**4, 0.3 * machine.memory_mb)
        return forecast_of(operations, machine, memory, low=0.2, high=4.0)

    def compute(self, given: Given, tell: Tell) -> Outcome:
        """The space; leaves orbitals, space, its solution and the sizes to follow on the bench.

        The energy is that of the active space, of Hartree-Fock where no space is needed. Raises
        PlumbruleError where a space was set that cannot be.
        """
        request = given.spec.space or SpaceRequest()
        orbitals, profile = _looked_at(given, request, tell)
        bench = given.bench
        bench.orbitals, bench.solved, bench.growth_spaces = orbitals.coefficients, None, ()
        space, notes = _chosen(request, orbitals, profile, bench.frozen)
        bench.space = space
        if request.grow:
            bench.growth_spaces = growth_spaces(profile, space, lambda one: _fits(one, orbitals, given))
        bench.profile = profile
        solved = _solution(space, orbitals, profile, given, tell)
        notes = (*notes, *solved.notes)
        for note in notes:
            tell.note(note)
        return Outcome(
            energy=solved.energy,
            reference="ROHF" if orbitals.alpha > orbitals.beta else "RHF",
            converged=solved.converged,
            notes=notes,
            used=_used(orbitals, profile, space, given),
            arrays=arrays_of(profile) | {"space_orbitals": orbitals.coefficients},
            space=space,
        )


def _looked_at(given: Given, request: SpaceRequest, tell: Tell) -> tuple[OrbitalSet, Profile]:
    """Orbitals and profile, from the checkpoint where it holds them."""
    field = given.bench.mean_field
    if field is None:
        raise PlumbruleError("Hartree-Fock has not been computed, and an active space starts from it")
    tell.progress(0.0, "choosing the orbitals to look at")
    fresh = orbital_set(field, _cores(given), _choice(request))
    stored = given.shelf.load() or {}
    kept = orbitals_of_arrays(stored, fresh, field.get_ovlp())
    if kept is not None and "window_words" in stored:
        tell.note("the orbitals were looked at before; carried on from there")
        return kept, profile_of_arrays(stored)
    include = space_asked(request, fresh, given.bench.frozen).orbitals if request.choice == "set" else ()
    window = _window(fresh, include, given)
    tell.progress(0.1, f"looking at {len(window.orbitals)} orbitals")
    profile = _checked(_profile(window, fresh, given, tell), given)
    given.shelf.save(arrays_of_orbitals(fresh) | arrays_of(profile))
    tell.checkpoint("the profile of the orbitals")
    return fresh, profile


def _choice(request: SpaceRequest) -> Choice:
    if request.orbital_set != "auto":
        return request.orbital_set
    return "canonical" if request.choice == "set" else "valence"


def _cores(given: Given) -> int:
    symbols = [atom.symbol for atom in given.spec.species.atoms]
    return min(frozen_orbitals(symbols, basis_of(given.spec)), min(given.bench.mean_field.mol.nelec))


def _window(orbitals: OrbitalSet, include: tuple[int, ...], given: Given) -> Window:
    most = MOST_WITHOUT_DMRG if DMRG().missing() else MOST_ORBITALS
    if len(orbitals.candidates) <= most:
        return window_of(orbitals, np.ones(len(orbitals.candidates)), most, include)
    estimate = estimated_entropies(_problem(orbitals.candidates, orbitals, given))
    return window_of(orbitals, estimate, most, include)


def _profile(window: Window, orbitals: OrbitalSet, given: Given, tell: Tell) -> Profile:
    problem = _problem(window.orbitals, orbitals, given)
    solver = cheap_solver(problem, given.memory_mb)
    stage = Staged(tell, f"looking at {len(window.orbitals)} orbitals")
    solved = solver.solve(problem, stage, threads=given.threads, memory_mb=given.memory_mb)
    return profile_from(window, problem, solved, solver.name)


def _checked(profile: Profile, given: Given) -> Profile:
    """A calm profile is not settled where the unrestricted solution says that electrons are unpaired."""
    found = given.bench.stability
    if found is None or found.natural_occupations is None or profile.largest >= CALM:
        return profile
    alpha, beta = given.bench.mean_field.mol.nelec
    paired = [*found.natural_occupations[: min(alpha, beta)], *found.natural_occupations[max(alpha, beta) :]]
    if max((min(n, 2 - n) for n in paired), default=0.0) < DIRADICAL:
        return profile
    note = "the window looks calm, but the unrestricted solution has unpaired electrons that should be paired"
    return replace(profile, settled=False, notes=(*profile.notes, note))


def _chosen(
    request: SpaceRequest, orbitals: OrbitalSet, profile: Profile, frozen: int
) -> tuple[Space, tuple[str, ...]]:
    """The space, and what people should know of it."""
    if request.choice == "set":
        space = space_asked(request, orbitals, frozen)
        return space, (*check(space, profile), *profile.notes)
    proposal = propose(profile)
    notes = [proposal.space.why, *profile.notes]
    if profile.narrow is not None:
        before = propose(replace(profile, entropies=profile.narrow))
        if before.space.orbitals != proposal.space.orbitals:
            notes.append(f"at the narrower setting {before.space.label} would have been proposed")
    return proposal.space, tuple(notes)


@dataclass(frozen=True, slots=True)
class Solution:
    """What is kept of the solution of the space: energy in hartree, whether it converged, notes."""

    energy: float
    converged: bool
    notes: tuple[str, ...] = ()


def _solution(space: Space, orbitals: OrbitalSet, profile: Profile, given: Given, tell: Tell) -> Solution:
    """The space solved accurately and left on the bench; from the checkpoint where it was solved before."""
    if not space.orbitals:
        return Solution(float(given.bench.mean_field.e_tot), True)
    stored = given.shelf.load() or {}
    if "space" in stored and tuple(stored["space"].tolist()) == space.orbitals:
        energy, converged = stored["space_solution"]
        return Solution(float(energy), bool(converged), tuple(str(note) for note in stored["space_notes"]))
    request = given.spec.space or SpaceRequest()
    problem = _problem(space.orbitals, orbitals, given)
    solver = choose(request.solver, problem, given.memory_mb, request.bond_dimension)
    tell.progress(0.8, f"solving the active space {space.label}")
    stage = Staged(tell, f"active space {space.label}")
    found = solver.solve(problem, stage, threads=given.threads, memory_mb=given.memory_mb)
    given.bench.solved = found
    kept = {
        "space": np.array(space.orbitals, dtype=np.int64),
        "space_solution": np.array([found.energy, found.converged]),
        "space_notes": np.array(found.notes, dtype=str),
    }
    given.shelf.save(arrays_of_orbitals(orbitals) | arrays_of(profile) | kept)
    return Solution(found.energy, found.converged, found.notes)


def _problem(numbers: tuple[int, ...], orbitals: OrbitalSet, given: Given) -> Problem:
    return problem_from(
        given.bench.mean_field,
        orbitals.coefficients,
        orbitals.filled_outside(numbers),
        [number - 1 for number in sorted(numbers)],
        given.spec.species.multiplicity,
        fitting_of(given) if given.spec.settings.density_fitting else None,
    )


def _fits(space: Space, orbitals: OrbitalSet, given: Given) -> bool:
    """Whether a solver reaches a space, told from its size alone."""
    n, single = len(space.orbitals), orbitals.alpha - orbitals.beta
    size = Problem(
        one=np.zeros((n, n)),
        two=np.zeros((1, 1, 1, 1)),
        alpha=(space.electrons + single) // 2,
        beta=(space.electrons - single) // 2,
        multiplicity=given.spec.species.multiplicity,
    )
    try:
        choose((given.spec.space or SpaceRequest()).solver, size, given.memory_mb)
    except PlumbruleError:
        return False
    return True


def _used(orbitals: OrbitalSet, profile: Profile, space: Space, given: Given) -> dict[str, str]:
    names = {"canonical": "canonical Hartree-Fock", "valence": "canonical, valence virtual ones first"}
    return {
        "orbitals": names[orbitals.name],
        "orbitals looked at": str(len(profile.orbitals)),
        "looked at with": profile.method,
        "active space": space.label,
        "threads": str(given.threads),
    }
