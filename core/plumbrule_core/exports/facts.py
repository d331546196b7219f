"""What several exports look up in a record: species, results by content, tasks with their outcome."""

from collections.abc import Iterator
from dataclasses import dataclass
from itertools import count

from plumbrule_core.documents.findings import SpeciesJudgement
from plumbrule_core.documents.plan import Task
from plumbrule_core.documents.results import Result
from plumbrule_core.documents.run_state import TaskState
from plumbrule_core.documents.species import Species
from plumbrule_core.exports.record import Record
from plumbrule_core.rungs import SPACE


@dataclass(frozen=True, slots=True)
class TaskRow:
    """One task with where it stands and what it found."""

    task: Task
    state: TaskState
    result: Result | None

    @property
    def outcome(self) -> str:
        """done, reused, failed, stopped, waiting or running; a worker that died has failed."""
        return "failed" if self.state.state == "died" else self.state.state


def task_rows(record: Record) -> tuple[TaskRow, ...]:
    """Every task of the plan, in the order of the plan."""
    return tuple(
        TaskRow(
            task,
            record.state.tasks.get(task.id) or TaskState(task=task.id),
            record.results.get(task.id),
        )
        for task in record.plan.tasks
    )


def species_of(record: Record) -> tuple[Species, ...]:
    """The species of the question, then the fragments that were cut from them."""
    planned = (task.spec.species for task in record.plan.tasks)
    named = {(one.name, one.content): one for one in record.brief.species}
    known = {one.content for one in record.brief.species}
    cut = {one.content: one for one in planned if one.content not in known}
    return (*named.values(), *cut.values())


def keyed_species(record: Record) -> dict[str, Species]:
    """The species by a key of their own: the name, or `name (2)` where an earlier one has that name.

    A species that the user named like a fragment of a cut is another species, and loses nothing to it.
    """
    found: dict[str, Species] = {}
    names = {one.name for one in species_of(record)}
    for one in species_of(record):
        free = (f"{one.name} ({number})" for number in count(2))
        key = one.name if one.name not in found else next(k for k in free if k not in names | {*found})
        found[key] = one
    return found


def judged_of(record: Record, species: Species) -> SpeciesJudgement | None:
    """What was judged of a species; of two with one name, the one that has its energies."""
    named = [one for one in record.judgement.species if one.name == species.name]
    if sum(one.name == species.name for one in species_of(record)) < 2:
        return next(iter(named), None)
    own = {rung: energy for rungs in energies_of(record, species).values() for rung, energy in rungs.items()}
    return next((one for one in named if dict(one.energies) == own), None)


def results_of(record: Record, species: Species) -> Iterator[tuple[Task, Result]]:
    """What was computed of a species, in the order of the plan."""
    for task in record.plan.tasks:
        result = record.results.get(task.id)
        if result is not None and task.spec.species.content == species.content:
            yield task, result


def energies_of(record: Record, species: Species) -> dict[str, dict[str, float]]:
    """Basis to rung to total energy in hartree, the smaller basis first; detections are left out."""
    found: dict[str, dict[str, float]] = {}
    for task, result in results_of(record, species):
        if task.spec.rung == SPACE:
            continue
        found.setdefault(task.spec.settings.basis, {})[task.spec.rung] = result.energy
    return found


def sentence_of(record: Record) -> str:
    """The question in one sentence, or the title where nothing is asked yet."""
    question = record.brief.question
    if question is None:
        return record.brief.title or "No question is asked yet"
    if record.brief.faults():
        return f"The {question.label}, within {question.within:g} {question.unit}"
    return "".join(clause.text for clause in question.sentence(record.brief.by_name))
