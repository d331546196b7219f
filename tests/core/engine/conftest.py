"""Tasks, orders and misbehaving workers; every test must leave no process and no thread behind."""

import ctypes
import sys
import threading
import time
from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from pathlib import Path

import psutil
import pytest

from plumbrule_core.documents.events import Event, Failed
from plumbrule_core.documents.plan import Forecast, Settings, Task, TaskSpec
from plumbrule_core.documents.species import Atom, Species
from plumbrule_core.engine import LocalExecutor, Order
from plumbrule_core.engine.order import Known

FAKE_WORKER = Path(__file__).parent / "fake_worker.py"
WATER = (("O", 0.0, 0.0, 0.117), ("H", 0.0, 0.757, -0.467), ("H", 0.0, -0.757, -0.467))
_PR_SET_CHILD_SUBREAPER = 36


@pytest.fixture(autouse=True)
def nothing_left_behind() -> Iterator[None]:
    """Orphans of workers become children of this process, so that none can hide."""
    if sys.platform == "linux":
        ctypes.CDLL(None).prctl(_PR_SET_CHILD_SUBREAPER, 1)
    threads, processes = set(threading.enumerate()), set(psutil.Process().children(recursive=True))
    yield
    left = [p for p in psutil.Process().children(recursive=True) if p not in processes]
    _, alive = psutil.wait_procs(left, timeout=2)
    assert not alive, f"processes left behind: {alive}"
    ends = time.monotonic() + 2
    while (late := set(threading.enumerate()) - threads) and time.monotonic() < ends:
        next(iter(late)).join(0.1)
    assert not late, f"threads left behind: {late}"


def _task(rung: str, *needs: Task, name: str = "water", chain: str = "", basis: str = "STO-3G") -> Task:
    atoms = tuple(Atom(symbol=s, x=x, y=y, z=z) for s, x, y, z in WATER)
    spec = TaskSpec(
        species=Species(name=name, atoms=atoms, charge=0),
        rung=rung,
        settings=Settings(basis=basis),
        versions=f"test {chain}",
    )
    cost = Forecast(seconds=1, seconds_low=0.5, seconds_high=2, memory_mb=100)
    return Task(
        id=spec.identity,
        spec=spec,
        needs=tuple(t.spec.rung for t in needs),
        chain=chain or name,
        forecast=cost,
    )


@pytest.fixture
def task() -> Callable[..., Task]:
    """`task(rung, *needs, name=..., chain=...)`."""
    return _task


@pytest.fixture
def order(tmp_path: Path) -> Callable[..., Order]:
    """`order(*tasks, known=())`; known tasks were found at the fake worker's energy, or as `stored` says."""

    def make(
        *tasks: Task,
        known: Sequence[Task] = (),
        stored: Mapping[str, Known] | None = None,
        threads: int = 1,
    ) -> Order:
        return Order(
            tasks=tasks,
            known={t.id: Known(energy=-76.0) for t in known} | dict(stored or {}),
            threads=threads,
            memory_mb=500.0,
            shelf=str(tmp_path / "shelf"),
            blobs=str(tmp_path / "blobs"),
        )

    return make


@dataclass
class Heard:
    """The events of one worker or run, and a bell for each."""

    events: list[Event] = field(default_factory=list)
    endings: list[str] = field(default_factory=list)
    rung: threading.Condition = field(default_factory=threading.Condition)

    def __call__(self, event: Event) -> None:
        with self.rung:
            self.events.append(event)
            self.rung.notify_all()

    def end(self, ending: str) -> None:
        self.endings.append(ending)

    def kinds(self, task: Task) -> list[str]:
        return [e.event for e in self.events if e.task == task.id]

    def of(self, kind: type) -> list:
        return [e for e in self.events if isinstance(e, kind)]

    def reasons(self) -> list[str]:
        return [e.reason for e in self.of(Failed)]

    def until(self, wanted: Callable[[Event], bool], timeout: float = 20.0) -> Event:
        """The first event that is wanted, waiting for it."""
        with self.rung:
            assert self.rung.wait_for(lambda: any(map(wanted, self.events)), timeout), self.events
            return next(filter(wanted, self.events))


@pytest.fixture
def heard() -> Heard:
    return Heard()


@pytest.fixture
def fake() -> LocalExecutor:
    """The real worker with rungs that misbehave."""
    return LocalExecutor((sys.executable, str(FAKE_WORKER)))


_RAW = """
import json, os, signal, sys, time
first = {first!r}
def say(kind, **fields):
    fields = {{"seq": 0, "event": kind, "task": first, **fields}}
    sys.stdout.write(json.dumps(fields) + chr(10)); sys.stdout.flush()
def hello(protocol=1):
    say("hello", task="", protocol=protocol, versions={{}})
"""


@pytest.fixture
def raw(tmp_path: Path) -> Callable[[str, Task], LocalExecutor]:
    """A worker that is a script of its own: `raw(body, first task)`."""

    def make(body: str, first: Task) -> LocalExecutor:
        script = tmp_path / "raw_worker.py"
        script.write_text(_RAW.format(first=first.id) + body)
        return LocalExecutor((sys.executable, str(script)))

    return make
