"""Workers that die, hang, do not listen or talk nonsense: one clear line each, nothing lost, nothing left."""

import os
import signal
import subprocess
import sys
import time

import psutil
import pytest

from plumbrule_core.documents.events import MAX_LINE, Failed, Finished, Iteration, Log, TaskStopped
from plumbrule_core.engine import LocalExecutor, load_array
from plumbrule_core.engine.order import Order

TWO_SECONDS = 2.0


def ended(pid: int) -> bool:
    """Whether a process has ended within a second; an orphan may stay as a zombie until it is collected."""
    try:
        process = psutil.Process(pid)
    except psutil.NoSuchProcess:
        return True
    ends = time.monotonic() + 1
    while time.monotonic() < ends:
        if not process.is_running() or process.status() == psutil.STATUS_ZOMBIE:
            return True
        time.sleep(0.02)
    return False


@pytest.mark.parametrize(
    ("rung", "words"),
    [
        ("killed", "the worker was killed (signal 9), perhaps because memory ran out"),
        ("segfaults", "the worker crashed inside a library (signal 11"),
        ("leaves", "the worker ended without a word (exit status 0)"),
    ],
)
def test_a_silent_death_fails_the_task_that_ran_and_leaves_the_rest_waiting(
    fake, task, order, heard, rung, words
):
    first, bad, last = task("quick"), task(rung), task("slow")
    handle = fake.submit(order(first, bad, last), heard, heard.end)
    assert handle.wait(20)
    assert (handle.ending, heard.endings) == ("died", ["died"])
    (failed,) = heard.of(Failed)
    assert (failed.task, failed.died) == (bad.id, True)
    assert words in failed.reason
    assert "press Run to carry on" in failed.reason
    assert [e.task for e in heard.of(Finished)] == [first.id]
    assert heard.kinds(last) == []


def test_a_crash_leaves_where_it_happened_in_the_log(fake, task, order, heard):
    job = order(task("segfaults"))
    assert fake.submit(job, heard).wait(20)
    assert f"(details in {job.log_file})" in heard.reasons()[0]
    assert "Segmentation fault" in job.log_file.read_text()
    assert "fake_worker.py" in job.log_file.read_text()


@pytest.mark.parametrize("rung", ["deaf", "absorbed", "busy"])
def test_stop_is_through_within_two_seconds_even_where_nobody_listens(fake, task, order, heard, rung):
    first, second = task(rung), task("quick")
    handle = fake.submit(order(first, second), heard, heard.end)
    heard.until(lambda e: isinstance(e, Log))
    begun = time.monotonic()
    handle.ask("stop")
    assert handle.wait(TWO_SECONDS)
    assert time.monotonic() - begun < TWO_SECONDS
    assert (handle.ending, heard.endings) == ("stopped", ["stopped"])
    assert [e.task for e in heard.of(TaskStopped)] == [first.id]
    assert heard.of(Failed) == []
    assert heard.kinds(second) == []


def test_kill_does_not_ask(fake, task, order, heard):
    handle = fake.submit(order(task("deaf")), heard)
    heard.until(lambda e: isinstance(e, Log))
    begun = time.monotonic()
    handle.ask("kill")
    assert handle.wait(TWO_SECONDS)
    assert time.monotonic() - begun < 1.3
    assert handle.ending == "stopped"


def test_asking_twice_or_after_the_end_does_no_harm(fake, task, order, heard):
    handle = fake.submit(order(task("absorbed")), heard, heard.end)
    heard.until(lambda e: isinstance(e, Log))
    handle.ask("stop")
    handle.ask("stop")
    assert handle.wait(TWO_SECONDS)
    handle.ask("stop")
    handle.ask("kill")
    assert heard.endings == ["stopped"]
    assert len(heard.of(TaskStopped)) == 1


def test_a_stop_before_the_worker_has_started_is_a_stop(fake, task, order, heard):
    handle = fake.submit(order(task("slow")), heard)
    handle.ask("stop")
    assert handle.wait(TWO_SECONDS)
    assert handle.ending == "stopped"
    assert heard.of(Failed) == []


def test_children_of_a_worker_end_with_it(fake, task, order, heard):
    handle = fake.submit(order(task("parent")), heard)
    child = int(heard.until(lambda e: isinstance(e, Log)).text.split()[1])
    os.kill(handle.pid, signal.SIGKILL)
    assert handle.wait(TWO_SECONDS)
    assert handle.ending == "died"
    assert ended(child)


