"""The DMRG engine's own process: reads a job from a folder, sweeps, and leaves the state's properties there.

    python -m plumbrule_core.correlation.solvers.dmrg_process FOLDER

The engine brings its own numerical libraries and threads, so it never shares a process with others. JSON
lines go out on a private copy of stdout; the end of stdin, or of the parent, ends this process.
"""

import ctypes
import json
import os
import signal
import sys
import threading
from pathlib import Path
from typing import Any

import numpy as np

from plumbrule_core.correlation.protocol import Array
from plumbrule_core.correlation.solvers.dmrg_reading import read_state
from plumbrule_core.correlation.solvers.dmrg_sweeps import Sweeps

JOB, ARRAYS, RESULT = "job.json", "job.npz", "result.npz"
PARENT_GONE = 3
_PR_SET_PDEATHSIG = 1


class Channel:
    """JSON lines to the parent, on a descriptor that no library's print can reach."""

    def __init__(self) -> None:
        sys.stdout.flush()
        self._descriptor = os.dup(1)
        os.dup2(2, 1)

    def say(self, kind: str, **fields: Any) -> None:
        """One message; ends this process where nobody listens."""
        line = json.dumps({"kind": kind, **fields}, allow_nan=False).encode() + b"\n"
        try:
            os.write(self._descriptor, line)
        except BrokenPipeError:
            os._exit(PARENT_GONE)


def main(folder: Path) -> None:
    """Solve the job in the folder."""
    _end_with_parent()
    channel = Channel()
    job = json.loads((folder / JOB).read_text())
    with np.load(folder / ARRAYS, allow_pickle=False) as arrays:
        integrals = {name: np.asarray(arrays[name], dtype=float) for name in arrays.files}
    sweeps = Sweeps(job, integrals["one"], integrals["two"], folder / "scratch", channel.say)
    found = sweeps.run()
    channel.say("stage", text="densities, entropies and coefficients")
    results: dict[str, Array] = read_state(sweeps, found, integrals.get("overlap"))
    np.savez(folder / RESULT, allow_pickle=False, **results)
    channel.say("done")


def _end_with_parent() -> None:
    if sys.platform == "linux":
        ctypes.CDLL(None).prctl(_PR_SET_PDEATHSIG, signal.SIGKILL)
    threading.Thread(target=_wait_for_the_end_of_stdin, daemon=True).start()


def _wait_for_the_end_of_stdin() -> None:
    while os.read(0, 1):
        continue
    os._exit(PARENT_GONE)


if __name__ == "__main__":
    main(Path(sys.argv[1]))
