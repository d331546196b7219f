"""A worker process of the program with rungs that misbehave on purpose instead of the real ones."""

import ctypes
import errno
import os
import signal
import subprocess
import sys
import time
from collections.abc import Callable
from pathlib import Path
from types import SimpleNamespace

import numpy as np

from plumbrule_core.documents.results import Reading
from plumbrule_core.engine.worker import serve
from plumbrule_core.errors import PlumbruleError
from plumbrule_core.rungs.protocol import Given, Outcome, Tell

ENERGY = -76.0


def quick(given: Given, tell: Tell) -> Outcome:
    for n in range(1, 4):
        tell.iteration(n, ENERGY + 0.1**n, 0.1**n)
    given.shelf.save({"n": np.array(3)})
    tell.checkpoint("orbitals")
    arrays = {"orbitals": np.arange(6.0).reshape(2, 3)}
    return Outcome(energy=ENERGY, reference="RHF", iterations=3, arrays=arrays)


def upon(given: Given, tell: Tell) -> Outcome:
    below = given.bench.outcomes["quick"]
    return Outcome(energy=below.energy - 0.2, correlation=-0.2, reference="RHF")


def slow(given: Given, tell: Tell) -> Outcome:
    """Forty iterations of 20 ms, each checkpointed before it is told."""
    kept = given.shelf.load()
    first = int(kept["n"]) + 1 if kept else 1
    for n in range(first, 41):
        time.sleep(0.02)
        given.shelf.save({"n": np.array(n), "t2": np.full((50, 50), float(n))})
        tell.iteration(n, ENERGY - 1 / n, 1 / n)
        tell.checkpoint("amplitudes")
    return Outcome(energy=ENERGY, reference="RHF", iterations=41 - first)


def nan(given: Given, tell: Tell) -> Outcome:
    return Outcome(energy=float("nan"), reference="RHF")


def diverges(given: Given, tell: Tell) -> Outcome:
    tell.iteration(7, float("nan"))
    raise AssertionError("the teller let a NaN pass")


def refuses(given: Given, tell: Tell) -> Outcome:
    raise PlumbruleError("the moon is in the wrong quarter; wait a week")


def no_memory(given: Given, tell: Tell) -> Outcome:
    raise MemoryError


def full_disk(given: Given, tell: Tell) -> Outcome:
    raise OSError(errno.ENOSPC, "No space left on device")


def breaks(given: Given, tell: Tell) -> Outcome:
    return Outcome(energy=1 / (given.threads - given.threads), reference="RHF")


def exits(given: Given, tell: Tell) -> Outcome:
    sys.exit("a library gives up")


def segfaults(given: Given, tell: Tell) -> Outcome:
    ctypes.string_at(0)
    raise AssertionError("still alive")


def killed(given: Given, tell: Tell) -> Outcome:
    os.kill(os.getpid(), signal.SIGKILL)
    time.sleep(60)
    raise AssertionError("still alive")


def leaves(given: Given, tell: Tell) -> Outcome:
    os._exit(0)


def prints(given: Given, tell: Tell) -> Outcome:
    os.write(1, b'{"event": "result"}\n')
    print("python prints")
    libc = ctypes.CDLL(None)
    libc.puts(b"C prints")
    libc.fflush(None)
    os.system("echo a child prints")
    return Outcome(energy=ENERGY, reference="RHF")


def deaf(given: Given, tell: Tell) -> Outcome:
    signal.signal(signal.SIGTERM, signal.SIG_IGN)
    tell.note("deaf")
    time.sleep(60)
    return Outcome(energy=ENERGY, reference="RHF")


def absorbed(given: Given, tell: Tell) -> Outcome:
    """Like a perturbative triples correction: nothing is heard until the end."""
    tell.note("absorbed")
    time.sleep(60)
    return Outcome(energy=ENERGY, reference="RHF")


def busy(given: Given, tell: Tell) -> Outcome:
    """Inside a matrix product, as often as one looks."""
    tell.note("busy")
    matrix = np.random.default_rng(1).random((1500, 1500))
    ends = time.monotonic() + 60
    while time.monotonic() < ends:
        matrix = matrix @ matrix
        matrix /= np.abs(matrix).max()
    return Outcome(energy=ENERGY, reference="RHF")


def parent(given: Given, tell: Tell) -> Outcome:
    child = subprocess.Popen(["sleep", "60"], stdout=1)
    tell.note(f"child {child.pid}")
    time.sleep(60)
    return Outcome(energy=ENERGY, reference="RHF")


def chatty(given: Given, tell: Tell) -> Outcome:
    for n in range(1, 20001):
        tell.iteration(n, ENERGY + 1 / n)
        tell.note(f"line {n}")
        tell.progress(n / 20000)
    return Outcome(energy=ENERGY, reference="RHF", iterations=20000)


def long_notes(given: Given, tell: Tell) -> Outcome:
    return Outcome(energy=ENERGY, reference="RHF", notes=("x" * 100_000,))


def objects(given: Given, tell: Tell) -> Outcome:
    return Outcome(energy=ENERGY, reference="RHF", arrays={"odd": np.array([{"a": 1}], dtype=object)})


def environment(given: Given, tell: Tell) -> Outcome:
    names = ("OMP_NUM_THREADS", "MKL_NUM_THREADS", "OPENBLAS_NUM_THREADS", "OMP_WAIT_POLICY", "TMPDIR")
    used = {name: os.environ[name] for name in names}
    used |= {
        "nice": str(os.nice(0)),
        "group": str(os.getpgid(0) == os.getpid()),
        "memory": str(given.memory_mb),
        "first to go": Path("/proc/self/oom_score_adj").read_text().strip(),
    }
    return Outcome(energy=ENERGY, reference="RHF", used=used)


def large(given: Given, tell: Tell) -> Outcome:
    held = np.ones(300 * 2**17)
    return Outcome(energy=ENERGY + 0 * held[0], reference="RHF")


def unread(given: Given, tell: Tell) -> Outcome:
    return Outcome(energy=ENERGY, reference="RHF")


COMPUTE: tuple[Callable[[Given, Tell], Outcome], ...] = (
    *(quick, upon, slow, nan, diverges, refuses, no_memory, full_disk, breaks, exits, segfaults, killed),
    *(leaves, prints, deaf, absorbed, busy, parent, chatty, long_notes, objects, environment, large, unread),
)
FAKES = {function.__name__: SimpleNamespace(name=function.__name__, compute=function) for function in COMPUTE}


def take(rung, bench, spec) -> tuple[Reading, ...]:
    if rung == "unread":
        raise ZeroDivisionError("division by zero")
    return (Reading(name="T1", value=0.01),) if rung == "upon" else ()


if __name__ == "__main__":
    os._exit(serve(FAKES, take, {"fake": "1"}))
