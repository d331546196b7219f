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
    dead, bad, good = task("killed", name="a"), task("refuses", name="b"), task("quick", name="c")
    run = start(heard, dead, bad, good)
    assert run.wait(30)
    assert run.outcome == "failed"
    assert states(heard, dead, bad, good) == ["died", "failed", "done"]


def states(heard, *tasks):
    state = begin(Plan(tasks=tasks))
    for event in heard.events:
        state = fold(state, event)
    return [state.tasks[one.id].state for one in tasks]


def test_after_a_death_what_does_not_stand_on_the_dead_task_is_still_computed(task, heard, start):
    ground = task("quick")
    dead = task("killed", ground)
    lost = task("slow", dead)
    other = task("upon", ground)
    run = start(heard, ground, dead, lost, other)
    assert run.wait(30)
    assert run.outcome == "failed"
    assert states(heard, ground, dead, lost, other) == ["done", "died", "failed", "done"]
    assert "the worker was killed (signal 9)" in heard.reasons()[0]
    assert heard.reasons()[1] == "not run because water: killed/STO-3G failed"
    assert [e.task for e in heard.of(Started)] == [ground.id, dead.id, other.id]
    assert heard.of(Finished)[-1].result.energy == pytest.approx(-76.2)


def test_each_death_costs_its_task_alone_and_a_failed_task_is_not_tried_again(task, heard, start):
    bad, first, second, good = task("refuses"), task("killed"), task("segfaults"), task("quick")
    run = start(heard, bad, first, second, good)
    assert run.wait(30)
    assert states(heard, bad, first, second, good) == ["failed", "died", "died", "done"]
    assert [e.task for e in heard.of(Started)] == [bad.id, first.id, second.id, good.id]


def test_stop_never_waits_for_a_worker_that_is_being_started(task, heard, start, fake):
    begun, go_on = threading.Event(), threading.Event()

    class Slow:
        def submit(self, order, on_event, on_end=None):
            begun.set()
            assert go_on.wait(10)
            return fake.submit(order, on_event, on_end)

    run = start(heard, task("absorbed"), task("quick", name="ice"), executor=Slow())
    assert begun.wait(10)
    asking = threading.Thread(target=run.stop)
    asking.start()
    asking.join(1)
    waited = asking.is_alive()
    go_on.set()
    assert not waited
    assert run.wait(5)
    assert run.outcome == "stopped"
    assert heard.of(Finished) == []


def test_a_known_task_that_ends_elsewhere_is_told_anew_and_what_stood_on_it_too(task, heard, start):
    ground = task("quick")
    above, top = task("upon", ground), task("slow", ground)
    assert start(heard, ground, above).wait(30)
    found = {e.task: e.result for e in heard.of(Finished)}
    other = {
        ground.id: found[ground.id].model_copy(update={"energy": -75.0}),
        above.id: found[above.id].model_copy(update={"energy": -75.2, "stands_on": {"quick": -75.0}}),
    }
    again = type(heard)()
    run = start(again, ground, above, top, known=other)
    assert run.wait(30)
    assert run.outcome == "done"
    last = {e.task: e.result for e in again.of(Finished)}
    assert {key: result.energy for key, result in last.items()} == pytest.approx(
        {ground.id: -76.0, above.id: -76.2, top.id: -76.0}
    )
    words = (
        "quick reached another solution than before: -76.000000 hartree in place of -75.000000 hartree; "
        "what stands on it is computed anew"
    )
    assert last[ground.id].notes[0] == words
    assert words in [e.text for e in again.of(Log)]
    assert last[above.id].stands_on == {"quick": -76.0}
    assert [e.task for e in again.of(Finished) if not e.reused] == [ground.id, above.id, top.id]


def test_a_result_that_is_computed_anew_takes_along_what_stood_on_another_energy(task, heard, start):
    ground = task("quick")
    above = task("upon", ground)
    assert start(heard, ground, above).wait(30)
    stood = {e.task: e.result for e in heard.of(Finished)}[above.id]
    for before, told in ((-75.0, [ground.id, above.id]), (-76.0, [ground.id])):
        again = type(heard)()
        known = {above.id: stood.model_copy(update={"stands_on": {"quick": before}})}
        assert start(again, ground, above, known=known).wait(30)
        assert [e.task for e in again.of(Finished) if not e.reused] == told


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
