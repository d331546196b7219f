"""The nitrogen molecule of CASSCF and NEVPT2 values: (6,6) in the two sigma and four pi valence orbitals."""

from dataclasses import replace

from plumbrule_core.documents.active_space import SpaceRequest
from plumbrule_core.rungs.protocol import Published
from plumbrule_core.rungs.published_systems import OWN, System


def nitrogen_value(distance: str, energy: float, check: str, atol: float) -> Published:
    """The total energy, in hartree, of N2/cc-pVDZ with every electron correlated; `distance` in angstrom."""
    system = System(xyz=f"N 0 0 0\nN 0 0 {distance}", basis="cc-pVDZ", source=OWN, check=check, atol=atol)
    space = SpaceRequest(choice="set", orbitals=tuple(range(5, 11)), orbital_set="valence", grow=False)
    return replace(system.gives(energy), space=space)
