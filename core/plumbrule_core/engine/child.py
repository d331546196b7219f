"""A worker as a child process: its command, its environment, its files, and how it is ended."""

import contextlib
import os
import shutil
import signal
import subprocess
import sys
import tempfile
import threading
from collections.abc import Iterator, Mapping, Sequence
from pathlib import Path

from plumbrule_core.documents.events import MAX_LINE
from plumbrule_core.engine.cache import SCRATCH
from plumbrule_core.engine.order import Order

WORKER_FLAG = "--worker"
"""First argument of the frozen program that makes it a worker."""

_THREAD_VARIABLES = ("OMP_NUM_THREADS", "MKL_NUM_THREADS", "OPENBLAS_NUM_THREADS", "VECLIB_MAXIMUM_THREADS")


def worker_command() -> tuple[str, ...]:
    """How a worker is started, from source or from a frozen bundle.

    `-P` keeps the folder that the user happens to stand in out of the import path.
    """
    if getattr(sys, "frozen", False):
        return (sys.executable, WORKER_FLAG)
    return (sys.executable, "-P", "-m", "plumbrule_core.engine.worker")


def environment(order: Order, scratch: Path) -> Mapping[str, str]:
    """The child's environment: thread counts must be there before any library is loaded."""
    variables = {name: value for name, value in os.environ.items() if name != "PYSCF_EXT_PATH"}
    # The worker stands in another folder, where a relative path would mean another place.
    paths = [
        str(Path(path).absolute()) for path in os.environ.get("PYTHONPATH", "").split(os.pathsep) if path
    ]
    variables |= {"PYTHONPATH": os.pathsep.join(paths)}
    variables |= {name: str(order.threads) for name in _THREAD_VARIABLES}
    # Threads that spin while they wait slow a busy machine down twenty times.
    variables |= {"OMP_WAIT_POLICY": "PASSIVE", "KMP_BLOCKTIME": "0", "OMP_DYNAMIC": "FALSE"}
    variables |= {"TMPDIR": str(scratch), "PYSCF_TMPDIR": str(scratch)}
    # The library runs a settings file of the working or home folder; an empty one keeps numbers the same.
    variables["PYSCF_CONFIG_FILE"] = str(scratch / "settings.py")
    return variables


class Child:
    """One worker process, in a process group, a scratch folder and with a log of its own.

    On Linux a worker ends with the thread that made this object: that thread must wait for it.
    """

    def __init__(self, command: Sequence[str], order: Order) -> None:
        """Start the process; raises OSError where that cannot be."""
        shelf = Path(order.shelf)
        shelf.mkdir(parents=True, exist_ok=True)
        self.log_file = order.log_file
        self._lock = threading.Lock()
        self._gone = False
        self._order_sent = False
        self._scratch = Path(tempfile.mkdtemp(prefix=f"{SCRATCH}{os.getpid()}-", dir=shelf))
        try:
            (self._scratch / "settings.py").touch()
            with self.log_file.open("wb") as log:
                self._process = subprocess.Popen(
                    command,
                    stdin=subprocess.PIPE,
                    stdout=subprocess.PIPE,
                    stderr=log,
                    env=environment(order, self._scratch),
                    cwd=self._scratch,
                    bufsize=0,
                    process_group=0 if os.name == "posix" else None,
                )
        except BaseException:
            self._remove_files()
            raise

    @property
    def pid(self) -> int:
        """The worker's process id."""
        return self._process.pid

    def send(self, order: Order) -> None:
        """Write the order; waits while the worker does not read. A dead worker is not a fault here."""
        rest = memoryview(order.to_json().encode() + b"\n")
        with contextlib.suppress(BrokenPipeError):
            while rest:
                rest = rest[os.write(self._stdin, rest) :]
            self._order_sent = True

    def ask_to_stop(self) -> None:
        """Ask; never waits. A worker that cannot be asked is ended by the next steps of the ladder."""
        if not self._order_sent:
            return
        with contextlib.suppress(OSError):
            if os.name == "posix":
                os.set_blocking(self._stdin, False)
            os.write(self._stdin, b'{"ask": "stop"}\n')

    def end(self) -> None:
        """Ask the system to end the worker and its children."""
        self._signal(signal.SIGTERM)

    def kill(self) -> None:
        """End the worker and its children at once."""
        self._signal(signal.SIGKILL if os.name == "posix" else signal.SIGTERM)

    def lines(self) -> Iterator[bytes]:
        """What the worker writes, line by line; one longer than MAX_LINE comes cut, without its line end."""
        assert self._process.stdout is not None
        raw = self._process.stdout
        with raw, os.fdopen(raw.fileno(), "rb", closefd=False) as stream:
            while line := stream.readline(MAX_LINE):
                yield line
                while line and not line.endswith(b"\n"):
                    line = stream.readline(MAX_LINE)

    def wait(self) -> int:
        """Wait for the end; returns the exit status, negative for a signal. Ends left children too."""
        if self._gone:
            return self._process.wait()
        if sys.platform == "linux":
            # Not reaped yet: until then nobody else can get the number of this process group.
            os.waitid(os.P_PID, self.pid, os.WEXITED | os.WNOWAIT)
        else:
            self._process.wait()
        self.kill()
        with self._lock:
            self._gone = True
        return self._process.wait()

    def close(self) -> str:
        """Give back the scratch folder and an empty log; returns the path of a log that says something."""
        assert self._process.stdin is not None
        self._process.stdin.close()
        self._remove_files()
        return str(self.log_file) if self.log_file.exists() else ""

    def _remove_files(self) -> None:
        # What cannot be removed now is removed by the next pruning of the cache.
        shutil.rmtree(self._scratch, ignore_errors=True)
        if self.log_file.exists() and not self.log_file.stat().st_size:
            self.log_file.unlink()

    @property
    def _stdin(self) -> int:
        assert self._process.stdin is not None
        return self._process.stdin.fileno()

    def _signal(self, number: int) -> None:
        with self._lock:
            if self._gone:
                return
            if os.name != "posix":
                self._process.send_signal(number)
                return
            # The group may be empty already, or hold only what has ended (then macOS forbids it).
            with contextlib.suppress(ProcessLookupError, PermissionError):
                os.killpg(self.pid, number)
