"""The machine-readable outcome that `run` and `show` write; a quantity that was not computed is absent."""

from typing import Any

from plumbrule_core import __version__
from plumbrule_core.documents.amounts import gigabytes
from plumbrule_core.documents.findings import Finding
from plumbrule_core.documents.species import Species
from plumbrule_core.exports.facts import (
    TaskRow,
    energies_of,
    judged_of,
    keyed_species,
    results_of,
    sentence_of,
    task_rows,
)
from plumbrule_core.exports.record import Record
from plumbrule_core.exports.space_json import array_of, space_data

Data = dict[str, Any]


def record_data(record: Record) -> Data:
    """One question with its outcome as plain JSON values.

    Energies of species in hartree; answer, comparison and budget in the question's unit.
    """
    judgement, question = record.judgement, record.brief.question
    keyed = keyed_species(record)
    key_of = {one.content: key for key, one in reversed(keyed.items())}
    told = _present(
        title=record.brief.title,
        answer=judgement.answer.to_data() if judgement.answer is not None else {},
        notes=list(record.plan.notes),
        faults=[fault.to_data() for fault in record.plan.faults],
    )
    return {
        "plumbrule": __version__,
        "question": question.to_data() if question is not None else {},
        "sentence": sentence_of(record),
        "verdict": judgement.verdict.to_data(),
        "comparison": [line.to_data() for line in judgement.comparison],
        "budget": [line.to_data() for line in judgement.budget],
        "findings": [finding_data(finding) for finding in judgement.findings],
        "species": {key: _species(record, one) for key, one in keyed.items()},
        "tasks": [_task(row, key_of[row.task.spec.species.content]) for row in task_rows(record)],
        "provenance": _provenance(record),
    } | told


def finding_data(finding: Finding) -> Data:
    """A finding with its remedies as the labels that a person reads."""
    return finding.to_data() | {"remedies": [remedy.label for remedy in finding.remedies]}


def atoms_data(species: Species) -> list[list[str | float]]:
    """`["N", x, y, z]` for every atom, in angstrom."""
    return [[atom.symbol, atom.x, atom.y, atom.z] for atom in species.atoms]


def _present(**values: Any) -> Data:
    """The values that are there: no None, no empty text, list or table."""
    return {key: value for key, value in values.items() if value not in (None, "", [], {})}


def _species(record: Record, species: Species) -> Data:
    judged = judged_of(record, species)
    by_basis = energies_of(record, species)
    return _present(
        formula=species.formula,
        charge=species.charge,
        multiplicity=species.multiplicity,
        atoms=atoms_data(species),
        origin=species.origin,
        verdict=judged.verdict.to_data() if judged is not None else {},
        energies=by_basis[[*by_basis][-1]] if by_basis else {},
        energies_by_basis=by_basis if len(by_basis) > 1 else {},
        readings={reading.name: reading.value for reading in judged.readings} if judged is not None else {},
        **{"orbitals": _orbitals(record, species), **space_data(record, species)},
    )


def _orbitals(record: Record, species: Species) -> Data:
    """Orbital energies in hartree of the reference at the largest basis, numbered from 1."""
    fields = [result for task, result in results_of(record, species) if task.spec.rung == "HF"]
    energies = array_of(record, fields[-1], "orbital_energies") if fields else None
    if energies is None:
        return {}
    if energies.ndim == 1:
        return {"energies": energies.tolist(), "numbers": list(range(1, len(energies) + 1))}
    up, down = energies.tolist()
    return {"energies_up": up, "energies_down": down, "numbers": list(range(1, len(up) + 1))}


def _task(row: TaskRow, key: str) -> Data:
    result, forecast = row.result, row.task.forecast
    trace = [[value for value in point if value is not None] for point in row.state.trace]
    return {"trace": trace} | _present(
        id=row.task.id,
        species=key,
        rung=row.task.spec.rung,
        basis=row.task.spec.settings.basis,
        state=row.outcome,
        reason=row.state.reason,
        seconds=result.seconds if result is not None else None,
        memory_mb=result.memory_mb if result is not None else None,
        forecast_seconds=forecast.seconds,
        forecast_memory_mb=forecast.memory_mb,
        energy=result.energy if result is not None else None,
        converged=result.converged if result is not None else None,
        iterations=result.iterations if result is not None else None,
        notes=list(result.notes) if result is not None else [],
        used=dict(result.used) if result is not None else {},
    )


def _provenance(record: Record) -> Data:
    levels = {task.spec.settings.basis: task.spec.settings.to_data() for task in record.plan.tasks}
    machine = record.machine
    return _present(
        versions=dict(record.versions),
        machine={"cores": machine.cores, "memory_gb": gigabytes(machine.memory_mb)},
        settings=[*levels.values()][-1] if levels else {},
        settings_by_basis=levels if len(levels) > 1 else {},
        recipe=record.brief.recipe.to_data(),
        citations=list(record.judgement.citations),
    )
