"""What a worker says about tasks that go well and tasks that go wrong."""

import numpy as np
import pytest

from plumbrule_core.documents.events import Failed, Finished, Iteration, Log, Measured, Started, TaskStopped
from plumbrule_core.engine import load_array


def run(executor, order, heard, timeout=30.0):
    handle = executor.submit(order, heard, heard.end)
    assert handle.wait(timeout)
    return handle


def test_the_tasks_of_a_chain_run_in_turn_and_share_one_bench(fake, task, order, heard):
    first = task("quick")
    second = task("upon", first)
    assert run(fake, order(first, second), heard).ending == "done"
    assert heard.endings == ["done"]
    assert heard.kinds(first) == ["started", "iteration", "iteration", "iteration", "checkpoint", "result"]
    results = [e.result for e in heard.of(Finished)]
    assert [r.energy for r in results] == [-76.0, pytest.approx(-76.2)]
    assert results[1].correlation == -0.2
    assert (results[0].species, results[0].basis) == ("water", "STO-3G")
    assert results[0].level == first.spec.settings.level


def test_readings_are_told_when_taken_and_kept_in_the_result(fake, task, order, heard):
    first = task("quick")
    run(fake, order(first, task("upon", first)), heard)
    assert [e.reading.name for e in heard.of(Measured)] == ["T1"]
    assert heard.of(Finished)[-1].result.reading("T1") == 0.01


def test_the_result_says_versions_threads_time_and_memory(fake, task, order, heard):
    run(fake, order(task("large"), threads=2), heard)
    result = heard.of(Finished)[0].result
    assert result.used["fake"] == "1"
    assert result.used["threads"] == "2"
    assert 300 < result.memory_mb < 600
    assert 0 < result.seconds < 10


def test_memory_is_that_of_the_task_not_of_the_one_before_it(fake, task, order, heard):
    run(fake, order(task("large"), task("quick")), heard)
    large, quick = (e.result.memory_mb for e in heard.of(Finished))
    assert quick < large - 200


def test_the_environment_is_set_before_the_worker_starts(fake, task, order, heard, tmp_path):
    run(fake, order(task("environment"), threads=2), heard)
    used = heard.of(Finished)[0].result.used
    assert used["OMP_NUM_THREADS"] == used["MKL_NUM_THREADS"] == used["OPENBLAS_NUM_THREADS"] == "2"
    assert used["OMP_WAIT_POLICY"] == "PASSIVE"
    assert int(used["nice"]) >= 10
    assert used["group"] == "True"
    assert used["first to go"] == "500"
    assert used["memory"] == "500.0"
    assert used["TMPDIR"].startswith(str(tmp_path / "shelf"))
    assert list((tmp_path / "shelf").glob("worker-*")) == []


def test_arrays_come_as_files_without_pickle(fake, task, order, heard, tmp_path):
    run(fake, order(task("quick")), heard)
    ref = heard.of(Finished)[0].result.arrays["orbitals"]
    assert (ref.shape, ref.dtype) == ((2, 3), "float64")
    assert np.array_equal(load_array(tmp_path / "blobs", ref), np.arange(6.0).reshape(2, 3))


@pytest.mark.parametrize(
    ("rung", "words"),
    [
        ("nan", "the energy came out as nan"),
        ("diverges", "in iteration 7 the energy or the residual is no longer a number"),
        ("refuses", "the moon is in the wrong quarter; wait a week"),
        ("no_memory", "memory ran out (the task may use 500 MB)"),
        ("full_disk", "the disk is full"),
        ("breaks", "breaks broke: ZeroDivisionError"),
        ("exits", "exits broke: SystemExit: a library gives up"),
        ("long_notes", "too long to be sent"),
        ("objects", "objects broke: ValueError"),
        ("unheard of", "this program has no rung 'unheard of'"),
    ],
)
def test_a_task_that_fails_says_why_and_the_next_one_still_runs(fake, task, order, heard, rung, words):
    bad, good = task(rung), task("quick")
    assert run(fake, order(bad, good), heard).ending == "done"
    (failed,) = heard.of(Failed)
    assert failed.task == bad.id
    assert words in failed.reason
    assert not failed.died
    assert "\n" not in failed.reason
    assert [e.task for e in heard.of(Finished)] == [good.id]


