"""Checkpoints of a series of tailored calculations: the amplitudes on their way, and what they belong to."""

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from plumbrule_core.correlation.protocol import Array
from plumbrule_core.correlation.tailored import Tailored
from plumbrule_core.documents.active_space import Space
from plumbrule_core.rungs.correlated.reference import correlated_reference
from plumbrule_core.rungs.correlated.tailored_frame import Frame
from plumbrule_core.rungs.protocol import Shelf, Tell

SAME_ORBITALS = 1e-7
"""Largest change of an orbital coefficient with which stored amplitudes still belong to the orbitals."""
RUNNING = {"amplitudes", "vectors", "errors", "iterations", "running", "running_facts", "running_note"}


@dataclass(frozen=True, slots=True, kw_only=True)
class ActiveState:
    """What coupled cluster needs of an active space: total energy in hartree, weight, and amplitudes.

    `amplitudes` are t1 and t2, or t1 of alpha and beta and t2 of aa, ab and bb; none where the reference
    weighs too little, as `note` says.
    """

    energy: float
    c0_squared: float
    converged: bool
    amplitudes: tuple[Array, ...]
    note: str = ""


@dataclass(frozen=True, slots=True)
class TailoredShelf:
    """A shelf that adds to each checkpoint the space, its state, and the sizes that are finished."""

    shelf: Shelf
    frame: Frame
    finished: tuple[Tailored, ...]
    space: Space
    state: ActiveState

    def load(self) -> Mapping[str, np.ndarray] | None:
        """The whole checkpoint."""
        return self.shelf.load()

    def save(self, arrays: Mapping[str, np.ndarray]) -> None:
        """The whole checkpoint, with these amplitudes of the size that is running."""
        kept = {
            **arrays,
            "numbered": self.frame.numbered,
            "running": _numbers(self.space),
            "running_facts": np.array([self.state.energy, self.state.c0_squared, self.state.converged]),
            "running_note": np.array([self.state.note]),
            "finished": np.array(len(self.finished)),
        }
        for place, block in enumerate(self.state.amplitudes):
            kept[f"active_{place}"] = block
        for place, size in enumerate(self.finished):
            kept.update(_kept(place, size))
        self.shelf.save(kept)


@dataclass(frozen=True, slots=True)
class Staged:
    """Tells of iterations with the space that they belong to."""

    tell: Tell
    stage: str

    def iteration(self, n: int, energy: float, residual: float | None = None, stage: str = "") -> None:
        """One iteration; raises Stopped where asked to."""
        self.tell.iteration(n, energy, residual, f"{self.stage}: {stage}" if stage else self.stage)

    def progress(self, fraction: float, what: str = "") -> None:
        """How far it has come."""
        self.tell.progress(fraction, what)

    def note(self, text: str) -> None:
        """A line for people."""
        self.tell.note(text)

    def checkpoint(self, what: str) -> None:
        """The checkpoint is safe."""
        self.tell.checkpoint(what)


def finished_sizes(stored: Mapping[str, np.ndarray] | None, frame: Frame) -> tuple[Tailored, ...]:
    """The finished sizes of a checkpoint; none where it is of other orbitals."""
    if stored is None or not _of_these_orbitals(stored, frame):
        return ()
    return tuple(_restored(stored, place, frame) for place in range(int(stored["finished"])))


def running_size(
    stored: Mapping[str, np.ndarray] | None, space: Space, frame: Frame
) -> tuple[ActiveState, Mapping[str, np.ndarray]] | None:
    """State and amplitudes of the size that was running, where it is this one, in these orbitals."""
    if stored is None or not stored.keys() >= RUNNING or not _of_these_orbitals(stored, frame):
        return None
    if not np.array_equal(stored["running"], _numbers(space)):
        return None
    energy, weight, converged = (float(x) for x in stored["running_facts"])
    blocks = sum(name.startswith("active_") for name in stored)
    state = ActiveState(
        energy=energy,
        c0_squared=weight,
        converged=bool(converged),
        amplitudes=tuple(stored[f"active_{place}"] for place in range(blocks)),
        note=str(stored["running_note"][0]),
    )
    return state, stored


def _of_these_orbitals(stored: Mapping[str, np.ndarray], frame: Frame) -> bool:
    present = {
        "orbitals": np.asarray(correlated_reference(frame.given.bench).mo_coeff),
        "numbered": frame.numbered,
    }
    return all(
        name in stored
        and stored[name].shape == array.shape
        and bool(np.allclose(stored[name], array, rtol=0, atol=SAME_ORBITALS))
        for name, array in present.items()
    )


def _kept(place: int, size: Tailored) -> dict[str, np.ndarray]:
    energy = np.nan if size.energy is None else size.energy
    facts = [size.active_energy, size.c0_squared, energy, size.converged, size.iterations]
    return {
        f"finished_{place}": _numbers(size.space),
        f"finished_{place}_facts": np.array(facts, dtype=float),
        f"finished_{place}_amplitudes": size.vector,
        f"finished_{place}_words": np.array([size.space.why, size.note]),
    }


def _restored(stored: Mapping[str, np.ndarray], place: int, frame: Frame) -> Tailored:
    electrons, *orbitals = (int(number) for number in stored[f"finished_{place}"])
    why, note = (str(word) for word in stored[f"finished_{place}_words"])
    space = Space(electrons=electrons, orbitals=tuple(orbitals), why=why)
    active, weight, energy, converged, iterations = (float(x) for x in stored[f"finished_{place}_facts"])
    return Tailored(
        space=space,
        seats=frame.seats(space),
        active_energy=active,
        c0_squared=weight,
        energy=None if np.isnan(energy) else energy,
        vector=stored[f"finished_{place}_amplitudes"],
        converged=bool(converged),
        iterations=int(iterations),
        note=note,
    )


def _numbers(space: Space) -> np.ndarray:
    return np.array([space.electrons, *space.orbitals])
