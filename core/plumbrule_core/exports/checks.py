"""The checks that the report lists, passed and failed alike: each reading beside its limit."""

from collections.abc import Container, Iterable, Iterator
from dataclasses import dataclass

from plumbrule_core.documents.results import Reading
from plumbrule_core.documents.species import Species
from plumbrule_core.exports.facts import TaskRow
from plumbrule_core.judgement.evidence import LOWER, limits_of
from plumbrule_core.judgement.thresholds import THRESHOLDS


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
    """Every reading of a species that the verdict compares with a limit, by the same limits."""
    known = {reading.name: reading for reading in readings}
    for name, reading in known.items():
        if name == "stable" and isinstance(reading.value, bool):
            yield Check(name, reading.value, "", None, True, "", reading.value)
        elif not isinstance(reading.value, bool | tuple) and not _replaced(name, known):
            yield from _beside_limit(reading, reading.value, species)


def _replaced(name: str, known: Container[str]) -> bool:
    """The amplitudes of MP2 stand in for those of CCSD, and are not judged where these are there."""
    return name == "mp2_largest_t2" and "largest_t2" in known


def _beside_limit(reading: Reading, value: float, species: Species) -> Iterator[Check]:
    for limit in (THRESHOLDS[name] for name in limits_of(reading.name, species)[:1]):
        below = reading.name not in LOWER
        passed = value <= limit.value if below else value >= limit.value
        yield Check(reading.name, value, reading.unit, limit.value, below, limit.source, passed)


def unfinished(rows: Iterable[TaskRow]) -> tuple[TaskRow, ...]:
    """The tasks that did not end well: not converged, failed, stopped or not begun."""
    return tuple(row for row in rows if row.result is None or not row.result.converged)
