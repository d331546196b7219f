"""The state of a run is a pure fold over its events."""

import time

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from plumbrule_core.documents.events import (
    Checkpoint,
    Failed,
    Finished,
    Hello,
    Iteration,
    Log,
    Measured,
    Progress,
    Started,
    TaskStopped,
)
from plumbrule_core.documents.plan import Forecast, Plan, Settings, Task, TaskSpec
from plumbrule_core.documents.results import Reading, Result
from plumbrule_core.documents.run_state import RunState
from plumbrule_core.documents.species import Atom, Species
from plumbrule_core.fold import LOG_LINES, TRACE_POINTS, begin, fold


def plan_of(*rungs: str) -> Plan:
    species = Species(name="he", atoms=(Atom(symbol="He", x=0.0, y=0.0, z=0.0),))
    cost = Forecast(seconds=1, seconds_low=1, seconds_high=1, memory_mb=1)
    specs = [
        TaskSpec(species=species, rung=r, settings=Settings(basis="cc-pVDZ"), versions="") for r in rungs
    ]
    return Plan(
        tasks=tuple(Task(id=r, spec=s, chain="he", forecast=cost) for r, s in zip(rungs, specs, strict=True))
    )


def result(task: str) -> Result:
    return Result(
        task=task,
        species="he",
        rung=task,
        basis="cc-pVDZ",
        level="",
        energy=-2.8,
        seconds=1.0,
        memory_mb=9.0,
        reference="RHF",
        readings=(Reading(name="T1", value=0.01),),
    )


PLAN = plan_of("HF", "CCSD")


def folded(*events) -> RunState:
    state = begin(PLAN)
    for event in events:
        state = fold(state, event)
    return state


def test_at_first_every_task_waits():
    assert [t.state for t in begin(PLAN).tasks.values()] == ["waiting", "waiting"]


def test_a_task_runs_and_is_done_with_its_trace_and_result():
    state = folded(
        Hello(seq=0, protocol=1, versions={}),
        Started(seq=1, task="HF"),
        Iteration(seq=2, task="HF", n=1, energy=-2.7, residual=0.1),
        Iteration(seq=3, task="HF", n=2, energy=-2.8, stage="second order"),
        Checkpoint(seq=4, task="HF", what="orbitals"),
        Measured(seq=5, task="HF", reading=Reading(name="T1", value=0.01)),
        Log(seq=6, task="HF", text="a line"),
        Finished(seq=7, task="HF", result=result("HF")),
    )
    task = state.tasks["HF"]
    assert (task.state, task.fraction, state.seq) == ("done", 1.0, 7)
    assert task.trace == ((1, -2.7, 0.1), (2, -2.8, None))
    assert task.what == "second order"
    assert task.log == ("a line",)
    assert task.result == result("HF")
    assert task.readings == result("HF").readings
    assert state.tasks["CCSD"].state == "waiting"


@pytest.mark.parametrize(
    ("event", "state", "reason"),
    [
        (Failed(seq=2, task="HF", reason="why"), "failed", "why"),
        (Failed(seq=2, task="HF", reason="why", died=True), "died", "why"),
        (TaskStopped(seq=2, task="HF"), "stopped", "stopped by the user"),
        (Finished(seq=2, task="HF", result=result("HF"), reused=True), "reused", ""),
    ],
)
def test_done_stopped_failed_and_died_are_four_different_words(event, state, reason):
    task = folded(Started(seq=1, task="HF"), event).tasks["HF"]
    assert (task.state, task.reason) == (state, reason)


def test_an_event_that_was_folded_in_before_changes_nothing():
    once = folded(Started(seq=0, task="HF"), Log(seq=1, task="HF", text="a"))
    assert fold(once, Log(seq=1, task="HF", text="a")) is once
    assert fold(once, Started(seq=0, task="HF")) is once


def test_an_event_of_no_task_of_the_plan_only_counts():
    state = folded(Log(seq=4, task="elsewhere", text="a"))
    assert state.tasks == begin(PLAN).tasks
    assert state.seq == 4


def test_the_state_before_stays_as_it_was():
    before = folded(Started(seq=0, task="HF"))
    fold(before, Failed(seq=1, task="HF", reason="x"))
    assert before.tasks["HF"].state == "running"


def test_progress_keeps_what_was_said_last():
    task = folded(
        Progress(seq=0, task="HF", fraction=0.2, what="triples"), Progress(seq=1, task="HF", fraction=0.4)
    ).tasks["HF"]
    assert (task.fraction, task.what) == (0.4, "triples")


def test_carrying_on_keeps_the_trace_and_starting_afresh_clears_it():
    begun = (Started(seq=0, task="HF"), Iteration(seq=1, task="HF", n=1, energy=-2.0))
    carried = folded(*begun, Started(seq=2, task="HF", resumed_from="the checkpoint")).tasks["HF"]
    afresh = folded(*begun, Started(seq=2, task="HF")).tasks["HF"]
    assert (len(carried.trace), carried.resumed_from) == (1, "the checkpoint")
    assert (afresh.trace, afresh.resumed_from) == ((), "")


def test_log_and_trace_are_bounded_and_keep_the_last():
    state = begin(PLAN)
    for n in range(LOG_LINES + 10):
        state = fold(state, Log(seq=n, task="HF", text=str(n)))
    for n in range(TRACE_POINTS + 10):
        state = fold(state, Iteration(seq=10_000 + n, task="HF", n=n, energy=-1.0))
    task = state.tasks["HF"]
    assert (len(task.log), task.log[-1]) == (LOG_LINES, str(LOG_LINES + 9))
    assert (len(task.trace), task.trace[-1][0]) == (TRACE_POINTS, TRACE_POINTS + 9)


def test_thousands_of_events_are_folded_in_a_moment():
    plan = plan_of(*(f"task {n}" for n in range(60)))
    state = begin(plan)
    begun = time.process_time()
    for n in range(5000):
        state = fold(state, Iteration(seq=n, task=f"task {n % 60}", n=n, energy=-1.0))
    assert time.process_time() - begun < 1.0


def test_the_state_comes_back_from_its_json():
    state = folded(Started(seq=0, task="HF"), Finished(seq=1, task="HF", result=result("HF")))
    assert RunState.from_json(state.to_json()) == state


@given(
    st.lists(
        st.sampled_from(
            [
                lambda n: Started(seq=n, task="HF"),
                lambda n: Iteration(seq=n, task="HF", n=n, energy=-1.0),
                lambda n: Log(seq=n, task="CCSD", text=str(n)),
                lambda n: Failed(seq=n, task="HF", reason="x"),
                lambda n: Finished(seq=n, task="CCSD", result=result("CCSD")),
            ]
        ),
        max_size=20,
    )
)
@settings(max_examples=30, deadline=None)
def test_hearing_a_stream_twice_is_hearing_it_once(makers):
    events = [make(n) for n, make in enumerate(makers)]
    assert folded(*events, *events) == folded(*events)
