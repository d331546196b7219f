"""Which orbitals belong together in an active space, and where the ordered entropies show a step.

The rule (own; after C. J. Stein and M. Reiher, J. Chem. Theory Comput. 12, 1760 (2016), who look for
plateaus of the ordered entropies): every cut of the ordered list that parts no equals is a candidate.
An orbital outside that is tied to one inside comes in, with those of its energy. A cut is the better,
the larger the step at it, the stronger its weakest member, and the more of all mutual information it
holds.
"""

from dataclasses import dataclass

import numpy as np

from plumbrule_core.correlation.cuts import Cut, edges, kept
from plumbrule_core.correlation.profile import Profile
from plumbrule_core.correlation.reasons import calm_reason, reason
from plumbrule_core.correlation.window import alike
from plumbrule_core.documents.active_space import Space

CALM = 0.15
"""Largest entropy below which one determinant describes the molecule (own: water 0.13, N2 at its bond
length 0.24)."""
WEAK = 0.08
"""Entropy below which a member counts less and less (own)."""
FLOOR = 0.02
"""Entropies below this count as this: nothing stands out among them (own)."""
TIED, SHARE, COMPARABLE = 0.01, 0.3, 0.4
"""An orbital outside is tied to one inside where their mutual information is above the first and above the
second times its entropy, and where it is no mere satellite: its entropy is the third times that of the one
inside, or their mutual information is the second times that too (own; without the last condition the weak
orbitals of C2, F2 and O2 follow the strong ones in a row)."""
CLEAR = 0.25
"""Score from which a cut is called a step (own)."""
SAME_ENERGY = 1e-3
"""Hartree within which two orbitals count as degenerate."""
MOST_ACTIVE = 16
"""Orbitals in the largest space that is proposed."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Proposal:
    """A space with its reasons; it is empty where one determinant describes the molecule."""

    profile: Profile
    space: Space
    step: bool
    """The ordered entropies show a step at this space."""
    cuts: tuple[Cut, ...]
    """Every cut along the order of the entropies, each within the next."""

    @property
    def calm(self) -> bool:
        """Whether one determinant describes the molecule."""
        return not self.space.orbitals


def propose(profile: Profile) -> Proposal:
    """The active space that the profile asks for, with the reasons in words."""
    found = cuts(profile)
    if profile.largest < CALM or not found:
        space = Space(electrons=0, orbitals=(), why=calm_reason(profile))
        return Proposal(profile=profile, space=space, step=False, cuts=found)
    place = max(range(len(found)), key=lambda k: found[k].score)
    step = found[place].score >= CLEAR
    space = space_of(profile, found[place].members, reason(profile, found, place, step))
    return Proposal(profile=profile, space=space, step=step, cuts=found)


def cuts(profile: Profile) -> tuple[Cut, ...]:
    """Every cut along the order of the entropies that parts nothing tied or equal, each within the next."""
    return tuple(Cut(members=members, score=_score(profile, members)) for members in nested(profile))


def nested(profile: Profile, start: tuple[int, ...] = ()) -> tuple[tuple[int, ...], ...]:
    """Places of the members of each space along the order of the entropies, from `start` on.

    Single electrons are in all of them. Spaces in which nothing can move are left out.
    """
    inside = set(start) | {k for k, electrons in enumerate(profile.reference) if electrons == 1}
    found = [tuple(sorted(inside))] if start else []
    for run in _order(profile):
        inside = closed(profile, inside | set(run))
        members = tuple(sorted(inside))
        if len(members) > MOST_ACTIVE:
            break
        if members not in found and _can_correlate(profile, members):
            found.append(members)
    return tuple(found)


def space_of(profile: Profile, members: tuple[int, ...], why: str = "") -> Space:
    """The space of these places of the profile."""
    return Space(
        electrons=sum(profile.reference[k] for k in members),
        orbitals=tuple(profile.orbitals[k] for k in sorted(members)),
        why=why,
    )


def tied(profile: Profile, outside: int, inside: int) -> bool:
    """Whether the orbital outside must follow the one inside."""
    shared = profile.mutual_information[outside, inside]
    out, within = profile.entropies[outside], profile.entropies[inside]
    partner = out >= COMPARABLE * within or shared > SHARE * within
    return bool(shared > max(TIED, SHARE * out) and partner)


def equal(profile: Profile, first: int, second: int) -> bool:
    """Whether two orbitals have one energy and one filling, as partners by symmetry have."""
    apart = abs(profile.energies[first] - profile.energies[second])
    return bool(apart < SAME_ENERGY and profile.reference[first] == profile.reference[second])


def closed(profile: Profile, members: set[int]) -> set[int]:
    """The members with all that are tied or equal to them."""
    inside = set(members)
    while True:
        outside = [q for q in range(len(profile.orbitals)) if q not in inside]
        pulled = {q for q in outside if any(tied(profile, q, p) or equal(profile, q, p) for p in inside)}
        if not pulled:
            return inside
        inside |= pulled


def _order(profile: Profile) -> tuple[tuple[int, ...], ...]:
    """Places from the largest entropy to the smallest, those within 3 % together."""
    order = np.argsort(-profile.entropies, kind="stable")
    return tuple(tuple(int(order[k]) for k in run) for run in alike(profile.entropies[order]))


def _can_correlate(profile: Profile, members: tuple[int, ...]) -> bool:
    return len({profile.reference[k] for k in members}) > 1


def _score(profile: Profile, members: tuple[int, ...]) -> float:
    if len(members) == len(profile.orbitals):
        return 0.0
    weakest, strongest = (max(value, FLOOR) for value in edges(profile, members))
    return float(np.log(weakest / strongest) * min(1.0, weakest / WEAK) * kept(profile, members))
