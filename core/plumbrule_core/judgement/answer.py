"""The answer, rung by rung: the sum of coefficient times energy, at each basis and at their limit."""

import math
from collections.abc import Mapping
from dataclasses import dataclass

from plumbrule_core.basis_sets import Basis
from plumbrule_core.documents.plan import Settings
from plumbrule_core.documents.results import Result
from plumbrule_core.errors import UnlikeRecipes
from plumbrule_core.judgement.case import Case
from plumbrule_core.judgement.extrapolation import correlation_limit, hartree_fock_limit
from plumbrule_core.rungs import RUNGS


@dataclass(frozen=True, slots=True)
class LadderValue:
    """One rung's answer in hartree; `at` holds it basis by basis, the smallest first."""

    rung: str
    hartree: float
    basis: str
    extrapolated: bool
    at: Mapping[str, float]


def ladder(case: Case) -> tuple[LadderValue, ...]:
    """Every rung whose sum is complete at a basis set, in the order of the case; raises UnlikeRecipes."""
    if not case.parts:
        return ()
    sums = {rung: _sums(case, rung) for rung in case.rungs if RUNGS[rung].kind != "detection"}
    return tuple(_value(case, rung, at, sums.get("HF", {})) for rung, at in sums.items() if at)


def _sums(case: Case, rung: str) -> Mapping[str, float]:
    found = {basis.name: _sum(case, rung, basis.name) for basis in case.bases}
    return {basis: value for basis, value in found.items() if value is not None}


def _sum(case: Case, rung: str, basis: str) -> float | None:
    terms: list[float] = []
    used: list[Result] = []
    for part in case.parts:
        result = case.view(part.species).results.get((rung, basis))
        if result is None:
            return None
        used.append(result)
        terms.append(part.coefficient * result.energy)
    refuse_unlike(used, case.settings)
    return math.fsum(terms)


def refuse_unlike(results: list[Result], settings: Mapping[str, Settings]) -> None:
    """Raise UnlikeRecipes where the results are not of one recipe; the sentence says what differs."""
    first = results[0]
    for other in results[1:]:
        if other.level != first.level:
            raise UnlikeRecipes(
                f"{first.species} and {other.species} were not computed with the same recipe, so their "
                "energies "
                f"may not be subtracted: {_difference(first, other, settings)}. "
                "Compute the missing species with the recipe of the other."
            )


def _difference(first: Result, other: Result, settings: Mapping[str, Settings]) -> str:
    one, two = (settings.get(result.level) for result in (first, other))
    if one is None or two is None:
        return f"the settings of {(first if one is None else other).species} are not those of this plan"
    rows = [(key, value, two.to_data().get(key)) for key, value in one.to_data().items()]
    return "; ".join(
        f"{key.replace('_', ' ')} is {a} in one and {b} in the other" for key, a, b in rows if a != b
    )


def _value(case: Case, rung: str, at: Mapping[str, float], hartree_fock: Mapping[str, float]) -> LadderValue:
    pair = _pair(case, rung, at, hartree_fock)
    if pair is None:
        basis, value = [*at.items()][-1]
        return LadderValue(rung, value, basis, False, at)
    limit = _limit(pair, [hartree_fock[b.name] for b in pair], [at[b.name] for b in pair])
    return LadderValue(rung, limit, case.recipe.basis_text, True, at)


def _pair(
    case: Case, rung: str, at: Mapping[str, float], hartree_fock: Mapping[str, float]
) -> tuple[Basis, Basis] | None:
    if RUNGS[rung].kind != "wave function" or len(case.bases) != 2:
        return None
    small, large = case.bases
    complete = all(b.name in at and b.name in hartree_fock for b in (small, large))
    if not complete or small.cardinal is None or large.cardinal is None or small.cardinal >= large.cardinal:
        return None
    return small, large


def _limit(pair: tuple[Basis, Basis], hartree_fock: list[float], total: list[float]) -> float:
    x, y = (basis.cardinal or 0 for basis in pair)
    correlation = [t - h for t, h in zip(total, hartree_fock, strict=True)]
    return hartree_fock_limit(hartree_fock[0], hartree_fock[1], x, y) + correlation_limit(
        correlation[0], correlation[1], x, y
    )
