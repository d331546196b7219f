"""Tailored CCSD in one active space after the other, each starting from the amplitudes of the one before.

Every iteration is checkpointed together with the space, its active amplitudes and all finished sizes, so that
a run that is carried on solves no active space again whose iterations had begun, and repeats no iteration.
"""

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from plumbrule_core.correlation.amplitudes import SHAKY_WEIGHT, cluster_amplitudes
from plumbrule_core.correlation.integrals import problem_from
from plumbrule_core.correlation.protocol import Array, Problem, Solved
from plumbrule_core.correlation.solvers import choose
from plumbrule_core.correlation.tailored import Tailored, hold
from plumbrule_core.documents.active_space import Space, SpaceRequest
from plumbrule_core.errors import PlumbruleError
from plumbrule_core.rungs.correlated.iterations import iterate
from plumbrule_core.rungs.correlated.reference import correlated_reference, fitting_of, is_unrestricted
from plumbrule_core.rungs.correlated.solvers import coupled_cluster, integrals
from plumbrule_core.rungs.correlated.tailored_frame import Frame
from plumbrule_core.rungs.correlated.tailored_shelf import (
    ActiveState,
    Staged,
    TailoredShelf,
    finished_sizes,
    running_size,
)
from plumbrule_core.rungs.protocol import Given, Tell


