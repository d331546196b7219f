"""Plain text for standard output: aligned tables and the outcome of a question."""

import textwrap
from collections.abc import Iterator, Sequence

from plumbrule_core.documents.amounts import memory
from plumbrule_core.documents.findings import Verdict
from plumbrule_core.documents.plan import Forecast, Task
from plumbrule_core.documents.questions import EnergyQuestion
from plumbrule_core.exports import Record, words
from plumbrule_core.exports.facts import energies_of, sentence_of, species_of

WIDTH = 100


def table(headers: Sequence[str], rows: Sequence[Sequence[str]], words_first: int = 1) -> str:
    """Columns two spaces apart: the first `words_first` to the left, numbers to the right."""
    widths = [max(len(line[place]) for line in (headers, *rows)) for place in range(len(headers))]

    def line(cells: Sequence[str]) -> str:
        placed = (
            cell.ljust(width) if place < words_first else cell.rjust(width)
            for place, (cell, width) in enumerate(zip(cells, widths, strict=True))
        )
        return "  ".join(placed).rstrip()

    return "\n".join([line(headers), *(line(row) for row in rows)])


def outcome_text(record: Record) -> str:
    """The question, its answer rung by rung, the verdict, the findings and the total energies."""
    return "\n\n".join(part for part in _outcome(record) if part)


def _outcome(record: Record) -> Iterator[str]:
    judgement = record.judgement
    yield sentence_of(record)
    yield _comparison(record)
    yield "\n".join((_answer(record), _verdict(record)))
    yield "\n".join(_finding(one.severity, one.headline, one.consequence) for one in judgement.findings)
    yield _energies(record)


def _comparison(record: Record) -> str:
    question, lines = record.brief.question, record.judgement.comparison
    if question is None or not lines:
        return ""
    places = words.PLACES[question.unit]
    rows = [
        (
            line.rung,
            line.basis,
            f"{line.value:.{places}f}",
            f"{line.from_best:+.{places}f}",
            _mark(line.stopped),
        )
        for line in lines
    ]
    return table(("rung", "basis", question.unit, "from the answer", ""), rows, words_first=2)


def _mark(stopped: bool) -> str:
    return "not to be used" if stopped else ""


def _answer(record: Record) -> str:
    answer, question = record.judgement.answer, record.brief.question
    if answer is None or question is None:
        return "answer: none yet"
    number = words.answer(answer.value, answer.uncertainty, answer.unit).replace("−", "-")
    met = {True: "within", False: "not within", None: "asked for:"}[answer.meets_target]
    # A total energy is compared with nothing, so what was asked for has no part in it.
    unused = isinstance(question, EnergyQuestion) and answer.meets_target is None
    target = "" if unused else f"; {met} {question.within:g} {question.unit}"
    return f"answer: {number} ({answer.rung}, {answer.basis}{target})"


def _verdict(record: Record) -> str:
    verdict = record.judgement.verdict
    return textwrap.fill(f"verdict: {_said(verdict)}", WIDTH, subsequent_indent="  ")


def _said(verdict: Verdict) -> str:
    """The level and its headline, which opens with the level already except where it is unknown."""
    if verdict.headline.lower().startswith(f"{verdict.level}:"):
        return verdict.headline[0].lower() + verdict.headline[1:]
    return f"{verdict.level}: {verdict.headline}" if verdict.headline else verdict.level


def _finding(severity: str, headline: str, consequence: str) -> str:
    return textwrap.fill(f"{severity}: {headline} {consequence}", WIDTH, subsequent_indent="  ")


def _energies(record: Record) -> str:
    rows = [
        (species.name, rung, basis, f"{value:.8f}")
        for species in species_of(record)
        for basis, rungs in energies_of(record, species).items()
        for rung, value in rungs.items()
    ]
    return table(("species", "rung", "basis", "total energy (hartree)"), rows, words_first=3) if rows else ""


def forecast_text(tasks: Sequence[Task], total: Forecast | None) -> str:
    """One line a task and the sum."""
    rows = [
        (task.spec.species.name, task.spec.rung, task.spec.settings.basis, *_price(task.forecast))
        for task in tasks
    ]
    if total is not None:
        rows.append(("in all", "", "", *_price(total)))
    headers = ("species", "rung", "basis", "time", "from", "to", "memory", "disk")
    return table(headers, rows, words_first=3)


def _price(forecast: Forecast) -> tuple[str, str, str, str, str]:
    return (
        words.duration(forecast.seconds),
        words.duration(forecast.seconds_low),
        words.duration(forecast.seconds_high),
        memory(forecast.memory_mb),
        memory(forecast.disk_mb),
    )