def test_an_unexpected_fault_leaves_its_traceback_in_the_log_that_it_names(fake, task, order, heard):
    job = order(task("breaks"))
    run(fake, job, heard)
    assert str(job.log_file) in heard.reasons()[0]
    assert "ZeroDivisionError" in job.log_file.read_text()


def test_a_log_without_a_word_is_removed(fake, task, order, heard):
    job = order(task("quick"))
    run(fake, job, heard)
    assert not job.log_file.exists()


def test_what_stands_on_a_failed_task_is_not_run_and_says_so(fake, task, order, heard):
    bad = task("refuses")
    middle = task("upon", bad)
    top = task("quick", middle)
    run(fake, order(bad, middle, top), heard)
    assert heard.reasons()[1:] == [
        "not run because water: refuses/STO-3G failed",
        "not run because water: upon/STO-3G failed",
    ]
    assert [e.task for e in heard.of(Started)] == [bad.id]


def test_a_known_task_is_loaded_again_silently_where_a_later_one_needs_it(fake, task, order, heard):
    first = task("quick")
    second = task("upon", first)
    run(fake, order(first, second, known=[first]), heard)
    assert heard.kinds(first) == []
    assert heard.kinds(second) == ["started", "log", "reading", "result"]
    assert heard.of(Finished)[0].result.energy == pytest.approx(-76.2)


def test_a_known_task_that_nothing_needs_is_not_computed(fake, task, order, heard):
    run(fake, order(task("killed"), task("quick"), known=[task("killed")]), heard)
    assert heard.endings == ["done"]


def test_a_known_task_that_cannot_be_loaded_fails_the_one_that_needs_it(fake, task, order, heard):
    first = task("refuses")
    run(fake, order(first, task("upon", first), known=[first]), heard)
    assert (
        "water: refuses/STO-3G, which this needs, could not be loaded again: the moon" in heard.reasons()[0]
    )


def test_a_reading_that_breaks_does_not_cost_the_energy(fake, task, order, heard):
    run(fake, order(task("unread")), heard)
    result = heard.of(Finished)[0].result
    assert result.energy == -76.0
    assert "the readings could not be taken (ZeroDivisionError: division by zero)" in result.notes[0]
    assert result.notes[0] in [e.text for e in heard.of(Log)]
    assert result.unchecked


def test_prints_of_libraries_do_not_reach_the_events(fake, task, order, heard):
    job = order(task("prints"))
    assert run(fake, job, heard).ending == "done"
    assert heard.of(Log) == []
    for line in ('{"event": "result"}', "python prints", "C prints", "a child prints"):
        assert line in job.log_file.read_text()


def test_a_flood_of_events_is_thinned_and_keeps_its_last_iteration(fake, task, order, heard):
    run(fake, order(task("chatty")), heard)
    iterations = heard.of(Iteration)
    assert 200 <= len(iterations) < 1000
    assert iterations[-1].n == 20000
    assert "more lines came too fast to be shown" in heard.of(Log)[-1].text
    assert len(heard.events) < 3000


def test_a_task_carries_on_from_its_checkpoint_and_says_so(fake, task, order, heard):
    slow = task("slow")
    handle = fake.submit(order(slow), heard)
    heard.until(lambda e: isinstance(e, Iteration) and e.n == 5)
    handle.ask("stop")
    assert handle.wait(2)
    assert handle.ending == "stopped"
    assert [e.task for e in heard.of(TaskStopped)] == [slow.id]
    before = heard.of(Iteration)[-1].n
    again = type(heard)()
    run(fake, order(slow), again)
    assert again.of(Started)[0].resumed_from.startswith("the checkpoint of 20")
    assert again.of(Iteration)[0].n <= before + 1
    assert again.of(Iteration)[0].n >= before


def test_an_unreadable_checkpoint_is_said_and_the_task_starts_afresh(fake, task, order, heard, tmp_path):
    slow = task("slow")
    (tmp_path / "shelf").mkdir()
    (tmp_path / "shelf" / f"{slow.id}.npz").write_bytes(b"PK but not really")
    handle = fake.submit(order(slow), heard)
    heard.until(lambda e: isinstance(e, Iteration))
    handle.ask("stop")
    assert handle.wait(2)
    assert "cannot be read" in heard.of(Log)[0].text
    assert "starting afresh" in heard.of(Log)[0].text
    assert heard.of(Iteration)[0].n == 1
