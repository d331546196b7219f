"""What the tests of tailored rungs share: one species on a bench, with a space and a plain field."""

from collections.abc import Callable
from dataclasses import dataclass, field
from typing import Any

import numpy as np
import pytest

from plumbrule_core.documents.active_space import Space, SpaceRequest
from plumbrule_core.documents.plan import TaskSpec
from plumbrule_core.rungs import RUNGS
from plumbrule_core.rungs.active_space import ActiveSpace
from plumbrule_core.rungs.hartree_fock import core_orbitals
from plumbrule_core.rungs.molecule import empty_mean_field
from plumbrule_core.rungs.protocol import Bench, Given, Outcome
from plumbrule_core.rungs.published_systems import WATER_STRETCHED
from plumbrule_core.rungs.tccsd import TCCSD
from plumbrule_core.rungs.tccsd_t import TCCSDT

TIGHT = {"cc_tolerance": 1e-10, "cc_residual": 1e-8}
RUNG = {rung.name: rung for rung in (ActiveSpace(), TCCSD(), TCCSDT())}


class KeptShelf:
    """Keeps copies, as a file would."""

    def __init__(self) -> None:
        self.kept: dict[str, np.ndarray] | None = None

    def load(self) -> dict[str, np.ndarray] | None:
        return None if self.kept is None else {name: array.copy() for name, array in self.kept.items()}

    def save(self, arrays: Any) -> None:
        self.kept = {name: np.array(array) for name, array in arrays.items()}


@dataclass
class Scene:
    """One species on a bench, with a plain field: no instability is followed away from the check values."""

    make_task: Callable[..., TaskSpec]
    ear: Any
    xyz: str
    settings: dict[str, Any]
    guess: str = "minao"
    bench: Bench = field(default_factory=Bench)
    shelves: dict[str, KeptShelf] = field(default_factory=dict)
    ears: dict[str, Any] = field(default_factory=dict)
    request: SpaceRequest | None = None

    def __post_init__(self) -> None:
        spec = self.spec("HF")
        field = empty_mean_field(self.given(spec))
        field.conv_tol, field.init_guess = 1e-12, self.guess
        field.kernel()
        self.bench.mean_field, self.bench.frozen = field, core_orbitals(spec, field)

    def given(self, spec: TaskSpec) -> Given:
        shelf = self.shelves.setdefault(spec.rung, KeptShelf())
        return Given(spec=spec, bench=self.bench, shelf=shelf, threads=1, memory_mb=2000)

    def spec(self, rung: str) -> TaskSpec:
        return self.make_task(self.xyz, rung, **self.settings).model_copy(update={"space": self.request})

    def compute(self, rung: str, stop_at: int | None = None, stage: str = "") -> Outcome:
        self.ears[rung] = self.ear(stop_at=stop_at, stop_stage=stage)
        return (RUNG.get(rung) or RUNGS[rung]).compute(self.given(self.spec(rung)), self.ears[rung])

    def choose(self, *orbitals: int, following: tuple[tuple[int, ...], ...] = ()) -> "Scene":
        self.bench.space = self.space(orbitals)
        self.bench.growth_spaces = tuple(self.space(numbers) for numbers in following)
        return self

    def space(self, orbitals: tuple[int, ...]) -> Space:
        alpha, beta = self.bench.molecule.nelec
        electrons = sum((n <= alpha) + (n <= beta) for n in orbitals)
        return Space(electrons=electrons, orbitals=orbitals)

    @property
    def everything(self) -> tuple[int, ...]:
        count = np.shape(self.bench.mean_field.mo_coeff)[-1]
        return tuple(range(self.bench.frozen + 1, count + 1))


@pytest.fixture
def scene(make_task, ear):
    """`scene(xyz, basis=...)`: all electrons correlated, tight, unless said otherwise."""

    def make(xyz: str, kind: str = "RHF", guess: str = "minao", **settings: Any) -> Scene:
        chosen = {"core": "all", "reference": kind, **TIGHT, **settings}
        return Scene(make_task=make_task, ear=ear, xyz=xyz, settings=chosen, guess=guess)

    return make


@pytest.fixture
def stretched_water(scene) -> Callable[..., Scene]:
    """Water with both bonds at twice their length, in a small basis."""
    return lambda **settings: scene(WATER_STRETCHED.xyz, basis="6-31G", **settings)


@pytest.fixture
def turned() -> Callable[..., np.ndarray]:
    """`turned(orbitals, columns)`: these columns rotated among themselves, by an angle where two."""
    from scipy.linalg import expm

    def make(orbitals: np.ndarray, block: list[int], angle: float | None = None) -> np.ndarray:
        random = np.random.default_rng(7).normal(size=(len(block), len(block)))
        generator = random - random.T if angle is None else np.array([[0, angle], [-angle, 0]])
        result = orbitals.copy()
        result[:, block] = orbitals[:, block] @ expm(generator)
        return result

    return make
