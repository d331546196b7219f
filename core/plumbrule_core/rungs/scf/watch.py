"""What looks on while the field converges: keeps orbitals, tells iterations, labels failures."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any, Literal

import numpy as np

from plumbrule_core.rungs.protocol import Shelf, Tell

Course = Literal["oscillating", "drifting", "slow"]
LOOK_BACK = 12


@dataclass(slots=True)
class Watch:
    """A callback for PySCF: saves each iteration's orbitals, then tells it (which may raise Stopped)."""

    shelf: Shelf
    tell: Tell
    stage: str = ""
    iterations: int = 0
    energies: list[float] = field(default_factory=list)
    best: tuple[float, Any, Any] | None = None
    """The lowest energy seen, with its orbitals and occupations."""
    _last: tuple[str, int] = ("", -1)

    def __call__(self, state: Mapping[str, Any]) -> None:
        """One iteration; `state` is PySCF's."""
        cycle = (self.stage, int(state.get("imacro", state.get("cycle", 0))))
        if cycle == self._last:
            return
        self._last = cycle
        self.iterations += 1
        energy, orbitals, occupations = float(state["e_tot"]), state["mo_coeff"], state["mo_occ"]
        self.energies.append(energy)
        if self.best is None or energy < self.best[0]:
            self.best = (energy, orbitals, occupations)
        self.shelf.save(
            {
                "orbitals": np.asarray(orbitals),
                "occupations": np.asarray(occupations),
                "stage": np.array(self.stage),
                "iterations": np.array(self.iterations),
            }
        )
        self.tell.iteration(self.iterations, energy, float(state["norm_gorb"]), self.stage)

    def begin(self, stage: str) -> None:
        """A new stage: its name goes with every iteration that follows."""
        self.stage, self._last, self.best = stage, ("", -1), None
        self.energies.clear()


def course_of(energies: Sequence[float]) -> Course:
    """How a run that did not converge behaved at its end.

    Oscillating: most steps turn back on the one before. Drifting: the energy keeps moving one way, no slower
    than at first. Slow: the steps shrink, but too few were allowed.
    """
    steps = np.diff(np.asarray(energies[-LOOK_BACK:], dtype=float))
    if len(steps) < 3:
        return "slow"
    turns = np.count_nonzero(steps[1:] * steps[:-1] < 0)
    if turns > len(steps) / 2:
        return "oscillating"
    half = len(steps) // 2
    return "slow" if np.abs(steps[half:]).mean() < 0.7 * np.abs(steps[:half]).mean() else "drifting"
