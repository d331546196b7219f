"""The sweeps of DMRG: several starts at a narrow bond dimension, the best of them widened in two steps.

A narrow start can sit in a wrong state with a discarded weight near zero, so the discarded weight proves
nothing: starts from the reference occupation, sharp and softened, must agree, or a third in another order of
the orbitals is made and the lowest taken. The sharp start is led towards the reference at first, so that of
several states of one energy the one nearest to the reference is found, and not a mixture. No point-group
symmetry: with it the wrong states are stickier (own measurement). Order of the orbitals: G. Barcza,
O. Legeza, K. H. Marti and M. Reiher, Phys. Rev. A 83, 012508 (2011).
"""

import importlib
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from plumbrule_core.correlation.protocol import Array

SEED = 7
NARROWEST, NARROW_ENOUGH = 32, 64
"""Bond dimensions of the starts: 64 found the right state everywhere tried (own measurement)."""
SOFTENING = 0.1
LEAD = 1e-3
"""Hartree per electron by which the reference occupation is favoured while a start is led to it."""
DISAGREEMENT = 1e-3
"""Hartree: starts further apart than this are in different states."""
SETTLED = 1e-7
"""Hartree: a last stage whose last sweep moved the energy by less is converged."""
ROUGH, FINE = 1e-6, 1e-14
"""Residual squared of the local eigenproblem with noise and without."""


@dataclass(frozen=True, slots=True)
class Schedule:
    """Noise of each sweep, and the change of the energy (hartree) between sweeps that ends it."""

    noises: tuple[float, ...]
    tolerance: float


NARROW = Schedule((1e-4,) * 3 + (1e-5,) * 3 + (0.0,) * 6, 1e-5)
HARD = Schedule((1e-3,) * 4 + (1e-4,) * 4 + (0.0,) * 6, 1e-5)
QUIET = Schedule((0.0,) * 6, 1e-5)
WIDER = Schedule((1e-5,) * 2 + (0.0,) * 4, 1e-6)
WIDEST = Schedule((1e-5,) * 2 + (0.0,) * 10, 1e-9)


@dataclass(frozen=True, slots=True)
class Operator:
    """The Hamiltonian on a chain of sites: site k holds orbital `order[k]`."""

    mpo: Any
    order: NDArray[np.int64]


@dataclass(frozen=True, slots=True)
class Stage:
    """The end of one stage: the state, its bond dimension, energy (hartree) and discarded weight."""

    ket: Any
    operator: Operator
    bond: int
    energy: float = 0.0
    weight: float = 0.0
    settled: bool = False


@dataclass(frozen=True, slots=True)
class Found:
    """All stages that led to the last state, narrow to wide, and what people should know of them."""

    stages: tuple[Stage, ...]
    notes: tuple[str, ...]


def library() -> Any:
    """The engine's Python side; an optional extra, so never imported at the top."""
    return importlib.import_module("pyblock2.driver.core")


