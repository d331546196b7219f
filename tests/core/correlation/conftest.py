"""Small molecules in small active spaces, and a listener, for the tests of strong correlation."""

import time
from dataclasses import dataclass, field
from typing import Any

import pytest

from plumbrule_core.correlation.integrals import problem_from
from plumbrule_core.correlation.protocol import Problem
from plumbrule_core.errors import Stopped


@dataclass
class Listener:
    """Hears what a solver says; raises Stopped after so many iterations, where asked to."""

    stop_after: int | None = None
    energies: list[float] = field(default_factory=list)
    notes: list[str] = field(default_factory=list)
    asked_at: float | None = None
    """When the wish to stop arose, by the monotonic clock."""

    def iteration(self, n: int, energy: float, residual: float | None = None, stage: str = "") -> None:
        self.energies.append(energy)
        self._go_on()

    def progress(self, fraction: float, what: str = "") -> None:
        self._go_on()

    def note(self, text: str) -> None:
        self.notes.append(text)
        self._go_on()

    def _go_on(self) -> None:
        if self.stop_after is None or len(self.energies) < self.stop_after:
            return
        self.asked_at = self.asked_at or time.monotonic()
        raise Stopped


@pytest.fixture
def listener() -> Listener:
    return Listener()


@pytest.fixture(scope="session")
def field_of() -> Any:
    """(atoms, basis, ...) -> a converged mean field; each is computed once."""
    from pyscf import gto, scf

    known: dict[Any, Any] = {}

    def make(atoms: str, basis: str, kind: str = "RHF", spin: int = 0, unit: str = "angstrom") -> Any:
        key = (atoms, basis, kind, spin, unit)
        if key not in known:
            molecule = gto.M(atom=atoms, basis=basis, spin=spin, unit=unit, verbose=0)
            known[key] = getattr(scf, kind)(molecule).run(conv_tol=1e-12)
        return known[key]

    return make


@pytest.fixture(scope="session")
def space_of(field_of: Any) -> Any:
    """(core, active, multiplicity, atoms, basis, ...) -> the problem in the field's own orbitals."""

    def make(core: int, active: int, multiplicity: int, *molecule: Any, **options: Any) -> Problem:
        field = field_of(*molecule, **options)
        columns = range(core, core + active)
        return problem_from(field, field.mo_coeff, range(core), columns, multiplicity)

    return make
