"""Cuts of the ordered entropies: which orbitals are in, and what stands at the edge."""

from dataclasses import dataclass

import numpy as np

from plumbrule_core.correlation.profile import Profile


@dataclass(frozen=True, slots=True, kw_only=True)
class Cut:
    """One way to part the window: places of the members in the profile, and how good the step is."""

    members: tuple[int, ...]
    score: float


def edges(profile: Profile, members: tuple[int, ...]) -> tuple[float, float]:
    """The smallest entropy inside and the largest outside; 0 where nothing is outside."""
    outside = [k for k in range(len(profile.orbitals)) if k not in members]
    return float(profile.entropies[list(members)].min()), float(
        np.max(profile.entropies[outside], initial=0.0)
    )


def kept(profile: Profile, members: tuple[int, ...]) -> float:
    """The share of all mutual information that is among the members."""
    whole = float(profile.mutual_information.sum())
    return float(profile.mutual_information[np.ix_(members, members)].sum()) / whole if whole > 0 else 0.0
