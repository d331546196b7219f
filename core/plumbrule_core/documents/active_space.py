"""Active spaces: what is asked for, what was chosen and why, and how an answer moves as the space grows."""

from typing import Annotated, Literal

from pydantic import Field

from plumbrule_core.documents.base import Document, FrozenMap

OrbitalNumber = Annotated[int, Field(ge=1)]


class SpaceRequest(Document):
    """How a task is to get its active space. Part of the task's identity."""

    choice: Literal["propose", "set"] = "propose"
    electrons: Annotated[int, Field(ge=1, le=100)] | None = None
    orbitals: tuple[OrbitalNumber, ...] | None = None
    count: Annotated[int, Field(ge=1, le=100)] | None = None
    orbital_set: Literal["auto", "canonical", "valence"] = "auto"
    """Which orbitals are numbered: canonical Hartree-Fock ones, or such with the valence virtual ones first.
    auto: canonical where the space is set, valence where it is proposed."""
    solver: Literal["auto", "exact", "DMRG"] = "auto"
    bond_dimension: int = 500
    grow: bool = True
    partners: tuple[str, ...] = ()
    """Contents of the other species that must have a space of the same size."""


class Space(Document):
    """A chosen active space: orbitals numbered from 1, occupied ones first, each block by its energies.

    No electrons and no orbitals where one determinant describes the molecule.
    """

    electrons: Annotated[int, Field(ge=0)]
    orbitals: tuple[OrbitalNumber, ...]
    why: str = ""

    @property
    def label(self) -> str:
        """`(6,6)`: electrons, orbitals."""
        return f"({self.electrons},{len(self.orbitals)})"


class GrowthPoint(Document):
    """Energies in hartree at one size of the growing space."""

    electrons: int
    orbitals: tuple[OrbitalNumber, ...]
    energies: FrozenMap[str, float]
    c0_squared: float