def test_killed_at_any_moment_at_most_one_iteration_is_repeated(fake, task, order, heard):
    slow = task("slow")
    reached = 0
    for stop_at in (2, 7, 9, 20):
        heard = type(heard)()
        handle = fake.submit(order(slow), heard)
        heard.until(lambda e, n=stop_at: isinstance(e, Iteration) and e.n >= n)
        os.kill(handle.pid, signal.SIGKILL)
        assert handle.wait(TWO_SECONDS)
        iterations = [e.n for e in heard.of(Iteration)]
        assert iterations[0] >= reached
        assert iterations == list(range(iterations[0], iterations[-1] + 1))
        reached = iterations[-1]
    last = type(heard)()
    assert fake.submit(order(slow), last).wait(20)
    assert last.of(Iteration)[0].n >= reached
    assert last.of(Finished)[0].result.energy == -76.0


def test_what_is_finished_survives_the_death_of_the_worker(fake, task, order, heard, tmp_path):
    first = task("quick")
    assert fake.submit(order(first, task("killed")), heard).wait(20)
    result = heard.of(Finished)[0].result
    assert load_array(tmp_path / "blobs", result.arrays["orbitals"]).shape == (2, 3)


PARENT = """
import sys, time
from plumbrule_core.engine import LocalExecutor, Order
order = Order.from_json(sys.stdin.read())
handle = LocalExecutor(sys.argv[1:]).submit(order, lambda e: print(e.event, flush=True))
print(handle.pid, flush=True)
time.sleep(60)
"""


@pytest.mark.parametrize("rung", ["absorbed", "deaf", "busy"])
def test_a_worker_ends_within_a_second_of_its_parent(fake, task, order, rung):
    job = order(task(rung))
    parent = subprocess.Popen(
        [sys.executable, "-c", PARENT, *fake._command],
        stdin=subprocess.PIPE,
        stdout=subprocess.PIPE,
        text=True,
    )
    with parent:
        parent.stdin.write(job.to_json())
        parent.stdin.close()
        lines = []
        while "log" not in lines:
            lines.append(parent.stdout.readline().strip())
        worker = int(next(line for line in lines if line.isdigit()))
        parent.kill()
    assert ended(worker)


def test_where_the_system_does_not_help_the_end_of_stdin_ends_the_worker(fake, task, order):
    worker = subprocess.Popen(
        fake._command, stdin=subprocess.PIPE, stdout=subprocess.PIPE, stderr=subprocess.DEVNULL
    )
    with worker:
        worker.stdin.write(order(task("absorbed")).to_json().encode() + b"\n")
        worker.stdin.flush()
        while b'"log"' not in worker.stdout.readline():
            pass
        worker.stdin.close()
        assert worker.wait(1) == 3


def test_garbage_half_lines_and_long_lines_are_said_and_the_worker_goes_on(raw, task, order, heard):
    body = """
hello()
say("started")
print("free text that a library printed")
print(json.dumps({"event": "iteration", "seq": 1, "task": first, "n": "many", "energy": 0}))
sys.stdout.buffer.write(b"x" * (16 << 20) + b"\\n")
sys.stdout.buffer.write(bytes(range(128, 256)) + b"\\n")
print('{"event": "iteration", "seq": 1, "task": "another", "n": 1, "energy": 0.5}')
print('{"event": "iteration", "seq": 1, "task": "' + first + '", "n": 1, "energy": NaN}')
say("iteration", n=1, energy=-1.0)
say("failed", reason="enough")
sys.stdout.write('{"event": "iter')
"""
    first = task("quick")
    executor = raw(body, first)
    handle = executor.submit(order(first), heard, heard.end)
    assert handle.wait(20)
    assert (handle.ending, heard.endings) == ("done", ["done"])
    said = [e.text for e in heard.of(Log)]
    assert len(said) == 4
    assert "the worker sent a line that is no message, which is ignored: 'free text" in said[0]
    assert f"longer than {MAX_LINE} bytes" in said[2]
    assert said[3] == "the worker sent 4 more lines that were ignored"
    assert [e.n for e in heard.of(Iteration)] == [1]
    assert heard.reasons() == ["enough"]


