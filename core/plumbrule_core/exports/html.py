"""The report: one HTML page that needs nothing beside it, with its drawings and its question file inside."""

import base64
from collections.abc import Callable, Iterable, Mapping
from typing import Any

from plumbrule_core import __version__
from plumbrule_core.documents.amounts import memory
from plumbrule_core.documents.species import Species, spin_words
from plumbrule_core.exports import figures, words
from plumbrule_core.exports.checks import Check, checks_of, unfinished
from plumbrule_core.exports.facts import (
    energies_of,
    judged_of,
    results_of,
    sentence_of,
    species_of,
    task_rows,
)
from plumbrule_core.exports.record import Record
from plumbrule_core.judgement.wording import bar
from plumbrule_core.question_file import write_question
from plumbrule_resources import text

Context = dict[str, Any]

FILTERS: Mapping[str, Callable[..., str]] = {
    "energy": words.energy,
    "difference": words.difference,
    "hartree": words.hartree,
    "reading": words.reading,
    "source": words.source,
    "remedy": words.remedy,
    "duration": words.duration,
    "memory": memory,
    "bar": bar,
}


class ReportHtml:
    """The report for people: answer and verdict first, then all that another group needs to repeat it."""

    suffix = ".html"
    name = "Report"

    def write(self, record: Record) -> bytes:
        """The page in UTF-8; every text of the user is escaped."""
        from jinja2 import Environment, StrictUndefined

        shelf = Environment(autoescape=True, undefined=StrictUndefined, trim_blocks=True, lstrip_blocks=True)
        shelf.filters.update(FILTERS)
        page = shelf.from_string(text("report.html.j2"))
        return page.render(_context(record)).encode()


def _context(record: Record) -> Context:
    judgement, brief = record.judgement, record.brief
    rows = task_rows(record)
    species = [_species(record, one) for one in species_of(record)]
    return {
        "css": text("report.css"),
        "version": __version__,
        "title": brief.title,
        "sentence": sentence_of(record),
        "target": _target(record),
        "judgement": judgement,
        "level_words": words.LEVEL_WORDS,
        "severity_words": words.SEVERITY_WORDS,
        "reading_words": words.READING_WORDS,
        "said": words.said,
        "answer": _answer(record),
        "meets": judgement.answer.meets_target if judgement.answer is not None else None,
        "unit": brief.question.unit if brief.question is not None else "kJ/mol",
        "pictures": _pictures(record),
        "species": species,
        "limits": _sources(check for part in species for check in part["checks"]),
        "rows": rows,
        "unfinished": unfinished(rows),
        "faults": record.plan.faults,
        "notes": record.plan.notes,
        "settings": _settings(record),
        "versions": record.versions,
        "machine": record.machine,
        "toml": write_question(brief),
    }


def _target(record: Record) -> str:
    question = record.brief.question
    return f"{question.within:g} {question.unit}" if question is not None else ""


def _answer(record: Record) -> str:
    answer = record.judgement.answer
    return words.answer(answer.value, answer.uncertainty, answer.unit) if answer is not None else ""


def _pictures(record: Record) -> dict[str, str]:
    judgement, question = record.judgement, record.brief.question
    drawn = {"plumb": figures.plumb_line(judgement.verdict.level)}
    if question is not None and judgement.comparison:
        drawn["comparison"] = figures.comparison(judgement.comparison, question.unit, question.within)
    if question is not None and judgement.budget:
        drawn["budget"] = figures.budget(judgement.budget, question.unit)
    return {name: _embedded(svg) for name, svg in drawn.items()}


def _embedded(svg: str) -> str:
    return f"data:image/svg+xml;base64,{base64.b64encode(svg.encode()).decode()}"


def _species(record: Record, species: Species) -> Context:
    judged = judged_of(record, species)
    readings = judged.readings if judged is not None else ()
    computed = [result for _, result in results_of(record, species)]
    return {
        "one": species,
        "spin": spin_words(species.multiplicity),
        "verdict": judged.verdict if judged is not None else None,
        "energies": energies_of(record, species),
        "readings": readings,
        "checks": tuple(checks_of(species, readings)),
        "notes": tuple(
            f"{result.rung}/{result.basis}: {note}" for result in computed for note in result.notes
        ),
        "used": computed[0].used if computed else {},
    }


def _sources(checks: Iterable[Check]) -> dict[str, list[str]]:
    """Each source with the readings whose limits it gives, nothing twice."""
    found: dict[str, list[str]] = {}
    for check in checks:
        source = words.source(check.source)
        names = found.setdefault(source, []) if source else []
        word = words.READING_WORDS.get(check.reading, check.reading)
        if word not in names:
            names.append(word)
    return found


def _settings(record: Record) -> tuple[tuple[str, str], ...]:
    """The recipe in words, then what the planner made of it."""
    recipe = record.brief.recipe
    fitted = any(task.spec.settings.density_fitting for task in record.plan.tasks)
    said = [
        ("Basis", recipe.basis_text),
        ("Core electrons", "frozen" if recipe.core == "frozen" else "all correlated"),
        (
            "Reference",
            "RHF for closed shells, UHF for open" if recipe.reference == "auto" else recipe.reference,
        ),
        ("Rungs", ", ".join(recipe.rungs)),
        ("Density fitting", "yes" if fitted else "no"),
        ("Relativity", "none" if recipe.relativity == "none" else "scalar, X2C"),
    ]
    if record.plan.tasks:
        settings = record.plan.tasks[-1].spec.settings
        said += [
            ("Hartree-Fock converged to", f"{settings.scf_tolerance:g} hartree"),
            (
                "Coupled cluster converged to",
                f"{settings.cc_tolerance:g} hartree, residual {settings.cc_residual:g}",
            ),
        ]
    return tuple(said)
