"""`plumbrule forecast`: the plan and its price; computes nothing."""

import argparse
from collections.abc import Sequence
from typing import Any

from plumbrule_core import __version__, judgement
from plumbrule_core.documents.amounts import gigabytes, memory
from plumbrule_core.documents.findings import Finding
from plumbrule_core.documents.plan import Forecast, Machine, Task
from plumbrule_core.exports.record_json import finding_data
from plumbrule_core.headless.asked import check_output, planned, write_json
from plumbrule_core.headless.endings import ANSWERED, print_out, say
from plumbrule_core.headless.tables import forecast_text
from plumbrule_core.planning import versions


def command(arguments: argparse.Namespace) -> int:
    """Print the forecast task by task, what was decided and what can be seen before a run."""
    check_output(arguments.json, "--json")
    brief, plan, here = planned(arguments.question)
    total = plan.forecast
    findings = judgement.check(brief, plan, here)
    too_large = exceeding(total, here.memory_mb, here.disk_mb)
    print_out(forecast_text(plan.tasks, total))
    say_beforehand(plan.notes, findings)
    for sentence in too_large:
        say(sentence)
    data: dict[str, Any] = {
        "plumbrule": __version__,
        "question": brief.question.to_data() if brief.question is not None else {},
        "forecast": total.to_data() if total is not None else {},
        "fits": not too_large,
        "tasks": [_task(task) for task in plan.tasks],
        "notes": list(plan.notes),
        "findings": [finding_data(finding) for finding in findings],
        "provenance": {"versions": dict(versions()), "machine": machine_data(here)},
    }
    write_json(arguments.json, data)
    return ANSWERED


def machine_data(machine: Machine) -> dict[str, Any]:
    """What the computer offers, in the words of the JSON output."""
    return {
        "cores": machine.cores,
        "memory_gb": gigabytes(machine.memory_mb),
        "disk_gb": gigabytes(machine.disk_mb),
    }


def say_beforehand(notes: Sequence[str], findings: Sequence[Finding]) -> None:
    """What the planner decided and what can be seen before a run, on standard error."""
    for note in notes:
        say(f"note: {note}")
    for finding in findings:
        say(f"{finding.severity}: {finding.headline} {finding.consequence}")


def exceeding(forecast: Forecast | None, memory_mb: float, disk_mb: float) -> tuple[str, ...]:
    """A sentence for each of memory and disk that the forecast exceeds."""
    if forecast is None:
        return ()
    wanted = (("memory", forecast.memory_mb, memory_mb), ("disk", forecast.disk_mb, disk_mb))
    return tuple(
        f"the forecast needs {memory(needs)} of {what}, but there is {memory(there)}"
        for what, needs, there in wanted
        if needs > there
    )


def _task(task: Task) -> dict[str, Any]:
    forecast = task.forecast
    return {
        "id": task.id,
        "species": task.spec.species.name,
        "rung": task.spec.rung,
        "basis": task.spec.settings.basis,
        "forecast_seconds": forecast.seconds,
        "forecast_seconds_low": forecast.seconds_low,
        "forecast_seconds_high": forecast.seconds_high,
        "forecast_memory_mb": forecast.memory_mb,
        "forecast_disk_mb": forecast.disk_mb,
        "sure": forecast.sure,
    }