def test_a_half_message_at_death_does_not_hang(raw, task, order, heard):
    body = """
hello()
say("started")
sys.stdout.write('{"event": "result", "seq": 2, "task')
sys.stdout.flush()
os.kill(os.getpid(), signal.SIGKILL)
"""
    first = task("quick")
    assert raw(body, first).submit(order(first), heard).wait(5)
    assert "cut short" in heard.of(Log)[0].text
    assert heard.of(Failed)[0].died


@pytest.mark.parametrize(
    ("body", "words"),
    [
        ("hello(protocol=2)\ntime.sleep(60)", "the worker speaks protocol 2 and this program speaks 1"),
        ("raise SystemExit(5)", "the worker could not start: it ended without a word (exit status 5)"),
        ("say('started')\nsay('failed', reason='x')", "the worker could not start"),
        (
            "hello()\nsay('failed', task='', reason='this order is no order')\ntime.sleep(60)",
            "this order is no order",
        ),
        ("sys.stdout.close()\ntime.sleep(0.2)", "the worker could not start"),
    ],
)
def test_a_worker_that_cannot_be_worked_with_fails_the_first_task_with_words(
    raw, task, order, heard, body, words
):
    first, second = task("quick"), task("slow")
    handle = raw(body, first).submit(order(first, second), heard, heard.end)
    assert handle.wait(5)
    assert heard.endings in (["failed"], ["died"])
    assert len(heard.of(Failed)) == 1
    assert words in heard.reasons()[0]
    assert heard.of(Failed)[0].task == first.id


def test_a_result_of_another_task_is_not_taken(raw, task, order, heard):
    first = task("quick")
    body = f"""
hello()
say("started")
result = dict(task="{"0" * 20}", species="a", rung="b", basis="c", level="d", energy=1.0, seconds=1.0,
              memory_mb=1.0, reference="RHF")
say("result", result=result)
"""
    assert raw(body, first).submit(order(first), heard).wait(5)
    assert heard.of(Finished) == []
    assert heard.of(Failed)[0].died


def test_a_program_that_is_not_there_is_said(task, order, heard):
    handle = LocalExecutor(("/nowhere/worker",)).submit(order(task("quick")), heard, heard.end)
    assert handle.wait(5)
    assert (handle.ending, heard.endings) == ("failed", ["failed"])
    assert "the worker cannot be started" in heard.reasons()[0]
    assert "/nowhere/worker" in heard.reasons()[0]


def test_a_deaf_worker_is_stopped_even_while_a_long_order_is_still_being_written(raw, task, order, heard):
    tasks = [task("quick", chain=str(number)) for number in range(300)]
    job = order(*tasks)
    assert len(job.to_json()) > 1 << 17
    body = "signal.signal(signal.SIGTERM, signal.SIG_IGN)\nhello()\nsay('started')\ntime.sleep(60)"
    handle = raw(body, tasks[0]).submit(job, heard)
    heard.until(lambda e: e.event == "started")
    begun = time.monotonic()
    handle.ask("stop")
    assert handle.wait(TWO_SECONDS)
    assert time.monotonic() - begun < TWO_SECONDS
    assert handle.ending == "stopped"


def test_a_listener_that_breaks_does_not_stop_the_worker(fake, task, order, heard, caplog):
    def breaks(event):
        heard(event)
        raise RuntimeError("no more room")

    assert fake.submit(order(task("quick")), breaks, heard.end).wait(20)
    assert heard.endings == ["done"]
    assert "an event could not be delivered" in caplog.text


@pytest.mark.parametrize(
    ("line", "words"),
    [
        (b"not json\n", "the worker cannot read its order"),
        (
            b'{"tasks": [], "shelf": "/tmp", "blobs": "/tmp", "threads": 0}\n',
            "order.threads: must be 1 or more",
        ),
        (b'{"tasks": [], "shelf": "/tmp"}\n', "order.blobs: is missing"),
    ],
)
def test_a_malformed_order_is_refused_in_words(fake, line, words):
    worker = subprocess.run(fake._command, input=line, capture_output=True, timeout=20)
    assert worker.returncode == 2
    assert words in worker.stdout.decode()
    assert len(worker.stdout.splitlines()) == 2


def test_an_order_whose_task_id_is_a_path_is_refused(task):
    bad = task("quick").model_copy(update={"id": "../../etc/passwd"})
    with pytest.raises(ValueError, match="as it names a file"):
        Order.from_data({"tasks": [bad.to_data()], "shelf": "/tmp", "blobs": "/tmp"})
