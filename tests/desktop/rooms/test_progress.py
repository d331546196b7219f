from types import SimpleNamespace

import pytest

from plumbrule_core.documents.run_state import RunState, TaskState
from plumbrule_desktop.state.progress import Stopwatch, is_slipping, overall, share
from plumbrule_desktop.state.task_words import state_words, trouble_words


def _plan(made: SimpleNamespace):
    return made.plan_of(made.nitrogen())


def test_a_run_halfway_says_what_is_done_and_about_how_long_is_left(made: SimpleNamespace):
    plan, watch = _plan(made), Stopwatch()
    state = made.state_of(plan, "done", "done", "running")
    watch.follow(state, True, 100.0)
    whole = overall(plan, state, watch, 106.0, True)
    assert (whole.answered, whole.tasks, whole.slipping) == (2, 8, False)
    assert whole.left == pytest.approx(6.0 + 20.0 + 35.0 / 4)
    assert whole.words == "2 of 8 tasks done, 6 s so far, about 35 s left"


def test_a_task_beyond_the_high_end_of_its_forecast_is_slipping(made: SimpleNamespace):
    plan = _plan(made)
    task, state = plan.tasks[2], made.state_of(plan, "done", "done", "running").tasks[plan.tasks[2].id]
    assert not is_slipping(task, state, 23.9)
    assert is_slipping(task, state, 24.1)
    assert not is_slipping(plan.tasks[5], made.state_of(plan, *["running"] * 6).tasks[plan.tasks[5].id], 2.9)


def test_a_run_that_will_end_beyond_the_high_end_of_its_forecast_is_slipping(made: SimpleNamespace):
    plan, watch = _plan(made), Stopwatch()
    state = made.state_of(plan, "done", "done", "running")
    watch.follow(state, True, 0.0)
    assert not overall(plan, state, watch, 30.0, True).slipping
    late = overall(plan, state, watch, 62.0, True)
    assert late.slipping
    assert "slipping" in late.words
    assert late.fraction < 1.0


def test_a_running_task_is_never_shown_as_finished(made: SimpleNamespace):
    plan = _plan(made)
    task = plan.tasks[2]
    assert share(task, TaskState(task=task.id, state="running"), 1e6) < 1.0
    assert share(task, TaskState(task=task.id, state="running", fraction=1.0), 1.0) < 1.0
    assert share(task, TaskState(task=task.id, state="running", fraction=0.5), 1e6) == 0.5


def test_what_is_left_follows_the_pace_of_what_is_done(made: SimpleNamespace):
    plan, watch = _plan(made), Stopwatch()
    state = made.state_of(plan, "done", "done")
    slow = {
        key: one.model_copy(
            update={"result": one.result.model_copy(update={"seconds": 2 * one.result.seconds})}
        )
        for key, one in state.tasks.items()
        if one.result is not None
    }
    slow_state = RunState(tasks={**state.tasks, **slow})
    usual = overall(plan, state, watch, 0.0, True).left
    assert overall(plan, slow_state, watch, 0.0, True).left == pytest.approx(2 * usual)


def test_a_task_keeps_the_time_it_took_after_it_died(made: SimpleNamespace):
    plan, watch = _plan(made), Stopwatch()
    task = plan.tasks[0].id
    watch.follow(made.state_of(plan, "running"), True, 10.0)
    dead = made.state_of(plan, "died")
    watch.follow(dead, False, 14.0)
    assert watch.used(dead.tasks[task], 99.0) == 4.0
    assert watch.run_used(99.0) == 4.0
    watch.follow(made.state_of(plan, "running"), True, 200.0)
    assert watch.used(dead.tasks[task], 203.0) == 3.0


def test_all_done_says_how_long_it_took(made: SimpleNamespace):
    plan, watch = _plan(made), Stopwatch()
    watch.follow(made.state_of(plan, "running"), True, 0.0)
    state = made.state_of(plan, *["done"] * 8)
    watch.follow(state, False, 30.0)
    assert overall(plan, state, watch, 40.0, False).words == "8 of 8 tasks done, took 30 s"


@pytest.mark.parametrize(
    ("state", "words"),
    [("reused", "already known"), ("died", "died"), ("failed", "failed"), ("stopped", "stopped")],
)
def test_done_stopped_failed_and_died_are_different_words(made: SimpleNamespace, state: str, words: str):
    plan = _plan(made)
    assert state_words(made.state_of(plan, state).tasks[plan.tasks[0].id]) == words


def test_a_died_task_says_why_and_from_where_it_is_carried_on(made: SimpleNamespace):
    plan = _plan(made)
    words = trouble_words(made.state_of(plan, "died").tasks[plan.tasks[0].id])
    assert "killed by signal 9" in words
    assert "Press Run to carry on; it continues from iteration 7." in words


def test_a_task_without_iterations_says_that_it_begins_again(made: SimpleNamespace):
    words = trouble_words(TaskState(task="x", state="stopped"))
    assert words.startswith("You stopped this task.")
    assert "begins again" in words


def test_a_failed_task_gives_its_reason_and_a_task_in_order_gives_none(made: SimpleNamespace):
    failed = trouble_words(
        TaskState(task="x", state="failed", reason="CCSD did not converge in 100 iterations")
    )
    assert "CCSD did not converge in 100 iterations." in failed
    assert "Build page" in failed
    assert trouble_words(TaskState(task="x", state="done")) == ""
