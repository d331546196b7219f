"""The molecules and spaces that tailored coupled cluster is checked on; each rung's file holds its energies.

No published table with these numbers could be reached. They were computed twice outside this program: by
spatial RCCSD with the active amplitudes set back after every update, and by spin-orbital CCSD with the same
amplitudes held, which agree to 1e-7 hartree (PySCF 2.14.0).
"""

from dataclasses import replace

from plumbrule_core.documents.active_space import SpaceRequest
from plumbrule_core.rungs.protocol import Published
from plumbrule_core.rungs.published_systems import OWN, WATER_OLSEN, WATER_STRETCHED, System, from_bohr

_SYSTEMS = (
    System(xyz="Li 0 0 0\nLi 0 0 1.0", basis="STO-3G", source=OWN, check="T02", atol=1e-8),
    System(
        xyz=from_bohr("N 0 0 0; N 0 0 2.118"),
        basis="cc-pVDZ",
        source=OWN,
        check="T09",
        atol=2e-6,
        core="frozen",
    ),
    replace(WATER_OLSEN, source=OWN, check="T11"),
    replace(WATER_STRETCHED, source=OWN, check="T12"),
    System(xyz="H 0 0 0\nF 0 0 1.1", basis="cc-pVDZ", source=OWN, check="T13", atol=1e-7),
)
_ORBITALS = {
    "T02": range(1, 11),
    "T09": range(5, 11),
    "T11": range(3, 8),
    "T12": range(3, 8),
    "T13": range(3, 9),
}


def tailored_value(check: str, energy: float) -> Published:
    """The published total energy, in hartree, in the canonical orbitals of this check's space."""
    system = next(system for system in _SYSTEMS if system.check == check)
    space = SpaceRequest(choice="set", orbitals=tuple(_ORBITALS[check]), orbital_set="canonical", grow=False)
    return replace(system.gives(energy), space=space)
