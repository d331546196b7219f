"""Readings and results: what a task measured."""

from typing import Annotated

from pydantic import Field

from plumbrule_core.documents.active_space import GrowthPoint, Space
from plumbrule_core.documents.base import Document, FrozenMap

ReadingValue = bool | float | tuple[float, ...]


class Reading(Document):
    """One measured diagnostic: a number (or a list, as natural occupations), its unit and its source."""

    name: str
    value: ReadingValue
    unit: str = ""


class ArrayRef(Document):
    """An array kept apart from the JSON: `blob` names its bytes."""

    blob: str
    shape: tuple[int, ...]
    dtype: str


class Result(Document):
    """What one task found. Energies in hartree, time in seconds, memory in MB."""

    task: str
    species: str
    rung: str
    basis: str
    level: str
    """The digest of the settings; only equal levels may be subtracted."""
    energy: float
    correlation: float | None = None
    """Energy minus that of the Hartree-Fock reference."""
    converged: bool = True
    iterations: int = 0
    seconds: float
    memory_mb: float
    reference: str
    """RHF, UHF, ROHF (or RKS, UKS)."""
    readings: tuple[Reading, ...] = ()
    unchecked: bool = False
    """The readings could not be taken, so nothing checks the energy."""
    arrays: FrozenMap[str, ArrayRef] = Field(default_factory=dict)
    notes: tuple[str, ...] = ()
    """What happened on the way, for the log and the report: `followed an instability 0.7 kJ/mol down`."""
    used: FrozenMap[str, str] = Field(default_factory=dict)
    """What was really used: guess, frozen orbitals, density fitting basis, threads, library versions."""
    space: Space | None = None
    """The active space that the energy stands on, where there is one."""
    growth: tuple[GrowthPoint, ...] = ()
    """How the energies move as the active space grows, smallest space first."""
    stands_on: FrozenMap[str, float] = Field(default_factory=dict)
    """The energies in hartree that the rungs below had when this was computed, by their names."""

    @property
    def settled(self) -> bool:
        """Whether nothing is left to compute: it converged, and its readings were taken."""
        return self.converged and not self.unchecked

    def reading(self, name: str) -> ReadingValue | None:
        """The value of one reading, or None."""
        for reading in self.readings:
            if reading.name == name:
                return reading.value
        return None


Seq = Annotated[int, Field(ge=0)]
