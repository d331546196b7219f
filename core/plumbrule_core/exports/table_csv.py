"""Energies, answers, budget and readings as one table for a spreadsheet."""

import csv
import io
from collections.abc import Iterator

from plumbrule_core.documents.results import ReadingValue
from plumbrule_core.exports.facts import results_of, species_of
from plumbrule_core.exports.record import Record

Row = dict[str, object]


class TableCsv:
    """One row for each energy, answer, cause of uncertainty and reading; units stand in the headers."""

    suffix = ".csv"
    name = "Table for a spreadsheet"

    def write(self, record: Record) -> bytes:
        """The table, with every digit of every number."""
        question = record.brief.question
        unit = question.unit if question is not None else "kJ/mol"
        headers = (
            *("what", "species", "formula", "charge", "multiplicity", "rung", "basis"),
            *("energy (hartree)", "correlation energy (hartree)", "time (s)", "memory (MB)"),
            *(f"value ({unit})", f"uncertainty ({unit})", "cause", "verdict"),
            *("reading", "reading value", "reading unit"),
        )
        file = io.StringIO(newline="")
        table = csv.DictWriter(file, headers, restval="", lineterminator="\r\n")
        table.writeheader()
        for row in (*_answers(record, unit), *_energies(record), *_readings(record)):
            table.writerow({key: _cell(value) for key, value in row.items()})
        return file.getvalue().encode("utf-8-sig")


def _answers(record: Record, unit: str) -> Iterator[Row]:
    judgement = record.judgement
    value, bar = f"value ({unit})", f"uncertainty ({unit})"
    if judgement.answer is not None:
        answer = judgement.answer
        yield {
            "what": "answer",
            "rung": answer.rung,
            "basis": answer.basis,
            value: answer.value,
            bar: answer.uncertainty,
            "verdict": judgement.verdict.level,
        }
    for line in judgement.comparison:
        yield {
            "what": "comparison",
            "rung": line.rung,
            "basis": line.basis,
            value: line.value,
            bar: line.uncertainty,
            "verdict": "do not rely on it" if line.stopped else None,
        }
    for cause in judgement.budget:
        yield {"what": "budget", bar: cause.size, value: cause.shift, "cause": cause.cause}


def _energies(record: Record) -> Iterator[Row]:
    for species in species_of(record):
        for task, result in results_of(record, species):
            yield {
                "what": "energy",
                "species": species.name,
                "formula": species.formula,
                "charge": species.charge,
                "multiplicity": species.multiplicity,
                "rung": task.spec.rung,
                "basis": task.spec.settings.basis,
                "energy (hartree)": result.energy,
                "correlation energy (hartree)": result.correlation,
                "time (s)": result.seconds,
                "memory (MB)": result.memory_mb,
            }


def _readings(record: Record) -> Iterator[Row]:
    for species in species_of(record):
        for task, result in results_of(record, species):
            for reading in result.readings:
                yield {
                    "what": "reading",
                    "species": species.name,
                    "rung": task.spec.rung,
                    "basis": task.spec.settings.basis,
                    "reading": reading.name,
                    "reading value": _plain(reading.value),
                    "reading unit": reading.unit,
                }


def _plain(value: ReadingValue) -> object:
    if isinstance(value, bool):
        return "yes" if value else "no"
    return " ".join(repr(one) for one in value) if isinstance(value, tuple) else value


def _cell(value: object) -> object:
    """Text that a spreadsheet would take for a formula gets an apostrophe in front."""
    return f"'{value}" if isinstance(value, str) and value[:1] in ("=", "+", "-", "@", "\t") else value
