"""Progress on standard error: one bar on a terminal, plain lines otherwise."""

import shutil
import sys
from collections.abc import Iterator
from contextlib import contextmanager
from typing import Protocol, TextIO

from plumbrule_core.documents.events import Event, Failed, Finished, Log, Started, TaskStopped
from plumbrule_core.documents.plan import Plan
from plumbrule_core.documents.run_state import TaskState
from plumbrule_core.exports import words
from plumbrule_core.fold import begin, fold

BAR = 24


class Progress(Protocol):
    """How the events of a run are shown."""

    def heard(self, event: Event) -> None:
        """Show one event."""

    def line(self, text: str) -> None:
        """Show a line of the command's own."""


@contextmanager
def progress_for(plan: Plan) -> Iterator[Progress]:
    """The way that fits standard error, cleared at the end."""
    shown = Bars(plan, sys.stderr) if sys.stderr.isatty() else Lines(plan, sys.stderr)
    yield shown
    if isinstance(shown, Bars):
        shown.clear()


class Lines:
    """One line for each task that begins, ends or has something to say."""

    def __init__(self, plan: Plan, stream: TextIO) -> None:
        self._labels = {task.id: task.label for task in plan.tasks}
        self._stream = stream

    def heard(self, event: Event) -> None:
        """A line, or nothing for what happens many times a second."""
        said = sentence(event)
        if said and event.task in self._labels:
            self.line(f"{self._labels[event.task]}: {said}")

    def line(self, text: str) -> None:
        """The line as it is."""
        self._stream.write(text + "\n")
        self._stream.flush()


class Bars:
    """One line that moves: how many tasks are done, which one runs and where it stands."""

    def __init__(self, plan: Plan, stream: TextIO) -> None:
        self._labels = {task.id: task.label for task in plan.tasks}
        self._state = begin(plan)
        self._stream = stream

    def heard(self, event: Event) -> None:
        """Fold the event in and draw the line anew; what is worth keeping scrolls up above it."""
        self._state = fold(self._state, event)
        said = sentence(event)
        if said and event.task in self._labels and not isinstance(event, Started):
            self.line(f"{self._labels[event.task]}: {said}")
        self._draw(event.task)

    def line(self, text: str) -> None:
        """A line above the bar."""
        self.clear()
        self._stream.write(text + "\n")
        self._stream.flush()

    def clear(self) -> None:
        """Leave an empty line where the bar was."""
        self._stream.write("\r\x1b[K")
        self._stream.flush()

    def _draw(self, task_id: str) -> None:
        states = self._state.tasks
        over = sum(task.state not in ("waiting", "running") for task in states.values())
        full = BAR * over // max(len(states), 1)
        task = states.get(task_id)
        now = f" {self._labels[task_id]}{_where(task)}" if task is not None else ""
        text = f"[{'#' * full}{'-' * (BAR - full)}] {over}/{len(states)}{now}"
        self._stream.write("\r\x1b[K" + text[: shutil.get_terminal_size().columns - 1])
        self._stream.flush()


def _where(task: TaskState) -> str:
    if not task.trace:
        return f" {task.fraction:.0%} {task.what}" if task.fraction else ""
    number, energy, residual = task.trace[-1]
    rest = f", residual {residual:.1e}" if residual is not None else ""
    return f" iteration {number}, {energy:.8f} hartree{rest}"


def sentence(event: Event) -> str:
    """What is worth a line of its own, in words; empty for the rest."""
    match event:
        case Started():
            return f"begins, from {event.resumed_from}" if event.resumed_from else "begins"
        case Finished():
            energy = f"{event.result.energy:.8f} hartree"
            how = "known already" if event.reused else f"done in {words.duration(event.result.seconds)}"
            return f"{energy}, {how}"
        case Failed():
            return f"failed: {event.reason}"
        case TaskStopped():
            return "stopped"
        case Log():
            return event.text
        case _:
            return ""
