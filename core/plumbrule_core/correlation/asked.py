"""A space that the user set: is it one, and does it keep together what belongs together?"""

from collections.abc import Iterator

from plumbrule_core.correlation.profile import Profile
from plumbrule_core.correlation.proposal import equal, tied
from plumbrule_core.correlation.reasons import number_words
from plumbrule_core.correlation.window import OrbitalSet
from plumbrule_core.documents.active_space import Space, SpaceRequest
from plumbrule_core.errors import PlumbruleError

USELESS = 0.02
"""Electrons by which the occupation of a useful member departs from 2 and from 0 (common practice, no
source)."""

FAR_STRONGER = 2.0
"""Ratio of entropies from which an orbital outside is named as stronger than a member (own)."""


def space_asked(request: SpaceRequest, orbitals: OrbitalSet, frozen: int) -> Space:
    """The space of a request with choice "set"; raises PlumbruleError with all that is wrong with it.

    `frozen`: how many of the lowest orbitals are not correlated.
    """
    if (request.orbitals is None) == (request.count is None):
        raise PlumbruleError(
            "a set active space needs either the numbers of its orbitals, or their count around the gap"
        )
    numbers = request.orbitals if request.orbitals is not None else _around_the_gap(request, orbitals)
    wrong = list(_faults(request, numbers, orbitals, frozen))
    if wrong:
        raise PlumbruleError("; ".join(wrong))
    return Space(
        electrons=orbitals.electrons_in(numbers), orbitals=tuple(sorted(numbers)), why="Set by the user."
    )


def _around_the_gap(request: SpaceRequest, orbitals: OrbitalSet) -> tuple[int, ...]:
    single, count, electrons = orbitals.alpha - orbitals.beta, request.count, request.electrons
    if electrons is None or count is None:
        raise PlumbruleError("an active space around the gap needs the number of its electrons too")
    if (electrons - single) % 2 or electrons < single:
        raise PlumbruleError(
            f"{electrons} active electrons do not fit {single} unpaired ones: "
            f"choose {single + 2}, or {'an even' if single % 2 == 0 else 'an odd'} number above"
        )
    filled = (electrons - single) // 2
    if count < filled + single:
        raise PlumbruleError(
            f"{electrons} electrons, {single} of them unpaired, fill {filled + single} orbitals, "
            f"more than the {count} that are to be active"
        )
    return tuple(range(orbitals.beta - filled + 1, orbitals.beta - filled + count + 1))


def _faults(
    request: SpaceRequest, numbers: tuple[int, ...], orbitals: OrbitalSet, frozen: int
) -> Iterator[str]:
    if len(set(numbers)) < len(numbers):
        twice = sorted({number for number in numbers if numbers.count(number) > 1})
        yield f"{number_words(twice)} stands more than once among the active ones"
    if beyond := [number for number in numbers if not 1 <= number <= orbitals.size]:
        yield f"orbital {beyond[0]} is not there: they are numbered from 1 to {orbitals.size}"
        return
    if cores := [number for number in numbers if number <= frozen]:
        yield f"{number_words(cores)} cannot be active while the core is frozen: correlate all electrons"
    single = range(orbitals.beta + 1, orbitals.alpha + 1)
    if missing := [number for number in single if number not in numbers]:
        yield f"{number_words(missing)} must be active, for a single electron is there"
    held = orbitals.electrons_in(numbers)
    if request.electrons is not None and request.electrons != held:
        yield f"these orbitals hold {held} electrons in the reference, not {request.electrons}"
    if numbers and len({orbitals.electrons(number) for number in numbers}) == 1:
        yield "no electron can move among these orbitals: a space needs filled and empty ones"


def check(space: Space, profile: Profile) -> tuple[str, ...]:
    """What speaks against a space in words: a pair that it parts, a member without use, a stronger one
    left out."""
    members = {k for k, number in enumerate(profile.orbitals) if number in space.orbitals}
    outside = [k for k in range(len(profile.orbitals)) if k not in members]
    return (
        *_parted(profile, members, outside),
        *_useless(profile, members),
        *_stronger(profile, members, outside),
    )


def _parted(profile: Profile, members: set[int], outside: list[int]) -> Iterator[str]:
    for q in outside:
        partners = [p for p in members if tied(profile, q, p)]
        if partners:
            p = max(partners, key=lambda k: profile.mutual_information[q, k])
            yield (
                f"orbital {profile.orbitals[q]} is left out, though it is paired with orbital "
                f"{profile.orbitals[p]} (mutual information {profile.mutual_information[q, p]:.2f}): add it"
            )
        elif like := [p for p in members if equal(profile, p, q)]:
            yield (
                f"orbital {profile.orbitals[q]} is left out, though it has the energy of orbital "
                f"{profile.orbitals[like[0]]}: take both or neither"
            )


def _useless(profile: Profile, members: set[int]) -> Iterator[str]:
    for p in sorted(members):
        filled = profile.occupations[p]
        if min(filled, 2 - filled) < USELESS and profile.reference[p] != 1:
            number = profile.orbitals[p]
            yield f"orbital {number} holds {filled:.2f} electrons and adds little: it can be left out"


def _stronger(profile: Profile, members: set[int], outside: list[int]) -> Iterator[str]:
    if not members or not outside:
        return
    weakest = min(members, key=lambda k: profile.entropies[k])
    strongest = max(outside, key=lambda k: profile.entropies[k])
    low, high = profile.entropies[weakest], profile.entropies[strongest]
    if high > FAR_STRONGER * low:
        out, within = profile.orbitals[strongest], profile.orbitals[weakest]
        yield (
            f"orbital {out} is left out (entropy {high:.2f}), though it is correlated more strongly than "
            f"orbital {within} ({low:.2f})"
        )
