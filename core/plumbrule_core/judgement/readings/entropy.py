"""After "Active space": how strongly the orbitals of the window are correlated.

Entropies: O. Legeza and J. Solyom, Phys. Rev. B 68, 195116 (2003). Zs(1), the mean entropy of the
valence orbitals over ln 4: C. J. Stein and M. Reiher, Mol. Phys. 115, 2110 (2017).
"""

import numpy as np

from plumbrule_core.documents.plan import TaskSpec
from plumbrule_core.documents.results import Reading
from plumbrule_core.judgement.readings.family import Family
from plumbrule_core.rungs.protocol import Bench

PAIRS = 5
"""How many of the strongest pairs are read."""


def measure(bench: Bench, spec: TaskSpec) -> tuple[Reading, ...]:
    """Entropies of the window and its strongest pairs; nothing where no window was looked at."""
    profile = bench.profile
    if profile is None or not len(profile.entropies):
        return ()
    readings = [
        Reading(name="s1_max", value=profile.largest),
        Reading(name="s1_sum", value=float(profile.entropies.sum())),
        Reading(name="zs1", value=profile.zs1),
        Reading(name="c0_squared", value=profile.c0_squared),
        Reading(name="profile_settled", value=profile.settled),
        Reading(name="profile_change", value=profile.change),
    ]
    if pairs := strongest_pairs(profile.orbitals, profile.mutual_information):
        readings.append(Reading(name="strongest_pairs", value=pairs))
    return tuple(readings)


def strongest_pairs(orbitals: tuple[int, ...], information: np.ndarray) -> tuple[float, ...]:
    """Three numbers a pair, the strongest first: both orbitals (numbered from 1) and their mutual
    information."""
    first, second = np.triu_indices(len(orbitals), k=1)
    order = np.argsort(-information[first, second], kind="stable")[:PAIRS]
    return tuple(
        float(value)
        for k in order
        for value in (orbitals[first[k]], orbitals[second[k]], information[first[k], second[k]])
    )


ENTROPY = Family(
    after="Active space",
    names=(
        "s1_max",
        "s1_sum",
        "zs1",
        "c0_squared",
        "strongest_pairs",
        "profile_settled",
        "profile_change",
    ),
    citation="C. J. Stein and M. Reiher, Mol. Phys. 115, 2110 (2017)",
    measure=measure,
)
