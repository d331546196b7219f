"""Exact diagonalisation: every determinant of the active space."""

import math
from collections.abc import Mapping
from typing import Any

import numpy as np

from plumbrule_core.correlation.entropies import profile_of
from plumbrule_core.correlation.excitations import Strings
from plumbrule_core.correlation.protocol import Array, Problem, Solved, Tell
from plumbrule_core.correlation.wave import Wave, coefficients_of, leading_of
from plumbrule_core.errors import PlumbruleError

MOST_DETERMINANTS = 20_000_000
"""14 electrons in 14 orbitals have 12 million; one matrix-vector product then takes about half a minute."""
DENSE = 64
"""Spaces up to this size are diagonalised as a matrix."""
GUESSED = 200
"""Determinants whose lowest states the survey starts from."""
NOISE = 1e-3
"""Norm of the noise in a start, so that none is confined to one symmetry or is a state of the wrong spin."""
SURVEYED = 3
"""Roots looked at before the lowest of the right spin is polished."""
SURVEY_TOLERANCE, TOLERANCE = 1e-6, 1e-13
"""Hartree. Amplitudes need the tight one: an ordinary tolerance leaves errors up to 5e-7 in them."""
DEGENERATE = 1e-5
"""States closer than this (hartree) count as one level; the member nearest to the reference is taken."""
PENALTIES = (0.2, 2.0)
"""Hartree per unit of <S2> too much; the second where a high-spin state lies too deep for the first."""
SPIN_SLACK = 1e-3
SHARED = "{} states share the lowest energy; the one nearest to the reference determinant was taken"
SURVEY_SPACE, POLISH_SPACE = 6, 12
"""Trial vectors of the eigensolver beyond four for every further root."""
VECTORS = 40
"""Vectors of the space's size held at once: trial vectors, their products, states and their residuals."""


class Exact:
    """Full configuration interaction in the active space."""

    name = "exact"
    citation = (
        "P. J. Knowles and N. C. Handy, Chem. Phys. Lett. 111, 315 (1984); J. Olsen, P. Jorgensen and "
        "J. Simons, Chem. Phys. Lett. 169, 463 (1990)"
    )

    def missing(self) -> str:
        """Always there."""
        return ""

    def reach(self, problem: Problem, memory_mb: float) -> str:
        """Beyond reach where there are too many determinants for the time or the memory of a laptop."""
        count = determinants(problem)
        space = f"{problem.alpha + problem.beta} electrons in {problem.size} orbitals"
        if count > MOST_DETERMINANTS:
            return (
                f"{space} have {count:.2g} determinants, more than the {MOST_DETERMINANTS:.2g} that exact "
                "diagonalisation can take"
            )
        needed = 8e-6 * VECTORS * count
        if needed > memory_mb:
            return (
                f"{space} take about {needed:.0f} MB to be solved exactly, and {memory_mb:.0f} MB are there"
            )
        return ""

    def solve(self, problem: Problem, tell: Tell, *, threads: int, memory_mb: float) -> Solved:
        """The lowest state of the multiplicity, its vector converged far enough for amplitudes.

        Spin-unrestricted orbitals: the spin cannot be fixed, so the lowest state with the numbers of alpha
        and beta electrons is taken. Raises PlumbruleError out of reach or where no state has the spin.
        """
        from pyscf import lib

        if beyond := self.reach(problem, memory_mb):
            raise PlumbruleError(beyond)
        with lib.with_omp_threads(threads):
            return _solve(Space(problem, tell, threads, memory_mb))


def determinants(problem: Problem) -> int:
    """How many determinants the space has."""
    return math.comb(problem.size, problem.alpha) * math.comb(problem.size, problem.beta)


class Space:
    """One diagonalisation: the library's solver, the integrals in its form, and the way to tell."""

    def __init__(self, problem: Problem, tell: Tell, threads: int, memory_mb: float) -> None:
        self.problem, self.tell = problem, tell
        self.threads, self.memory_mb = threads, memory_mb
        self.electrons = (problem.alpha, problem.beta)
        self.one: Any = tuple(problem.one) if problem.unrestricted else problem.one
        self.two: Any = tuple(problem.two) if problem.unrestricted else problem.two
        self.shape = tuple(math.comb(problem.size, count) for count in self.electrons)
        self.target = (problem.multiplicity**2 - 1) / 4
        self.steps = 0

    def solver(self, penalty: float) -> Any:
        """A fresh solver; `penalty` (hartree) lifts states of higher spin."""
        from pyscf.fci import addons, direct_spin1, direct_uhf

        # The library's solver for singlets alone refuses vectors that rounding made a little asymmetric.
        made = direct_uhf.FCI() if self.problem.unrestricted else direct_spin1.FCI()
        made.verbose, made.threads, made.max_memory = 0, self.threads, self.memory_mb
        made.pspace_size = 0
        return made if self.problem.unrestricted else addons.fix_spin_(made, shift=penalty, ss=self.target)

    def report(self, state: Mapping[str, Any]) -> None:
        """One iteration of the library's eigensolver; raises Stopped through `tell`."""
        self.steps += 1
        energy, residual = float(np.min(state["e"])), float(np.max(state["dx_norm"]))
        self.tell.iteration(self.steps, energy + self.problem.core_energy, residual, "exact diagonalisation")

    def spin_squared(self, vector: Array) -> float:
        """<S2>; not a number where the overlap of alpha and beta orbitals is unknown."""
        from pyscf.fci import direct_spin1, spin_op

        n, overlap = self.problem.size, self.problem.overlap
        if not self.problem.unrestricted:
            return float(spin_op.spin_square0(vector, n, self.electrons)[0])
        if overlap is None:
            return math.nan
        pairs = direct_spin1.make_rdm12s(vector, n, self.electrons)[1][1]
        projection = (self.electrons[0] - self.electrons[1]) / 2
        flips = self.electrons[1] - np.einsum("rpqs,pq,rs->", pairs, overlap, overlap)
        return float(projection * (projection + 1) + flips)


