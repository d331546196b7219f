"""What a rung is: one method on the ladder, with its price, its citation and the numbers that prove it."""

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any, Literal, Protocol

import numpy as np

from plumbrule_core.correlation.profile import Profile
from plumbrule_core.correlation.protocol import Solved
from plumbrule_core.documents.active_space import GrowthPoint, Space, SpaceRequest
from plumbrule_core.documents.plan import Forecast, Machine, TaskSpec

Kind = Literal["wave function", "density functional", "detection"]
"""A detection looks for strong correlation: its energy, of a few orbitals only, is compared with no other."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Size:
    """What the price depends on: counts of atoms, basis functions and correlated orbitals (spatial)."""

    atoms: int
    functions: int
    occupied: int
    """Correlated occupied orbitals of the majority spin."""
    virtual: int
    frozen: int = 0
    unrestricted: bool = False
    density_fitting: bool = False
    active: tuple[int, int, int] | None = None
    """Active orbitals, alpha and beta electrons, where the user set the space; else None."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Published:
    """A value from outside the project that this rung must reproduce; energies in hartree.

    `check` names an entry of the check-value collection, or is empty where `source` alone says it.
    """

    xyz: str
    """Atom lines in angstrom."""
    basis: str
    energy: float
    atol: float
    source: str
    check: str = ""
    charge: int = 0
    multiplicity: int = 1
    core: Literal["frozen", "all"] = "all"
    cartesian: bool = False
    slow: bool = False
    space: SpaceRequest | None = None
    """The active space that the value was published for."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Outcome:
    """What a rung computed: total energy in hartree, and what else is to be kept."""

    energy: float
    reference: str
    """RHF, UHF, ROHF, RKS or UKS."""
    correlation: float | None = None
    converged: bool = True
    iterations: int = 0
    notes: tuple[str, ...] = ()
    used: Mapping[str, str] = field(default_factory=dict)
    arrays: Mapping[str, np.ndarray] = field(default_factory=dict)
    space: Space | None = None
    """The active space that the energy stands on, where there is one."""
    growth: tuple[GrowthPoint, ...] = ()
    """Energies at each size of the growing space, smallest first."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Stability:
    """Whether the Hartree-Fock solution is a minimum, and what lies below a restricted one."""

    internal: bool
    """No lower solution of the same kind starts here (after following)."""
    external: bool | None = None
    """Restricted closed shells alone: no unrestricted solution starts here."""
    depth: float | None = None
    """How far the unrestricted solution lies below the restricted one, in hartree; 0 where none does."""
    natural_occupations: tuple[float, ...] | None = None
    """Natural occupations of the unrestricted solution, largest first; None for ROHF."""


@dataclass(slots=True)
class Bench:
    """Live library objects that the tasks of one chain share inside one worker; never sent anywhere."""

    molecule: Any = None
    mean_field: Any = None
    stability: Stability | None = None
    """Left by the HF rung, so that the readings need not analyse again."""
    correlated_reference: Any = None
    """The mean field that correlation starts from: for ROHF its semicanonical unrestricted form."""
    frozen: int = 0
    """Number of frozen core orbitals."""
    perturbation: Any = None
    """The MP2 object, with its amplitudes."""
    integrals: Any = None
    """Transformed integrals, shared by CISD, CCSD and (T)."""
    configuration_interaction: Any = None
    """The CISD object, with its vector."""
    coupled_cluster: Any = None
    triples: float | None = None
    """The (T) correction in hartree."""
    full_triples: Any = None
    """The CCSDT object, with its amplitudes."""
    optimised: Any = None
    """The CASSCF object, with its orbitals and vector."""
    orbitals: Any = None
    """The orbitals (functions, orbitals) that `space` and `growth_spaces` number from 1, shared by both
    spins; the reference determinant fills the first alpha and the first beta ones. Left by the rung "Active
    space" (`correlation.window`): canonical Hartree-Fock orbitals, or such with the valence virtual ones
    first. The Fock matrix is diagonal only within their blocks, so (T) turns amplitudes to canonical
    orbitals before."""
    space: Space | None = None
    """The chosen active space, in `orbitals`; left by the rung "Active space"."""
    profile: Profile | None = None
    """Entropies and mutual information of the orbitals looked at; left by the rung "Active space"."""
    solved: Solved | None = None
    """The wave function of `space`; None where there is none, or it was not solved again after a stop."""
    growth_spaces: tuple[Space, ...] = ()
    """The sizes to follow, each within the next, smallest first, the chosen one among them or not; empty
    where growth is not asked."""
    tailored: tuple[Any, ...] = ()
    """The tailored solutions (`correlation.tailored.Tailored`), one a size, left by TCCSD for (T)."""
    tailored_bench: "Bench | None" = None
    """A bench of its own for the determinant of `orbitals`, where that is not the reference's."""
    outcomes: dict[str, Outcome] = field(default_factory=dict)


class Shelf(Protocol):
    """Where one task keeps its checkpoints: arrays and a few plain values, replaced as a whole."""

    def load(self) -> Mapping[str, np.ndarray] | None:
        """The last checkpoint, or None where there is none that can be read."""

    def save(self, arrays: Mapping[str, np.ndarray]) -> None:
        """Write beside and rename; never leaves half a checkpoint."""


class Tell(Protocol):
    """How a rung speaks while it computes. Every call raises Stopped where the user asked to stop."""

    def iteration(self, n: int, energy: float, residual: float | None = None, stage: str = "") -> None:
        """One iteration: total energy in hartree, residual norm."""

    def progress(self, fraction: float, what: str = "") -> None:
        """How far a task without iterations has come, 0 to 1."""

    def note(self, text: str) -> None:
        """A line for people, in the task's log."""

    def checkpoint(self, what: str) -> None:
        """Say that the checkpoint just saved is safe."""


@dataclass(slots=True, kw_only=True)
class Given:
    """What a rung is given to compute with."""

    spec: TaskSpec
    bench: Bench
    shelf: Shelf
    threads: int
    memory_mb: float


class Rung(Protocol):
    """One method. PySCF is imported inside `compute` only, so that the window's process never loads it."""

    name: str
    says: str
    """What the card on the Build page says of it, in one short sentence."""
    kind: Kind
    needs: tuple[str, ...]
    """Rungs that must have been computed in the same chain before."""
    rank: int
    """Order of trust within its kind: the answer stands on the highest rank that is not stopped."""
    single_reference: bool
    citation: str
    published: tuple[Published, ...]

    def forecast(self, size: Size, machine: Machine) -> Forecast:
        """Time, memory and disk of this rung alone, once its needs are there."""

    def compute(self, given: Given, tell: Tell) -> Outcome:
        """Compute, carrying on from the shelf where it can; raises PlumbruleError or Stopped."""
