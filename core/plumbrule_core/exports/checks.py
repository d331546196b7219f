"""The checks that the report lists, passed and failed alike: each reading beside its limit."""

from collections.abc import Iterable, Iterator
from dataclasses import dataclass

from plumbrule_core.documents.results import Reading
from plumbrule_core.documents.species import Species
from plumbrule_core.elements import ELEMENTS
from plumbrule_core.exports.facts import TaskRow
from plumbrule_core.judgement.thresholds import THRESHOLDS

UPPER = {
    "D2": "d2",
    "largest_t2": "t2_notable",
    "M": "m_large",
    "s2_excess": "spin_care",
    "instability_depth": "instability_depth_care",
    "uhf_fractional": "uhf_fractional_serious",
    "share_of_triples": "share_of_triples_raised",
}
"""Readings that should stay below a limit, and the name of that limit."""

LOWER = {"homo_lumo_gap": "gap_small", "overlap_condition": "overlap_small"}
"""Readings that should stay above a limit."""


@dataclass(frozen=True, slots=True)
class Check:
    """One reading beside its limit; `limit` is None where it is yes or no."""

    reading: str
    value: float | bool
    unit: str
    limit: float | None
    below: bool
    source: str
    passed: bool


def checks_of(species: Species, readings: Iterable[Reading]) -> Iterator[Check]:
    """Every reading of a species for which there is a limit."""
    for reading in readings:
        if reading.name == "stable" and isinstance(reading.value, bool):
            yield Check(reading.name, reading.value, "", None, True, "", reading.value)
            continue
        named = limit_of(reading.name, species)
        if named is None or isinstance(reading.value, bool | tuple):
            continue
        limit, below = THRESHOLDS[named[0]], named[1]
        passed = reading.value <= limit.value if below else reading.value >= limit.value
        yield Check(reading.name, reading.value, reading.unit, limit.value, below, limit.source, passed)


def limit_of(reading: str, species: Species) -> tuple[str, bool] | None:
    """The name of the limit that fits the species, and whether the reading should stay below it."""
    if reading in ("T1", "D1"):
        return f"{reading.lower()}{_kind(species, reading)}", True
    if reading in UPPER:
        return UPPER[reading], True
    return (LOWER[reading], False) if reading in LOWER else None


def _kind(species: Species, reading: str) -> str:
    if any(ELEMENTS[symbol].is_transition_metal for symbol in species.counts):
        return "_metal"
    if species.multiplicity > 1:
        return "_open"
    return "_closed" if reading == "T1" else ""


def unfinished(rows: Iterable[TaskRow]) -> tuple[TaskRow, ...]:
    """The tasks that did not end well: not converged, failed, stopped or not begun."""
    return tuple(row for row in rows if row.result is None or not row.result.converged)