@dataclass(slots=True, kw_only=True)
class Series:
    """The sizes of one task, in the order in which they are computed."""

    given: Given
    frame: Frame
    tell: Tell
    chosen: Space
    finished: list[Tailored]
    notes: list[str]

    def follow(self, spaces: Sequence[Space]) -> tuple[Tailored, ...]:
        """Every size that can be solved; raises PlumbruleError where the chosen one cannot, and Stopped."""
        stored = self.given.shelf.load()
        known = {size.space.orbitals: size for size in finished_sizes(stored, self.frame)}
        for space in spaces:
            try:
                size = known.get(space.orbitals) or self._tailored(space, stored)
            except PlumbruleError as error:
                if space == self.chosen:
                    raise
                self.notes.append(f"the space {space.label} was left out: {error}")
                continue
            if size.note:
                self.notes.append(size.note)
            self.finished.append(replace(size, space=space))
        return tuple(self.finished)

    def _tailored(self, space: Space, stored: Any) -> Tailored:
        running = running_size(stored, space, self.frame)
        if running is None:
            state, start = self._active_state(space), None
        else:
            state, start = running
            done = int(start["iterations"])
            self.notes.append(f"carried on from iteration {done} in the space {space.label}")
            self.tell.note(self.notes[-1])
        if not state.amplitudes:
            return self._left_out(space, state)
        try:
            return self._iterated(space, state, start)
        except PlumbruleError as error:
            if space == self.chosen:
                raise
            return self._left_out(space, replace(state, note=f"no TCCSD in the space {space.label}: {error}"))

    def _iterated(self, space: Space, state: ActiveState, start: Any) -> Tailored:
        given, seats = self.frame.given, self.frame.seats(space)
        solver, transformed = coupled_cluster(given), integrals(given)
        hold(solver, seats, state.amplitudes)
        if start is None:
            singles, doubles = self._start(solver, transformed)
            seats.impose(singles, doubles, state.amplitudes)
            start = _fresh(solver.amplitudes_to_vector(singles, doubles))
        shelf = TailoredShelf(self.given.shelf, self.frame, tuple(self.finished), space, state)
        done = iterate(
            replace(given, shelf=shelf), Staged(self.tell, space.label), solver, transformed, start
        )
        said = [state.note] if state.note else []
        if not solver.converged:
            said.append(f"TCCSD did not converge in {done.done} iterations in the space {space.label}")
        return Tailored(
            space=space,
            seats=seats,
            active_energy=state.energy,
            c0_squared=state.c0_squared,
            energy=float(solver.e_hf + solver.e_corr),
            vector=solver.amplitudes_to_vector(solver.t1, solver.t2),
            converged=bool(solver.converged) and state.converged,
            iterations=done.done,
            note="; ".join(said),
        )

    def _left_out(self, space: Space, state: ActiveState) -> Tailored:
        return Tailored(
            space=space,
            seats=self.frame.seats(space),
            active_energy=state.energy,
            c0_squared=state.c0_squared,
            energy=None,
            vector=np.zeros(0),
            converged=False,
            iterations=0,
            note=state.note,
        )

    def _start(self, solver: Any, transformed: Any) -> tuple[Any, Any]:
        """Amplitudes to start from: the size before, CCSD where it is on the bench, or MP2."""
        before = next((size.vector for size in reversed(self.finished) if size.vector.size), None)
        if before is not None:
            return solver.vector_to_amplitudes(np.array(before))
        plain = self.frame.given.bench.coupled_cluster
        if plain is not None and plain.converged and np.array_equal(plain.mo_coeff, solver.mo_coeff):
            return solver.vector_to_amplitudes(solver.amplitudes_to_vector(plain.t1, plain.t2))
        return solver.init_amps(transformed)[1:]

    def _active_state(self, space: Space) -> ActiveState:
        """Energy and amplitudes of the active space; no amplitudes, and a note, where c0 is too small.

        Raises PlumbruleError where that happens in the chosen space.
        """
        if not self.frame.seats(space).open:
            return self._one_determinant()
        solved = self._solved(space)
        try:
            amplitudes = cluster_amplitudes(solved.coefficients, solved.leading)
            restricted = not is_unrestricted(correlated_reference(self.frame.given.bench))
            targets = amplitudes.restricted if restricted else sum(amplitudes.unrestricted, ())
            note = _caution(space, solved)
        except PlumbruleError as error:
            named = f"active space {space.label}, orbitals {', '.join(map(str, sorted(space.orbitals)))}"
            if space == self.chosen:
                raise PlumbruleError(f"{self.given.spec.species.name}, {named}: {error}") from error
            targets, note = (), f"no TCCSD in the {named}: {error}"
        return ActiveState(
            energy=solved.energy,
            c0_squared=solved.reference_weight,
            converged=solved.converged,
            amplitudes=targets,
            note=note,
        )

    def _one_determinant(self) -> ActiveState:
        """A space that holds the reference determinant alone: nothing is put in, TCCSD is CCSD."""
        solver = coupled_cluster(self.frame.given)
        unrestricted = is_unrestricted(correlated_reference(self.frame.given.bench))
        return ActiveState(
            energy=float(solver.get_e_hf()),
            c0_squared=1.0,
            converged=True,
            amplitudes=(np.zeros(0),) * (5 if unrestricted else 2),
        )

    def _solved(self, space: Space) -> Solved:
        bench = self.given.bench
        if bench.solved is not None and space == bench.space:
            return bench.solved
        problem = _problem(self.frame, space)
        self.tell.note(f"solving the active space {space.label}")
        asked = self.given.spec.space or SpaceRequest()
        return choose(asked.solver, problem, self.given.memory_mb, asked.bond_dimension).solve(
            problem,
            Staged(self.tell, f"active space {space.label}"),
            threads=self.given.threads,
            memory_mb=self.given.memory_mb,
        )


def _fresh(vector: Array) -> dict[str, np.ndarray]:
    """A checkpoint that has seen no iteration."""
    none = np.zeros((0, vector.size), dtype=np.float32)
    return {"amplitudes": vector, "vectors": none, "errors": none, "iterations": np.array(0)}


def _problem(frame: Frame, space: Space) -> Problem:
    given = frame.given
    return problem_from(
        given.bench.mean_field,
        frame.numbered[0] if frame.shared else frame.numbered,
        frame.core(space),
        [number - 1 for number in sorted(space.orbitals)],
        given.spec.species.multiplicity,
        fitting_of(given) if given.spec.settings.density_fitting else None,
    )


def _caution(space: Space, solved: Solved) -> str:
    said = []
    if not solved.converged:
        said.append(f"the wave function of the space {space.label} did not converge")
    if solved.reference_weight < SHAKY_WEIGHT:
        said.append(
            f"the reference determinant makes up only {100 * solved.reference_weight:.0f} % in the space "
            f"{space.label}: the tailored energy hangs on how tightly the space was solved"
        )
    return "; ".join(said)
