"""Orbitals and profile as plain arrays: for the checkpoint, and for the result that is kept."""

from collections.abc import Mapping
from typing import Any

import numpy as np

from plumbrule_core.correlation.profile import Profile
from plumbrule_core.correlation.protocol import Array
from plumbrule_core.correlation.window import OrbitalSet

SAME_ORBITALS = 1e-5
"""How far the filled orbitals of a checkpoint may be from those of the field (one minus their overlap)."""


def arrays_of(profile: Profile) -> dict[str, np.ndarray]:
    """The profile as arrays: numbers, energies in hartree, entropies and mutual information in nat."""
    narrow = np.zeros(0) if profile.narrow is None else profile.narrow
    return {
        "window": np.array(profile.orbitals, dtype=np.int64),
        "window_energies": profile.energies,
        "window_reference": np.array(profile.reference, dtype=np.int64),
        "window_valence": np.array(profile.valence, dtype=bool),
        "window_occupations": profile.occupations,
        "entropies": profile.entropies,
        "mutual_information": profile.mutual_information,
        "narrow_entropies": narrow,
        "window_solution": np.array([profile.energy, profile.c0_squared, profile.change, profile.settled]),
        "window_words": np.array([profile.method, *profile.notes]),
    }


def profile_of_arrays(arrays: Mapping[str, np.ndarray]) -> Profile:
    """The profile again; raises KeyError where an array is missing."""
    energy, weight, change, settled = (float(x) for x in arrays["window_solution"])
    method, *notes = (str(word) for word in arrays["window_words"])
    narrow = arrays["narrow_entropies"]
    return Profile(
        orbitals=tuple(int(n) for n in arrays["window"]),
        energies=arrays["window_energies"],
        reference=tuple(int(n) for n in arrays["window_reference"]),
        valence=tuple(bool(n) for n in arrays["window_valence"]),
        occupations=arrays["window_occupations"],
        entropies=arrays["entropies"],
        mutual_information=arrays["mutual_information"],
        energy=energy,
        c0_squared=weight,
        method=method,
        settled=bool(settled),
        change=change,
        narrow=narrow if len(narrow) else None,
        notes=tuple(notes),
    )


def arrays_of_orbitals(orbitals: OrbitalSet) -> dict[str, np.ndarray]:
    """The orbitals of a checkpoint, so that degenerate ones do not turn when it is carried on."""
    counts = (orbitals.core, orbitals.alpha, orbitals.beta, orbitals.valence, orbitals.others)
    return {
        "orbitals": orbitals.coefficients,
        "orbital_energies": orbitals.energies,
        "orbital_counts": np.array(counts, dtype=np.int64),
        "orbital_set": np.array(orbitals.name),
    }


def orbitals_of_arrays(arrays: Mapping[str, np.ndarray], like: OrbitalSet, overlap: Any) -> OrbitalSet | None:
    """The orbitals of a checkpoint; None where they are not of this molecule, basis and determinant.

    `like`: the orbitals of the field as it is now; `overlap`: that of the basis functions.
    """
    if "orbital_set" not in arrays or arrays["orbitals"].shape != like.coefficients.shape:
        return None
    core, alpha, beta, valence, others = (int(n) for n in arrays["orbital_counts"])
    if (str(arrays["orbital_set"]), core, alpha, beta) != (like.name, like.core, like.alpha, like.beta):
        return None
    old, new = arrays["orbitals"], like.coefficients
    if any(_apart(old[:, :n], new[:, :n], overlap) for n in {core, alpha, beta, alpha + valence} if n):
        return None
    return OrbitalSet(
        name=like.name,
        coefficients=old,
        energies=arrays["orbital_energies"],
        core=core,
        alpha=alpha,
        beta=beta,
        valence=valence,
        others=others,
    )


def _apart(one: Array, two: Array, overlap: Any) -> bool:
    shared = np.linalg.svd(one.T @ np.asarray(overlap) @ two, compute_uv=False)
    return bool(shared.min() < 1 - SAME_ORBITALS)
