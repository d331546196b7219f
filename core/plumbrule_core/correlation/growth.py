"""The nested series of spaces along which a tailored answer is followed, and one size for several
molecules."""

from collections.abc import Callable, Sequence

from plumbrule_core.correlation.profile import Profile
from plumbrule_core.correlation.proposal import Proposal, nested, space_of
from plumbrule_core.correlation.reasons import number_words
from plumbrule_core.documents.active_space import Space

SMALLER, LARGER = 2, 3
"""How many sizes below the chosen one and above it are followed: each costs a coupled-cluster run."""


def growth_spaces(profile: Profile, chosen: Space, fits: Callable[[Space], bool]) -> tuple[Space, ...]:
    """Spaces each within the next, the chosen one among them, smallest first; none parts what is tied.

    Those beyond `fits` (whether a solver can reach a space) are left out, and all but the nearest.
    Empty where nothing is chosen.
    """
    places = [k for k, number in enumerate(profile.orbitals) if number in chosen.orbitals]
    if not places or len(places) < len(chosen.orbitals):
        return (chosen,) if chosen.orbitals else ()
    smaller = [members for members in nested(profile) if set(members) < set(places)]
    larger = [members for members in nested(profile, start=tuple(places)) if len(members) > len(places)]
    found = [*(space_of(profile, members) for members in smaller[-SMALLER:]), chosen]
    found += [space_of(profile, members) for members in larger[:LARGER]]
    return tuple(space for space in found if space == chosen or fits(space))


def agree(proposals: Sequence[Proposal]) -> tuple[Space, ...]:
    """Spaces of one size for molecules whose energies are subtracted, each as it was proposed or
    larger.

    The size is counted in orbitals that the reference fills, half fills and leaves empty. A molecule
    that needs more takes in the next groups of its own order; where a group does not fit, all grow on.
    A molecule that is calm takes part where another is not. Where no common size is found within the
    windows, the spaces are filled up orbital by orbital, and `why` says so.
    """
    if not proposals or all(proposal.calm for proposal in proposals):
        return tuple(proposal.space for proposal in proposals)
    sizes = [_sizes(proposal) for proposal in proposals]
    common = set(sizes[0]).intersection(*sizes[1:])
    if common:
        size = min(common, key=sum)
        return tuple(found[size] for found in sizes)
    filled = max(_filled(p.profile, p.space.orbitals) for p in proposals)
    empty = max(_empty(p.profile, p.space.orbitals) for p in proposals)
    return tuple(_filled_up(proposal, filled, empty) for proposal in proposals)


def _sizes(proposal: Proposal) -> dict[tuple[int, int], Space]:
    """Filled and empty members of the proposed space and the larger ones along its order, with each
    space."""
    profile, chosen = proposal.profile, proposal.space
    start = tuple(k for k, number in enumerate(profile.orbitals) if number in chosen.orbitals)
    found = {}
    for members in nested(profile, start=start):
        space = space_of(profile, members)
        if space.orbitals == chosen.orbitals:
            space = chosen
        else:
            space = space.model_copy(update={"why": f"{chosen.why} {_grown(chosen, space)}".strip()})
        found[_filled(profile, space.orbitals), _empty(profile, space.orbitals)] = space
    return found


def _filled_up(proposal: Proposal, filled: int, empty: int) -> Space:
    profile, numbers = proposal.profile, set(proposal.space.orbitals)
    order = sorted(range(len(profile.orbitals)), key=lambda k: -profile.entropies[k])
    for k in order:
        count = _filled if profile.reference[k] else _empty
        if count(profile, tuple(numbers)) < (filled if profile.reference[k] else empty):
            numbers.add(profile.orbitals[k])
    members = tuple(k for k, number in enumerate(profile.orbitals) if number in numbers)
    space = space_of(profile, members)
    said = (
        f"{_grown(proposal.space, space)} No size common to all parts nothing, so this one may."
        if (space.orbitals != proposal.space.orbitals)
        else ""
    )
    return space.model_copy(update={"why": f"{proposal.space.why} {said}".strip()})


def _grown(chosen: Space, space: Space) -> str:
    added = [number for number in space.orbitals if number not in chosen.orbitals]
    return (
        f"Extended by {number_words(added)}, so that all molecules of the question have a space of one size."
    )


def _filled(profile: Profile, numbers: Sequence[int]) -> int:
    return sum(n in numbers and e > 0 for n, e in zip(profile.orbitals, profile.reference, strict=True))


def _empty(profile: Profile, numbers: Sequence[int]) -> int:
    return sum(n in numbers and e == 0 for n, e in zip(profile.orbitals, profile.reference, strict=True))
