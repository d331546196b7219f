"""`plumbrule run`: compute what a question file asks, and say what came of it."""

import argparse
from pathlib import Path

from plumbrule_core.documents.amounts import MB_PER_GB, memory
from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.plan import Forecast, Machine, Plan, Task
from plumbrule_core.engine.cache import KEEP_DAYS
from plumbrule_core.exports import Record, words
from plumbrule_core.exports.record_json import record_data
from plumbrule_core.headless.asked import check_output, planned, write_json
from plumbrule_core.headless.endings import ANSWERED, FAILED, STOPPED, TOO_LARGE, print_out, say
from plumbrule_core.headless.forecast import exceeding, say_beforehand
from plumbrule_core.headless.progress import progress_for
from plumbrule_core.headless.stopping import stop_on_signals
from plumbrule_core.headless.tables import outcome_text
from plumbrule_core.session import Session

TICK = 0.2
"""Seconds between two looks at whether the run has ended or a stop was asked for."""


def command(arguments: argparse.Namespace) -> int:
    """Plan, check the forecast, run, report; returns the exit status of the contract."""
    check_output(arguments.json, "--json")
    check_output(arguments.casebook, "--casebook")
    brief, plan, here = planned(arguments.question)
    memory_mb = _memory_mb(arguments.memory, here)
    new = arguments.casebook is None or not arguments.casebook.exists()
    if new and _too_large(plan.tasks, memory_mb, here, arguments.yes):
        return TOO_LARGE
    session = Session.open(arguments.casebook)
    try:
        number = _number_of(session, brief)
        left = _left(session, number, plan)
        if not new and _too_large(left, memory_mb, here, arguments.yes):
            return TOO_LARGE
        say_beforehand(plan.notes, session.check(number))
        outcome = _run(session, number, plan, left, _threads(arguments.threads, here), memory_mb)
        record = session.record(number)
        write_json(arguments.json, record_data(record))
        print_out(outcome_text(record))
        return _ending(outcome, record, arguments.question, arguments.casebook)
    finally:
        session.close()


def _threads(asked: int | None, here: Machine) -> int:
    if asked is not None and asked > here.cores:
        say(f"--threads: {asked} is more than the {here.cores} cores of this machine; {here.cores} are used")
    return min(asked or here.cores, here.cores)


def _memory_mb(asked_gb: float | None, here: Machine) -> float:
    if asked_gb is not None and asked_gb * MB_PER_GB > here.memory_mb:
        there = memory(here.memory_mb)
        say(f"--memory: {asked_gb:g} GB is more than the {there} of this machine; {there} are used")
    return min(asked_gb * MB_PER_GB if asked_gb is not None else here.memory_mb, here.memory_mb)


def _number_of(session: Session, brief: Brief) -> int:
    """The question of the casebook that is equal to this one, else a new one."""
    for entry in session.briefs():
        if entry.brief.digest == brief.digest:
            return entry.id
    return session.add_brief(brief)


def _left(session: Session, number: int, plan: Plan) -> tuple[Task, ...]:
    """The tasks that are to be computed: the casebook holds no result, or one that is not settled."""
    known = {key for key, result in session.record(number).results.items() if result.settled}
    return tuple(task for task in plan.tasks if task.id not in known)


def _sum(tasks: tuple[Task, ...]) -> Forecast | None:
    return Plan(tasks=tasks).forecast


def _too_large(tasks: tuple[Task, ...], memory_mb: float, here: Machine, anyway: bool) -> bool:
    sentences = exceeding(_sum(tasks), memory_mb, here.disk_mb)
    for sentence in sentences:
        say(sentence)
    if sentences and not anyway:
        say("nothing was run; --yes runs it all the same")
    return bool(sentences) and not anyway


def _run(
    session: Session, number: int, plan: Plan, left: tuple[Task, ...], threads: int, memory_mb: float
) -> str | None:
    total = _sum(left)
    if total is not None:
        about, most = words.duration(total.seconds), words.duration(total.seconds_high)
        needed = memory(total.memory_mb)
        say(f"{len(left)} calculations: about {about}, up to {most}, {needed} of memory")
    with progress_for(plan) as progress, stop_on_signals() as stop:
        run = session.run(number, progress.heard, threads=threads, memory_mb=memory_mb)
        asked = False
        while not run.wait(TICK):
            if stop.is_set() and not asked:
                asked = True
                progress.line("stopping; what was checkpointed stays")
                run.stop()
    return run.outcome


def _ending(outcome: str | None, record: Record, question: Path, casebook: Path | None) -> int:
    if outcome == "done":
        return ANSWERED
    carry_on = _carry_on(question, casebook)
    if outcome == "stopped":
        say(f"stopped; {carry_on}")
        return STOPPED
    for task_id, state in record.state.tasks.items():
        if state.state in ("failed", "died"):
            say(f"{record.plan.task(task_id).label} failed: {state.reason}")
    say(f"at least one calculation failed; {carry_on}")
    return FAILED


def _carry_on(question: Path, casebook: Path | None) -> str:
    """What of the work is still there, and the command that goes on from it."""
    if casebook is not None:
        return (
            f"the results that had finished are kept in {casebook}, and "
            f"`plumbrule run {question} --casebook {casebook}` carries on with what is missing"
        )
    advised = question.with_suffix(".plumb")
    return (
        "without --casebook no result is kept; checkpoints of fields and amplitudes stay in the cache for "
        f"up to {KEEP_DAYS} days, so that `plumbrule run {question}` goes on from them, but every step "
        "without a checkpoint, as (T), starts again. To keep what finishes, run "
        f"`plumbrule run {question} --casebook {advised}`"
    )
