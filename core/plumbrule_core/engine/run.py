"""A run: the chains of a plan, one worker after the other, as one numbered stream of events."""

import logging
import queue
import threading
import time
from collections.abc import Callable, Iterable, Iterator, Mapping
from functools import partial
from itertools import count, groupby
from pathlib import Path
from typing import Literal

from plumbrule_core.documents.events import Event, Failed, Finished, Started
from plumbrule_core.documents.plan import Plan, Task
from plumbrule_core.documents.results import Result
from plumbrule_core.engine.cache import blob_folder, prune, shelf_folder
from plumbrule_core.engine.executor import Executor, Handle, OnEvent
from plumbrule_core.engine.hearing import Ending
from plumbrule_core.engine.order import Known, Order, because_of

Outcome = Literal["done", "failed", "stopped"]
"""All tasks are answered; at least one task failed or its worker died; the user stopped before the end."""

_log = logging.getLogger(__name__)


class Run:
    """A plan on its way. Ends exactly once; `on_event` is called from the run's own thread alone."""

    def __init__(
        self,
        orders: tuple[Order, ...],
        known: tuple[Result, ...],
        executor: Executor,
        on_event: OnEvent,
        tidy: Callable[[], None],
    ) -> None:
        """`run_plan` makes it; `tidy` makes room in the cache before the first order."""
        self._orders = orders
        self._known = known
        self._executor = executor
        self._on_event = on_event
        self._tidy = tidy
        self._numbers = count()
        self._asked_to_stop = False
        self._handle: Handle | None = None
        self._error: Exception | None = None
        self._outcome: Outcome | None = None
        self._failed = False
        self._open = {task.id for order in orders for task in order.open_tasks}
        self._ended = threading.Event()
        self._thread = threading.Thread(target=self._live, name="plumbrule run", daemon=True)
        self._thread.start()

    @property
    def running(self) -> bool:
        """Whether the end is still to come."""
        return not self._ended.is_set()

    @property
    def outcome(self) -> Outcome | None:
        """How it ended, None while it runs."""
        return self._outcome

    def stop(self) -> None:
        """Stop within two seconds; what was checkpointed stays, nothing else starts. Never waits."""
        self._asked_to_stop = True
        # No lock: a start of a process may hold one for long, and the window calls this.
        handle = self._handle
        if handle is not None:
            handle.ask("stop")

    def wait(self, timeout: float | None = None) -> bool:
        """Wait for the end; False where `timeout` seconds were not enough.

        Raises what `on_event` or the executor raised during the run.
        """
        if not self._ended.wait(timeout):
            return False
        if self._error is not None:
            raise self._error
        return True

    def _live(self) -> None:
        try:
            for result in self._known:
                self._tell(Finished(seq=0, task=result.task, result=result, reused=True))
            self._tidy()
            for order in self._orders:
                self._work_off(order)
        except Exception as error:
            _log.exception("the run broke")
            self._error = self._error or error
            self._failed = True
        finally:
            self._outcome = self._judged()
            self._ended.set()

    def _judged(self) -> Outcome:
        if self._asked_to_stop and self._open and self._error is None:
            return "stopped"
        return "failed" if self._failed or self._error else "done"

    def _work_off(self, order: Order) -> None:
        """Until every task is answered; after a death, what does not stand on the dead task goes on."""
        rest: Order | None = order
        while rest is not None and rest.open_tasks and not self._asked_to_stop:
            events: list[Event] = []
            ending = self._hear_out(rest, events.append)
            rest = self._survivors(rest, events) if ending == "died" else None

    def _hear_out(self, order: Order, note: Callable[[Event], None]) -> str:
        heard: queue.SimpleQueue[Event | Ending] = queue.SimpleQueue()
        self._handle = handle = self._executor.submit(order, heard.put, heard.put)
        if self._asked_to_stop:
            # The wish came while the worker was being started, and found no handle.
            handle.ask("stop")
        while not isinstance(said := heard.get(), str):
            if isinstance(said, Started | Finished | Failed):
                note(said)
            self._tell(said)
        self._handle = None
        return said

    def _survivors(self, order: Order, events: Iterable[Event]) -> Order | None:
        """The order without its dead task and all upon it; None where no task had begun when it died."""
        began = {event.task for event in events if isinstance(event, Started)}
        failed = {event.task: event.died for event in events if isinstance(event, Failed)}
        if not any(died and task in began for task, died in failed.items()):
            return None
        found = {event.task: Known.of(event.result) for event in events if isinstance(event, Finished)}
        upon = order.upon(failed)
        lost = {*failed, *(task.id for task in upon)}
        for task in upon:
            if task.id not in order.known:
                below = next(need for need in order.needs(task) if need.id in lost)
                self._tell(Failed(seq=0, task=task.id, reason=because_of(below)))
        return order.without(failed, found)

    def _tell(self, event: Event) -> None:
        if isinstance(event, Finished | Failed):
            self._open.discard(event.task)
        elif isinstance(event, Started):
            self._open.add(event.task)
        self._failed = self._failed or isinstance(event, Failed)
        try:
            self._on_event(event.model_copy(update={"seq": next(self._numbers)}))
        except Exception as error:
            _log.exception("a listener broke at an event: %s", event.event)
            # Computing on while nobody can store what is found would be lost work: checkpoints keep it.
            self._error = self._error or error
            self.stop()


LEAST_MEMORY_MB = 2000.0
ROOM = 2.0
"""A forecast may be short by this factor before the library turns to the disk."""


def run_plan(
    plan: Plan,
    known: Mapping[str, Result],
    executor: Executor,
    on_event: Callable[[Event], None],
    *,
    threads: int,
    memory_mb: float,
    cache: Path,
) -> Run:
    """Start every task of a plan that is not answered in `known` (by task id).

    First every known result is told again as reused; then chain after chain runs in a worker of its own
    with so many threads, and the memory that its forecast asks for, within `memory_mb`. A chain that fails
    stops no other; where a worker dies, a new one goes on with what does not stand on the task that died.
    A known task that is found elsewhere than before is told anew, with all upon it. Checkpoints and
    arrays go to `cache`.
    """
    cache = cache.absolute()
    orders = tuple(
        Order(
            tasks=chain,
            known={task.id: Known.of(known[task.id]) for task in chain if task.id in known},
            threads=threads,
            memory_mb=_memory_for(chain, memory_mb),
            shelf=str(shelf_folder(cache)),
            blobs=str(blob_folder(cache)),
        )
        for chain in _chains(plan)
        if any(task.id not in known for task in chain)
    )
    reused = tuple(known[task.id] for task in plan.tasks if task.id in known)
    tidy = partial(prune, cache, time.time(), keep=[task.id for task in plan.tasks])
    return Run(orders, reused, executor, on_event, tidy)


def _memory_for(chain: Iterable[Task], limit: float) -> float:
    """What a chain may use, in MB: the forecast of its largest task with room to spare, within the limit."""
    return min(limit, max(LEAST_MEMORY_MB, ROOM * max(task.forecast.memory_mb for task in chain)))


def _chains(plan: Plan) -> Iterator[tuple[Task, ...]]:
    """The chains in the order in which the plan first names them."""
    firsts = {task.chain: number for number, task in reversed(list(enumerate(plan.tasks)))}
    ordered = sorted(plan.tasks, key=lambda task: firsts[task.chain])
    for _, tasks in groupby(ordered, key=lambda task: task.chain):
        yield tuple(tasks)