def _solve(space: Space) -> Solved:
    for penalty in PENALTIES:
        energies, vectors, converged = states(space, penalty)
        kept = [k for k, vector in enumerate(vectors) if right_spin(space, vector)]
        if kept:
            break
    else:
        raise PlumbruleError(
            f"no state of multiplicity {space.problem.multiplicity} was found among the lowest of this "
            "active space; check the multiplicity, or choose other active orbitals"
        )
    energies, vectors = energies[kept], [vectors[k] for k in kept]
    level = [k for k in range(len(kept)) if energies[k] - energies[0] < DEGENERATE]
    vector = _nearest_to_reference([vectors[k] for k in level])
    energy = float(energies[0])
    if math.prod(space.shape) > DENSE:
        energy, vector, converged = _polished(space, penalty, vector)
    notes = (SHARED.format(len(level)),) if len(level) > 1 else ()
    return _described(space, energy + space.problem.core_energy, vector, converged, notes)


def right_spin(space: Space, vector: Array) -> bool:
    """Whether a state has the spin that was asked for; always so where the spin cannot be fixed."""
    return space.problem.unrestricted or abs(space.spin_squared(vector) - space.target) < SPIN_SLACK


def _nearest_to_reference(vectors: list[Array]) -> Array:
    """The member of a degenerate level that holds most of the reference determinant."""
    shares = np.array([vector[0, 0] for vector in vectors])
    if np.linalg.norm(shares) < 1e-8:
        return vectors[0]
    mixed = np.tensordot(shares, np.array(vectors), axes=1)
    return np.asarray(mixed / np.linalg.norm(mixed))


def states(space: Space, penalty: float) -> tuple[Array, list[Array], bool]:
    """The lowest states (energies without the core's), exactly in a small space, loosely in a large one."""
    solver = space.solver(penalty)
    if math.prod(space.shape) <= DENSE:
        energies, vectors = _dense(space, solver)
        space.tell.iteration(1, float(energies[0]) + space.problem.core_energy, 0.0, "exact diagonalisation")
        return energies, vectors, True
    return _davidson(space, solver, _starts(space, solver), roots=SURVEYED)


def _dense(space: Space, solver: Any) -> tuple[Array, list[Array]]:
    two = solver.absorb_h1e(space.one, space.two, space.problem.size, space.electrons, 0.5)
    count = math.prod(space.shape)
    units = np.eye(count).reshape(count, *space.shape)
    matrix = np.array(
        [solver.contract_2e(two, unit, space.problem.size, space.electrons).ravel() for unit in units]
    )
    energies, columns = np.linalg.eigh((matrix + matrix.T) / 2)
    return energies, list(columns.T.reshape(count, *space.shape))


def _starts(space: Space, solver: Any) -> list[Array]:
    """The lowest states among the lowest determinants.

    A single determinant to start from would keep its symmetry to the end, and miss a lower state of another.
    """
    problem = space.problem
    diagonal = solver.make_hdiag(space.one, space.two, problem.size, space.electrons)
    count = math.prod(space.shape)
    places, matrix = solver.pspace(
        space.one, space.two, problem.size, space.electrons, diagonal, min(GUESSED, count // 2)
    )
    starts, noise = [], np.random.default_rng(1)
    for column in np.linalg.eigh(matrix)[1].T[: 2 * SURVEYED]:
        vector = noise.normal(scale=NOISE / math.sqrt(count), size=count)
        vector[places] += column
        starts.append(vector)
    return starts


def _davidson(space: Space, solver: Any, starts: list[Array], roots: int) -> tuple[Array, list[Array], bool]:
    energies, vectors = solver.kernel(
        space.one,
        space.two,
        space.problem.size,
        space.electrons,
        ci0=starts,
        nroots=roots,
        tol=SURVEY_TOLERANCE if roots > 1 else TOLERANCE,
        max_space=SURVEY_SPACE if roots > 1 else POLISH_SPACE,
        max_cycle=200,
        callback=space.report,
    )
    converged = bool(np.all(solver.converged))
    shaped = [np.asarray(vector).reshape(space.shape) for vector in (vectors if roots > 1 else [vectors])]
    return np.atleast_1d(energies), shaped, converged


def _polished(space: Space, penalty: float, start: Array) -> tuple[float, Array, bool]:
    energies, vectors, converged = _davidson(space, space.solver(penalty), [start], roots=1)
    return float(energies[0]), vectors[0], converged


def _described(space: Space, energy: float, vector: Array, converged: bool, notes: tuple[str, ...]) -> Solved:
    from pyscf.fci import cistring, direct_spin1

    problem = space.problem
    alpha, beta = (_strings(cistring, problem.size, count) for count in space.electrons)
    vector = vector / np.linalg.norm(vector)
    wave = Wave(alpha_strings=alpha, beta_strings=beta, vector=vector, size=problem.size)
    entropies, information = profile_of(wave)
    return Solved(
        energy=energy,
        converged=converged,
        densities=np.array(direct_spin1.make_rdm1s(vector, problem.size, space.electrons)),
        entropies=entropies,
        mutual_information=information,
        coefficients=coefficients_of(wave, problem.alpha, problem.beta),
        spin_squared=space.spin_squared(vector),
        leading=leading_of(wave),
        notes=notes,
    )


def _strings(cistring: Any, size: int, electrons: int) -> Strings:
    return np.asarray(cistring.make_strings(range(size), electrons), dtype=np.int64)
