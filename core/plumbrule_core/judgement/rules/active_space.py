"""The active space: was it found reliably, is the reference left in it, is it the same for all species?"""

import math
from collections.abc import Iterator
from typing import Any

from plumbrule_core.correlation.amplitudes import SHAKY_WEIGHT
from plumbrule_core.documents.active_space import GrowthPoint, Space
from plumbrule_core.documents.findings import Edit, Evidence, Finding, Remedy
from plumbrule_core.judgement.case import Case, SpeciesView
from plumbrule_core.judgement.rules.base import Rule, each
from plumbrule_core.judgement.rules.example import Example, Molecule
from plumbrule_core.judgement.rules.remedies import advice
from plumbrule_core.judgement.wording import listed
from plumbrule_core.rungs import SPACE, stands_on_space

TAILORED = ("TCCSD", "TCCSD(T)")
OWN = "own measurements"
SAME = 1e-9


def _in_a_space(case: Case) -> tuple[str, ...]:
    return tuple(name for name in case.rungs if name != SPACE and stands_on_space(name))


def _unsettled(case: Case, view: SpeciesView) -> Finding | None:
    if view.flag("profile_settled") is not False:
        return None
    change = view.number("profile_change")
    return Finding(
        code="profile-unsettled",
        severity="care",
        species=view.name,
        rungs=_in_a_space(case),
        headline=f"It is not settled which orbitals of {view.name} are strongly correlated.",
        consequence="The active space was chosen from a look at the orbitals that does not hold together: "
        "an orbital that matters can be missing.",
        evidence=(Evidence(reading="profile_change", value=change or 0.0, source=OWN),),
        remedies=(advice("Set the active space by hand, and see whether the answer stays"),),
    )


def _shaky(case: Case, view: SpeciesView) -> Finding | None:
    found = [
        weight
        for (rung, _), result in view.results.items()
        if rung in TAILORED
        for weight in _weights(result.growth, result.space)
    ]
    if not found or min(found) >= SHAKY_WEIGHT:
        return None
    return Finding(
        code="reference-weight",
        severity="care",
        species=view.name,
        rungs=tuple(name for name in case.rungs if name in TAILORED),
        headline=f"The reference determinant makes up only {100 * min(found):.0f} % of the active space of "
        f"{view.name}.",
        consequence="Tailored coupled cluster divides by its weight, so its energy hangs on how tightly the "
        "active space was solved.",
        evidence=(Evidence(reading="c0_squared", value=min(found), threshold=SHAKY_WEIGHT, source=OWN),),
        remedies=(advice("Compare with NEVPT2, which does not divide by that weight"),),
    )


def _weights(growth: tuple[GrowthPoint, ...], space: Space | None) -> Iterator[float]:
    for point in growth:
        if space is not None and point.orbitals == space.orbitals:
            yield point.c0_squared


def _members(case: Case, view: SpeciesView) -> Finding | None:
    said = [
        note
        for (rung, _), result in view.results.items()
        if rung == SPACE
        for note in result.notes
        if result.space is None or note != result.space.why
    ]
    if not said:
        return None
    return Finding(
        code="space-remarks",
        severity="note",
        species=view.name,
        rungs=_in_a_space(case),
        headline=f"There is something to say about the active space of {view.name}.",
        consequence=f"{said[0][0].upper()}{'; '.join(dict.fromkeys(said))[1:].rstrip('.')}.",
    )


def _differ(case: Case) -> Iterator[Finding]:
    told: dict[tuple[str, ...], list[str]] = {}
    for rung in _in_a_space(case):
        spaces = _spaces(case, rung)
        if spaces is not None and not _balanced(case, spaces):
            told.setdefault(tuple(f"{n}: {space.label}" for n, space in spaces.items()), []).append(rung)
    for labels, rungs in told.items():
        yield Finding(
            code="spaces-differ",
            severity="care",
            rungs=tuple(rungs),
            headline=f"The active spaces are not of one size ({'; '.join(labels)}).",
            consequence="More correlation is caught on one side of the difference than on the other, which "
            f"can shift {listed(rungs)} by tens of kJ/mol; tailored coupled cluster suffers least.",
            evidence=tuple(
                Evidence(
                    reading=f"active space of {label.partition(': ')[0]}", value=label.partition(": ")[2]
                )
                for label in labels
            ),
            remedies=_one_size(case, _spaces(case, rungs[0]) or {}),
        )


def _spaces(case: Case, rung: str) -> dict[str, Space] | None:
    """The space of each species at the largest basis; None where one is not known."""
    found: dict[str, Space] = {}
    for part in case.parts:
        view = case.view(part.species)
        space = next((r.space for (name, _), r in [*view.results.items()][::-1] if name == rung), None)
        if space is None:
            return None
        found[view.name] = _with_single_electrons(space, part.species.unpaired)
    return found


