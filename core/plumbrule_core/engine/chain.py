"""Answers the tasks of one chain, one after the other, on one bench, and says what happens."""

import errno
import math
import threading
import time
import traceback
from collections.abc import Callable, Iterable, Mapping
from pathlib import Path

from plumbrule_core.documents.events import Failed, Finished, Log, Measured, Started, TaskStopped
from plumbrule_core.documents.plan import Task, TaskSpec
from plumbrule_core.documents.results import Reading, Result
from plumbrule_core.engine.answers import Answers
from plumbrule_core.engine.blobs import save_array
from plumbrule_core.engine.order import Order, because_of
from plumbrule_core.engine.own_process import PeakMemory
from plumbrule_core.engine.shelf import FolderShelf, ignore
from plumbrule_core.engine.speaking import Silent, Speaker, Teller
from plumbrule_core.errors import PlumbruleError, Stopped
from plumbrule_core.rungs.protocol import Bench, Given, Outcome, Rung, Tell

Take = Callable[[str, Bench, TaskSpec], Iterable[Reading]]
"""Takes every reading that a rung yields, by its name, right after it was computed."""


class _Moved(Exception):
    """A rung below was found elsewhere than before: it must be told anew before the task can go on."""


class Chain:
    """One order on its way; `run` ends when every task is answered, or the user asked to stop."""

    def __init__(
        self,
        order: Order,
        rungs: Mapping[str, Rung],
        take: Take,
        versions: Mapping[str, str],
        speaker: Speaker,
        asked_to_stop: threading.Event,
    ) -> None:
        self._order = order
        self._rungs = rungs
        self._take = take
        self._versions = versions
        self._speaker = speaker
        self._asked_to_stop = asked_to_stop
        self._bench = Bench()
        self._computed: set[str] = set()
        self._failed: set[str] = set()
        self._told: set[str] = set()
        self._answers = Answers(order)
        self._moved: dict[str, str] = {}

    def run(self) -> None:
        """Every open task in turn; a failed one stops those that need it, and no other."""
        while not self._asked_to_stop.is_set() and (task := self._next()) is not None:
            self._answer(task)

    def _next(self) -> Task | None:
        tasks = self._order.tasks
        return next((task for task in tasks if task.id not in self._told and task not in self._answers), None)

    def _answer(self, task: Task) -> None:
        missing = next((need for need in self._order.needs(task) if need.id in self._failed), None)
        if missing is not None:
            self._fail(task, because_of(missing))
            return
        shelf = FolderShelf(Path(self._order.shelf), task.id)
        resumed_from = f"the checkpoint of {shelf.written}" if shelf.written else ""
        self._speaker.say(Started, task=task.id, resumed_from=resumed_from)
        teller = Teller(self._speaker, task.id, self._asked_to_stop)
        try:
            self._stand_on(task, teller)
            result = self._measured(task, teller)
            teller.close()
            self._speaker.say(Finished, task=task.id, result=result)
            self._told.add(task.id)
            self._answers.settle(task, result.energy)
        except _Moved:
            teller.close()
        except Stopped:
            teller.close()
            self._told.add(task.id)
            self._speaker.say(TaskStopped, task=task.id)
        # A library may also call exit(): no fault of one task may cost the others.
        except (Exception, SystemExit) as error:
            teller.close()
            self._fail(task, self._words(task, error))

    def _fail(self, task: Task, reason: str) -> None:
        self._failed.add(task.id)
        self._told.add(task.id)
        self._speaker.say(Failed, task=task.id, reason=reason)

    def _stand_on(self, task: Task, teller: Teller) -> None:
        """Compute again what this task needs and an earlier run has answered; raises _Moved."""
        for need in self._order.needs(task):
            if need.id in self._computed:
                continue
            self._stand_on(need, teller)
            teller.note(f"{need.spec.rung} is known already; it is loaded again because this needs it")
            try:
                outcome = self._computed_outcome(need, Silent(self._asked_to_stop), ignore)
            except PlumbruleError as error:
                self._failed.add(need.id)
                raise PlumbruleError(
                    f"{need.label}, which this needs, could not be loaded again: {error}"
                ) from error
            if moved := self._answers.moved(need, float(outcome.energy)):
                self._moved[need.id] = moved
                raise _Moved

    def _computed_outcome(self, task: Task, tell: Tell, say: Callable[[str], None]) -> Outcome:
        rung = self._rungs.get(task.spec.rung)
        if rung is None:
            raise PlumbruleError(
                f"this program has no rung '{task.spec.rung}'; it has {', '.join(self._rungs)}"
            )
        given = Given(
            spec=task.spec,
            bench=self._bench,
            shelf=FolderShelf(Path(self._order.shelf), task.id, say),
            threads=self._order.threads,
            memory_mb=self._order.memory_mb,
        )
        outcome = rung.compute(given, tell)
        if not math.isfinite(outcome.energy):
            raise PlumbruleError(
                f"the energy came out as {outcome.energy}, which is no number; check the geometry for atoms "
                "that lie on each other, or choose another basis or reference"
            )
        self._bench.outcomes[task.spec.rung] = outcome
        self._computed.add(task.id)
        return outcome

    def _measured(self, task: Task, teller: Teller) -> Result:
        memory, begun = PeakMemory(), time.perf_counter()
        moved = (self._moved[task.id],) if task.id in self._moved else ()
        for text in moved:
            teller.note(text)
        outcome = self._computed_outcome(task, teller, teller.log)
        readings, broken = self._readings(task)
        blobs = Path(self._order.blobs)
        spec = task.spec
        return Result(
            task=task.id,
            species=spec.species.name,
            rung=spec.rung,
            basis=spec.settings.basis,
            level=spec.settings.level,
            energy=float(outcome.energy),
            correlation=None if outcome.correlation is None else float(outcome.correlation),
            converged=bool(outcome.converged),
            iterations=int(outcome.iterations),
            reference=outcome.reference,
            readings=readings,
            unchecked=bool(broken),
            arrays={name: save_array(blobs, array) for name, array in outcome.arrays.items()},
            notes=(*moved, *outcome.notes, *broken),
            used={**self._versions, "threads": str(self._order.threads), **outcome.used},
            space=outcome.space,
            growth=outcome.growth,
            stands_on={need.spec.rung: self._energy(need) for need in self._order.needs(task)},
            seconds=time.perf_counter() - begun,
            memory_mb=memory.mb(),
        )

    def _energy(self, task: Task) -> float:
        return float(self._bench.outcomes[task.spec.rung].energy)

    def _readings(self, task: Task) -> tuple[tuple[Reading, ...], tuple[str, ...]]:
        """The readings, or a note why there are none: a reading that breaks must not cost the energy."""
        try:
            readings = tuple(self._take(task.spec.rung, self._bench, task.spec))
            for reading in readings:
                self._speaker.say(Measured, task=task.id, reading=reading)
        except Exception as error:
            traceback.print_exc()
            note = f"the readings could not be taken ({_one_line(error)}), so the energy stands unchecked"
            self._speaker.say(Log, task=task.id, text=note)
            return (), (note,)
        return readings, ()

    def _words(self, task: Task, error: BaseException) -> str:
        if isinstance(error, PlumbruleError):
            return str(error)
        traceback.print_exception(error)
        if isinstance(error, MemoryError):
            return (
                f"memory ran out (the task may use {self._order.memory_mb:.0f} MB): close other programs, "
                "choose a smaller basis, or turn density fitting on"
            )
        if isinstance(error, OSError) and error.errno in (errno.ENOSPC, errno.EDQUOT):
            return f"the disk is full where {self._order.shelf} is: free some space and run again to carry on"
        return f"{task.spec.rung} broke: {_one_line(error)} (details in {self._order.log_file})"


def _one_line(error: BaseException) -> str:
    text = " ".join(str(error).split())[:500]
    return f"{type(error).__name__}: {text}" if text else type(error).__name__
