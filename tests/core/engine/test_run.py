"""A run works chain after chain off, as one numbered stream of events."""

import threading
import time
from typing import ClassVar

import pytest

from plumbrule_core.documents.events import Failed, Finished, Iteration, Log, Started
from plumbrule_core.documents.plan import Plan
from plumbrule_core.engine import run_plan
from plumbrule_core.fold import begin, fold


@pytest.fixture
def start(fake, tmp_path):
    def make(heard, *tasks, known=None, executor=fake):
        return run_plan(
            Plan(tasks=tasks), known or {}, executor, heard, threads=1, memory_mb=500.0, cache=tmp_path
        )

    return make


def test_every_chain_gets_a_worker_of_its_own_and_events_one_numbering(task, heard, start):
    a = task("quick", name="water")
    b = task("quick", name="ice")
    c = task("upon", a, name="water")
    run = start(heard, a, b, c)
    assert run.wait(30)
    assert run.outcome == "done"
    assert not run.running
    assert [e.seq for e in heard.events] == list(range(len(heard.events)))
    assert [e.task for e in heard.of(Finished)] == [a.id, c.id, b.id]


def test_events_come_from_one_thread_alone(task, heard, start):
    threads = set()

    def note(event):
        threads.add(threading.get_ident())
        heard(event)

    known = {}
    start(heard, task("quick")).wait(30)
    known = {e.task: e.result for e in heard.of(Finished)}
    run = start(note, task("quick"), task("quick", name="ice"), known=known)
    assert run.wait(30)
    assert len(threads) == 1
    assert threading.get_ident() not in threads


def test_known_results_are_told_first_as_reused_and_not_computed(task, heard, start):
    a = task("quick")
    b = task("upon", a)
    assert start(heard, a).wait(30)
    again = type(heard)()
    run = start(again, a, b, known={a.id: heard.of(Finished)[0].result})
    assert run.wait(30)
    assert again.events[0].event == "result"
    assert again.events[0].reused
    assert [e.task for e in again.of(Started)] == [b.id]
    assert [e.reused for e in again.of(Finished)] == [True, False]


def test_where_all_is_known_no_worker_is_started(task, heard, start):
    class Never:
        def submit(self, order, on_event, on_end=None):
            raise AssertionError("a worker was started")

    a = task("quick")
    assert start(heard, a).wait(30)
    run = start(type(heard)(), a, known={a.id: heard.of(Finished)[0].result}, executor=Never())
    assert run.wait(5)
    assert run.outcome == "done"


def test_a_chain_that_dies_or_fails_stops_no_other(task, heard, start):
    dead, waits = task("killed", name="a"), task("quick", name="a", chain="a")
    bad = task("refuses", name="b")
    good = task("quick", name="c")
    run = start(heard, dead, waits, bad, good)
    assert run.wait(30)
    assert run.outcome == "failed"
    state = begin(Plan(tasks=(dead, waits, bad, good)))
    for event in heard.events:
        state = fold(state, event)
    assert [state.tasks[t.id].state for t in (dead, waits, bad, good)] == [
        "died",
        "waiting",
        "failed",
        "done",
    ]


def test_a_dead_worker_is_not_started_again_by_itself(task, heard, start):
    run = start(heard, task("killed"))
    assert run.wait(30)
    assert len(heard.of(Started)) == 1
    assert len(heard.of(Failed)) == 1


def test_after_stop_nothing_else_starts_and_the_rest_waits(task, heard, start):
    first, second, other = task("slow"), task("quick"), task("quick", name="ice")
    run = start(heard, first, second, other)
    heard.until(lambda e: isinstance(e, Iteration))
    begun = time.monotonic()
    run.stop()
    assert run.wait(2)
    assert time.monotonic() - begun < 2
    assert run.outcome == "stopped"
    assert [e.task for e in heard.of(Started)] == [first.id]
    assert heard.kinds(first)[-1] == "stopped"


def test_a_stopped_run_carries_on_with_what_is_missing(task, heard, start):
    quick, slow = task("quick"), task("slow")
    run = start(heard, quick, slow)
    heard.until(lambda e: isinstance(e, Iteration) and e.task == slow.id and e.n == 10)
    run.stop()
    assert run.wait(2)
    known = {e.task: e.result for e in heard.of(Finished)}
    assert list(known) == [quick.id]
    again = type(heard)()
    run = start(again, quick, slow, known=known)
    assert run.wait(30)
    assert run.outcome == "done"
    assert again.of(Iteration)[0].n >= 10


def test_stop_may_be_called_from_the_listener_and_before_the_first_worker(task, heard, start):
    def stop_at_once(event):
        heard(event)
        ready.wait()
        holder[0].stop()

    ready, holder = threading.Event(), []
    holder.append(start(stop_at_once, task("slow")))
    ready.set()
    assert holder[0].wait(5)
    assert holder[0].outcome == "stopped"


def test_a_listener_that_breaks_stops_the_run_and_is_raised_at_wait(task, heard, start, caplog):
    def breaks(event):
        heard(event)
        if isinstance(event, Iteration):
            raise OSError("the casebook's disk is full")

    run = start(breaks, task("slow"))
    with pytest.raises(OSError, match="the casebook's disk is full"):
        run.wait(10)
    assert run.outcome == "failed"
    assert "a listener broke at an event" in caplog.text
    assert heard.events[-1].event == "stopped"


def test_an_executor_that_breaks_is_raised_at_wait(task, heard, start, caplog):
    class Broken:
        def submit(self, order, on_event, on_end=None):
            raise ConnectionError("nobody answers")

    run = start(heard, task("quick"), executor=Broken())
    with pytest.raises(ConnectionError, match="nobody answers"):
        run.wait(5)
    assert run.outcome == "failed"
    assert "the run broke" in caplog.text


def test_a_run_that_is_not_over_says_so_at_wait(task, heard, start):
    run = start(heard, task("absorbed"))
    heard.until(lambda e: isinstance(e, Log))
    assert not run.wait(0.05)
    assert run.running
    assert run.outcome is None
    run.stop()
    assert run.wait(2)


def test_a_chain_gets_the_memory_of_its_forecast_with_room_within_the_limit(task, fake, tmp_path):
    class Noting:
        orders: ClassVar = []

        def submit(self, order, on_event, on_end=None):
            self.orders.append(order)
            return fake.submit(order, on_event, on_end)

    large = task("quick")
    large = large.model_copy(update={"forecast": large.forecast.model_copy(update={"memory_mb": 3000.0})})
    for limit, given in ((24000.0, 6000.0), (4000.0, 4000.0)):
        run = run_plan(
            Plan(tasks=(large,)), {}, Noting(), lambda e: None, threads=1, memory_mb=limit, cache=tmp_path
        )
        assert run.wait(30)
        assert Noting.orders[-1].memory_mb == given
