"""The seam of the active space: orbitals and integrals in; energy, densities, entropies, amplitudes out."""

from dataclasses import dataclass
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True)
class Problem:
    """The electrons of an active space of n spatial orbitals; energies in hartree.

    `one` is (n, n) and `two` (n, n, n, n) in chemists' order for orbitals shared by both spins; for
    spin-unrestricted orbitals `one` is (2, n, n) [alpha, beta] and `two` (3, n, n, n, n) [aa, ab, bb].
    The reference determinant fills the first `alpha` and the first `beta` orbitals. `overlap` (n, n), alpha
    by beta, is what the spin in spin-unrestricted orbitals is read with; without it that spin is NaN.
    """

    one: Array
    two: Array
    alpha: int
    beta: int
    multiplicity: int
    core_energy: float = 0.0
    overlap: Array | None = None

    @property
    def size(self) -> int:
        """The number of spatial orbitals n."""
        return int(self.one.shape[-1])

    @property
    def unrestricted(self) -> bool:
        """Whether the two spins have orbitals of their own."""
        return self.one.ndim == 3


@dataclass(frozen=True, slots=True, kw_only=True)
class Coefficients:
    """Configuration coefficients against the reference determinant, in the library's string-sign convention.

    `c1a` (oa, va), `c1b` (ob, vb), `c2aa` (oa, oa, va, va) and `c2bb` antisymmetric, `c2ab` (oa, ob, va, vb).
    """

    c0: float
    c1a: Array
    c1b: Array
    c2aa: Array
    c2ab: Array
    c2bb: Array


@dataclass(frozen=True, slots=True, kw_only=True)
class Solved:
    """The wave function of an active space, as far as anybody needs it.

    `densities` (2, n, n): alpha and beta one-body density matrices. `entropies` (n,) in [0, ln 4].
    `mutual_information` (n, n): I = s_i + s_j - s_ij, symmetric, zero diagonal, no factor 1/2.
    `leading`: the heaviest determinants as (weight, alpha occupations, beta occupations).
    `extrapolated`: the energy (hartree) carried to the solver's limit where it can tell, else None; and how
    far that may be off.
    """

    energy: float
    converged: bool
    densities: Array
    entropies: Array
    mutual_information: Array
    coefficients: Coefficients
    spin_squared: float
    leading: tuple[tuple[float, tuple[int, ...], tuple[int, ...]], ...] = ()
    notes: tuple[str, ...] = ()
    extrapolated: float | None = None
    extrapolation_error: float | None = None
    narrow_entropies: Array | None = None
    """Entropies at the cheaper of two settings, where the solver went through two."""

    @property
    def reference_weight(self) -> float:
        """The weight of the reference determinant, c0 squared."""
        return self.coefficients.c0**2


class Tell(Protocol):
    """How a solver speaks while it works; every call raises Stopped where the user asked to stop."""

    def iteration(self, n: int, energy: float, residual: float | None = None, stage: str = "") -> None:
        """One iteration or sweep: energy in hartree."""

    def progress(self, fraction: float, what: str = "") -> None:
        """How far a stage without iterations of its own has come, 0 to 1."""

    def note(self, text: str) -> None:
        """A line for people."""


class Solver(Protocol):
    """One way to solve an active space; registered in `correlation.solvers.SOLVERS`."""

    name: str
    citation: str

    def missing(self) -> str:
        """Why this solver cannot be used here, in words; empty where it can."""

    def reach(self, problem: Problem, memory_mb: float) -> str:
        """Why this problem is beyond this solver, in words; empty where it is not."""

    def solve(self, problem: Problem, tell: Tell, *, threads: int, memory_mb: float) -> Solved:
        """Solve for the lowest state of the multiplicity; raises PlumbruleError, or Stopped."""
