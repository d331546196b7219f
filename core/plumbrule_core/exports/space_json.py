"""What is known of a species' active space, as plain JSON values."""

from typing import Any

import numpy as np

from plumbrule_core.documents.results import Result
from plumbrule_core.documents.species import Species
from plumbrule_core.errors import PlumbruleError
from plumbrule_core.exports.facts import results_of
from plumbrule_core.exports.record import Record
from plumbrule_core.rungs import SPACE

PROFILE = {
    "numbers": "window",
    "energies": "window_energies",
    "occupations": "window_occupations",
    "entropy": "entropies",
}
"""What is told of each orbital that was looked at: hartree, electrons, nat."""


def space_data(record: Record, species: Species) -> dict[str, Any]:
    """The chosen space, how the energies grow with it, and the orbitals that were looked at with their
    entropies and mutual information (all in the order of `numbers`); empty where no space was looked for.

    From the largest basis. Energies in hartree.
    """
    found = {task.spec.rung: result for task, result in results_of(record, species)}
    looked_at = found.get(SPACE)
    if looked_at is None:
        return {}
    told: dict[str, Any] = {}
    if looked_at.space is not None:
        told["active_space"] = looked_at.space.to_data()
    growth = next((found[name].growth for name in ("TCCSD(T)", "TCCSD") if name in found), ())
    if growth:
        told["growth"] = [point.to_data() for point in growth]
    arrays = {key: array_of(record, looked_at, name) for key, name in PROFILE.items()}
    information = array_of(record, looked_at, "mutual_information")
    if information is None or any(array is None for array in arrays.values()):
        return told
    orbitals = {key: array.tolist() for key, array in arrays.items() if array is not None}
    return told | {"orbitals": orbitals, "mutual_information": information.tolist()}


def array_of(record: Record, result: Result, name: str) -> np.ndarray | None:
    """An array that was kept with a result; None where it is not there."""
    ref = result.arrays.get(name)
    if ref is None:
        return None
    try:
        return record.array(ref)
    except (PlumbruleError, KeyError):
        # An array that was lost with a damaged casebook is absent, as one that was never computed.
        return None