class Sweeps:
    """One job's driver, its integrals and the way to speak."""

    def __init__(
        self,
        job: Mapping[str, Any],
        one: Array,
        two: Array,
        scratch: Path,
        say: Callable[..., None],
    ) -> None:
        self.one, self.two, self.say = one, two, say
        self.alpha, self.beta = int(job["alpha"]), int(job["beta"])
        self.multiplicity, self.bond = int(job["multiplicity"]), int(job["bond_dimension"])
        self.core_energy = float(job["core_energy"])
        self.size, self.unrestricted = int(one.shape[-1]), one.ndim == 3
        self.filled = (np.arange(self.size) < self.alpha) * 1.0 + (np.arange(self.size) < self.beta)
        self.driver = library().DMRGDriver(
            scratch=str(scratch),
            symm_type=getattr(library().SymmetryTypes, "SZ" if self.unrestricted else "SU2"),
            n_threads=int(job["threads"]),
            stack_mem=int(job["memory_mb"] * 2**20),
        )
        self.driver.bw.b.Random.rand_seed(SEED)
        spin = self.alpha - self.beta if self.unrestricted else self.multiplicity - 1
        self.driver.initialize_system(n_sites=self.size, n_elec=self.alpha + self.beta, spin=spin)
        self.driver.set_callback(self._at_site)
        self._states = self._said = 0
        self._stage = ""

    def run(self) -> Found:
        """All starts and stages."""
        narrow = min(self.bond, max(NARROWEST, min(NARROW_ENOUGH, self.bond // 2)))
        best, notes = self._best_start(narrow)
        stages = [best]
        for bond in sorted({max(narrow, self.bond // 2), self.bond}):
            ket = self.driver.copy_mps(stages[-1].ket, tag=self._next_name())
            schedule = WIDEST if bond == self.bond else WIDER
            stages.append(self._optimised(ket, best.operator, bond, schedule, f"bond dimension {bond}"))
        return Found(tuple(stages), tuple(notes))

    def _best_start(self, bond: int) -> tuple[Stage, list[str]]:
        order = np.asarray(self.driver.orbital_reordering(self.one, self.two), dtype=np.int64)
        operator = self._operator(order)
        led = self._start(self._operator(order, LEAD), bond, 0.0, NARROW, "first start, led")
        led = self._optimised(led.ket, operator, bond, QUIET, "first start")
        free = self._start(operator, bond, SOFTENING, NARROW, "second start")
        apart = abs(led.energy - free.energy)
        if apart < DISAGREEMENT:
            return led, []
        plain = self._operator(np.arange(self.size))
        third = self._start(plain, bond, SOFTENING, HARD, "third start")
        return min((led, free, third), key=lambda start: start.energy), [
            f"DMRG from two starts ended {1000 * apart:.1f} millihartree apart; the lowest of three was taken"
        ]

    def _operator(self, order: NDArray[np.int64], lead: float = 0.0) -> Operator:
        one = self.one + lead * np.diag(1 - self.filled)
        one = one[..., order[:, None], order]
        two = self.two[..., order[:, None, None, None], order[:, None, None], order[:, None], order]
        mpo = self.driver.get_qc_mpo(
            h1e=tuple(one) if self.unrestricted else one,
            g2e=tuple(two) if self.unrestricted else two,
            ecore=self.core_energy,
            iprint=0,
        )
        return Operator(mpo, order)

    def _start(
        self, operator: Operator, bond: int, softening: float, schedule: Schedule, stage: str
    ) -> Stage:
        soft = self.filled + softening * (1 - self.filled)
        occupations = [float(x) for x in soft[operator.order]]
        ket = self.driver.get_random_mps(self._next_name(), bond_dim=bond, nroots=1, occs=occupations)
        return self._optimised(ket, operator, bond, schedule, stage)

    def _next_name(self) -> str:
        self._states += 1
        return f"STATE{self._states}"

    def _optimised(self, ket: Any, operator: Operator, bond: int, schedule: Schedule, stage: str) -> Stage:
        self._stage, self._said = stage, 0
        sweeps = len(schedule.noises)
        self.driver.dmrg(
            operator.mpo,
            ket,
            n_sweeps=sweeps,
            tol=schedule.tolerance,
            bond_dims=[bond] * sweeps,
            noises=list(schedule.noises),
            thrds=[ROUGH if noise else FINE for noise in schedule.noises],
            iprint=0,
        )
        self._say_sweeps()
        _, weights, energies = self.driver.get_dmrg_results()
        steps = np.abs(np.diff(energies[:, 0]))
        return Stage(
            ket=ket,
            operator=operator,
            bond=bond,
            energy=float(energies[-1, 0]),
            weight=float(weights[-1]),
            settled=bool(len(steps) and steps[-1] < SETTLED),
        )

    def _at_site(self, name: str, _: int) -> None:
        """The engine calls this at every site."""
        if name == "DMRG::sweep::iter.start":
            self._say_sweeps()
            self.say("site", stage=self._stage)

    def _say_sweeps(self) -> None:
        energies = [float(found[0]) for found in self.driver._dmrg.energies]
        for sweep in range(self._said, len(energies)):
            change = abs(energies[sweep] - energies[sweep - 1]) if sweep else None
            self.say("sweep", energy=energies[sweep], change=change, stage=self._stage)
        self._said = len(energies)
