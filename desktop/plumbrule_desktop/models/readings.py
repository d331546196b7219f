"""The readings of every species beside their limits, and what a finding made of them."""

from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.findings import Evidence, Finding, Judgement
from plumbrule_core.documents.results import Reading, ReadingValue
from plumbrule_core.documents.run_state import TaskState
from plumbrule_core.documents.species import Species
from plumbrule_core.units import PER_HARTREE, from_hartree
from plumbrule_desktop.plots.series import Numbers
from plumbrule_desktop.state.amounts import MINUS

HEADER = ("Species", "Reading", "Value", "Limit", "What it means here")
NAMES = {
    "s2": "Spin square <S\u00b2>",
    "s2_ideal": "Spin square it should have",
    "s2_excess": "Spin square in excess",
    "stable": "Orbitals are a minimum",
    "stable_external": "No unrestricted solution lower",
    "instability_depth": "Depth of the unrestricted solution",
    "uhf_natural_occupations": "Unrestricted natural occupations",
    "uhf_fractional": "Most fractional occupation",
    "homo_lumo_gap": "Gap between highest occupied and lowest empty orbital",
    "overlap_condition": "Smallest overlap eigenvalue of the basis",
    "removed_functions": "Basis functions removed as dependent",
    "natural_occupations": "MP2 natural occupations",
    "M": "M of the natural occupations",
    "mp2_largest_t2": "Largest first-order doubles amplitude",
    "c0_squared": "Weight of the leading determinant",
    "T1": "T1",
    "D1": "D1",
    "D2": "D2",
    "largest_t1": "Largest singles amplitude",
    "largest_t2": "Largest doubles amplitude",
    "share_of_triples": "Share of triples in the correlation energy",
    "triples": "Triples correction (T)",
}


def reading_name(name: str) -> str:
    """The reading in words; one that is not known here keeps its own name."""
    return NAMES.get(name, name.replace("_", " "))


def value_words(value: ReadingValue | str, unit: str = "") -> str:
    """A value with its unit; of a list of occupations those that say most, away from 0 and 2."""
    behind = f" {unit}" if unit else ""
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, str):
        return f"{value}{behind}"
    if isinstance(value, float | int):
        return f"{value:.4g}".replace("-", MINUS) + behind
    telling = [one for one in value if 0.02 < one < 1.98]
    if not telling:
        return "all within 0.02 of 0 or 2"
    shown = ", ".join(f"{one:.2f}" for one in telling[:4])
    more = " \u2026" if len(telling) > 4 else ""
    return f"{shown}{more}{behind}"


def readings_table(brief: Brief, judgement: Judgement) -> Numbers:
    """One row for each reading of each species: its limit, passed or not, and what a finding said of it."""
    rows = tuple(
        _row(species.name, _asked(reading, brief), judgement.findings, brief.by_name.get(species.name))
        for species in judgement.species
        for reading in species.readings
    )
    return Numbers(HEADER, rows)


def _asked(reading: Reading, brief: Brief) -> Reading:
    """A reading in hartree in the unit of the question, in which findings give its limit."""
    unit = brief.question.unit if brief.question else "kJ/mol"
    if reading.unit != "hartree" or not isinstance(reading.value, float):
        return reading
    return Reading(name=reading.name, value=from_hartree(reading.value, unit), unit=unit)


def task_readings(task: TaskState) -> Numbers:
    """The readings of one task as they come."""
    rows = tuple((reading_name(one.name), value_words(one.value, one.unit)) for one in task.readings)
    return Numbers(("Reading", "Value"), rows)


def _row(
    species: str, reading: Reading, findings: tuple[Finding, ...], molecule: Species | None
) -> tuple[str, ...]:
    held = _held_against(species, reading.name, findings)
    limit, meaning = limit_words(reading, molecule), ""
    if held is not None:
        finding, evidence = held
        limit = limit if evidence.threshold is None else value_words(evidence.threshold, evidence.unit)
        meaning = finding.headline
    return (species, reading_name(reading.name), value_words(reading.value, reading.unit), limit, meaning)


def limit_words(reading: Reading, molecule: Species | None) -> str:
    """`0.02`, or `at least 5 eV` where the reading should stay above; empty where there is no limit.

    In the unit of the reading.
    """
    from plumbrule_core.session import reading_limit  # loaded by the desk long before anything is judged

    limit = None if molecule is None else reading_limit(reading.name, molecule)
    if limit is None:
        return ""
    value, unit, below = limit
    if unit == "hartree" and reading.unit in PER_HARTREE:
        value, unit = value * PER_HARTREE[reading.unit], reading.unit
    return value_words(value, unit) if below else f"at least {value_words(value, unit)}"


def _held_against(species: str, name: str, findings: tuple[Finding, ...]) -> tuple[Finding, Evidence] | None:
    for finding in findings:
        if finding.species not in ("", species):
            continue
        for evidence in finding.evidence:
            if evidence.reading == name:
                return finding, evidence
    return None
