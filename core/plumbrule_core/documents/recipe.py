"""A recipe: how to answer a question."""

from typing import Annotated, Literal

from pydantic import BeforeValidator, Field

from plumbrule_core.documents.base import Document

DensityFitting = Literal["auto", "yes", "no"]
Reference = Literal["auto", "RHF", "UHF", "ROHF"]
Core = Literal["frozen", "all"]
Relativity = Literal["none", "X2C"]
Correction = Literal["auto", True, False]
Text = Annotated[str, Field(min_length=1, max_length=80)]


def _one_or_pair(value: object) -> object:
    if isinstance(value, str):
        return (value,)
    if isinstance(value, list | tuple):
        return tuple(value)
    raise ValueError("must be text in quotes, or a list of two to extrapolate")


class ActiveSpace(Document):
    """Which orbitals are active, and how their problem is solved."""

    choice: Literal["propose", "set", "none"] = "propose"
    electrons: Annotated[int, Field(ge=1, le=100)] | None = None
    orbitals: tuple[Annotated[int, Field(ge=1)], ...] | None = None
    count: Annotated[int, Field(ge=1, le=100)] | None = None
    solver: Literal["auto", "exact", "DMRG"] = "auto"
    bond_dimension: Annotated[int, Field(ge=16, le=20000)] = 500
    grow: bool = True


class GeometryLevel(Document):
    """The level at which geometries are optimised first, and whether vibrations follow."""

    method: Text = "B3LYP"
    basis: Text = "def2-SVP"
    vibrations: bool = True


class Corrections(Document):
    """Corrections to the electronic energy difference."""

    zero_point: Correction = "auto"
    counterpoise: Correction = "auto"
    core_valence: Correction = "auto"


class Recipe(Document):
    """How to answer: basis (or a pair to extrapolate), core, reference, rungs, active space, corrections."""

    basis: Annotated[tuple[Text, ...], BeforeValidator(_one_or_pair), Field(min_length=1, max_length=2)] = (
        "cc-pVTZ",
    )
    core: Core = "frozen"
    reference: Reference = "auto"
    rungs: Annotated[tuple[Text, ...], Field(min_length=1, max_length=20)] = ("HF", "MP2", "CCSD", "CCSD(T)")
    density_fitting: DensityFitting = "auto"
    relativity: Relativity = "none"
    active_space: ActiveSpace | None = None
    geometry: GeometryLevel | None = None
    corrections: Corrections = Corrections()

    @property
    def basis_text(self) -> str:
        """`cc-pVTZ`, or `cc-pVTZ to cc-pVQZ, extrapolated`."""
        return self.basis[0] if len(self.basis) == 1 else f"{self.basis[0]} to {self.basis[1]}, extrapolated"