def _with_single_electrons(space: Space, unpaired: int) -> Space:
    """An empty space of an open shell holds its single electrons: that is the same one determinant."""
    if space.orbitals or not unpaired:
        return space
    return Space(electrons=unpaired, orbitals=tuple(range(1, unpaired + 1)))


def _balanced(case: Case, spaces: dict[str, Space]) -> bool:
    """Whether both sides of the question's sum have as many active orbitals, and active electrons.

    An ionisation may differ by the electrons that it takes away.
    """
    if len(spaces) < 2:
        return True
    orbitals = math.fsum(p.coefficient * len(spaces[p.species.name].orbitals) for p in case.parts)
    electrons = math.fsum(
        p.coefficient * (p.species.electrons - spaces[p.species.name].electrons) for p in case.parts
    )
    return abs(orbitals) < SAME and abs(electrons) < SAME


def _one_size(case: Case, spaces: dict[str, Space]) -> tuple[Remedy, ...]:
    """One space for all, where all species have the same atoms and electrons; the larger of theirs."""
    alike = {
        (tuple(sorted(p.species.counts.items())), p.species.charge, p.species.multiplicity)
        for p in case.parts
    }
    largest = max(spaces.values(), key=lambda space: (len(space.orbitals), space.electrons), default=None)
    if len(alike) > 1 or largest is None or not largest.orbitals:
        return (
            advice("Set spaces of a size that fits both sides, or compare with tailored coupled cluster"),
        )
    before = case.recipe.active_space
    kept = before.to_data() if before is not None else {}
    value: dict[str, Any] = {key: kept[key] for key in ("solver", "bond_dimension", "grow") if key in kept}
    value |= {"choice": "set", "electrons": largest.electrons, "count": len(largest.orbitals)}
    label = f"Give every species the active space {largest.label} and run"
    return (Remedy(label=label, edits=(Edit(path="recipe.active_space", value=value),), then_run=True),)


_TWO = Space(electrons=2, orbitals=(8, 9))
_FOUR = Space(electrons=4, orbitals=(7, 8, 9, 10))
_RUNGS = {"rungs": ["HF", SPACE, "TCCSD"]}
_ENERGIES = {"HF": -108.9, SPACE: -109.0, "TCCSD": -109.3}


def _tailored(weight: float) -> Example:
    point = GrowthPoint(electrons=2, orbitals=(8, 9), energies={"TCCSD": -109.3}, c0_squared=weight)
    molecule = Molecule(energies=_ENERGIES, space=_TWO, growth=(point,))
    return Example(molecules={"n2": molecule}, recipe=_RUNGS)


def _looked_at(*notes: str, settled: bool = True) -> Example:
    read = {"profile_settled": settled, "profile_change": 0.4}
    molecule = Molecule(energies=_ENERGIES, space=_TWO, notes=notes, readings=read)
    return Example(molecules={"n2": molecule}, recipe=_RUNGS)


def _two(other: Space) -> Example:
    return Example(
        molecules={
            "near": Molecule(energies=_ENERGIES, space=_TWO),
            "far": Molecule(xyz="N 0 0 0; N 0 0 2.0", energies=_ENERGIES, space=other),
        },
        question={"kind": "reaction", "terms": {"near": -1, "far": 1}},
        recipe=_RUNGS,
    )


RULES = (
    Rule(
        code="profile-unsettled",
        severity="care",
        stage="after",
        reads=("profile_settled", "profile_change"),
        source=OWN,
        judge=each(_unsettled),
        quiet=(_looked_at(), Example()),
        loud=(_looked_at(settled=False),),
    ),
    Rule(
        code="reference-weight",
        severity="care",
        stage="after",
        reads=("c0_squared at each size",),
        source=OWN,
        judge=each(_shaky),
        quiet=(_tailored(0.8), Example()),
        loud=(_tailored(0.2),),
    ),
    Rule(
        code="spaces-differ",
        severity="care",
        stage="after",
        reads=("active spaces",),
        source="arithmetic",
        judge=_differ,
        quiet=(_two(Space(electrons=2, orbitals=(8, 10))), Example()),
        loud=(_two(_FOUR), _two(Space(electrons=0, orbitals=()))),
    ),
    Rule(
        code="space-remarks",
        severity="note",
        stage="after",
        reads=("notes of the active space",),
        source=OWN,
        judge=each(_members),
        quiet=(_looked_at(), Example()),
        loud=(_looked_at("orbital 9 holds 0.01 electrons and adds little: it can be left out"),),
    ),
)
