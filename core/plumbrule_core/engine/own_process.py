"""What a worker does with its own process: be polite, end with its parent, know its memory."""

import ctypes
import os
import re
import signal
import sys
from pathlib import Path

import psutil

NICE = 10
FIRST_TO_GO = 500
"""Linux ends the process with the highest score when memory runs out: half of all memory on top (proc(5))."""
_PR_SET_PDEATHSIG = 1


def be_polite() -> None:
    """Give way to everything the user does; where memory runs out, end before the window does."""
    if sys.platform == "win32":
        psutil.Process().nice(psutil.BELOW_NORMAL_PRIORITY_CLASS)
    else:
        os.nice(NICE)
    if sys.platform == "linux":
        Path("/proc/self/oom_score_adj").write_text(str(FIRST_TO_GO))


def end_with_parent() -> None:
    """Ask Linux to end this process with the thread that started it; elsewhere the end of stdin has to do."""
    if sys.platform == "linux":
        ctypes.CDLL(None).prctl(_PR_SET_PDEATHSIG, signal.SIGKILL)


def private_channel() -> int:
    """A private copy of stdout; descriptor 1 becomes stderr, so that no library's print breaks the lines."""
    sys.stdout.flush()
    channel = os.dup(1)
    os.dup2(2, 1)
    return channel


class PeakMemory:
    """The largest resident memory since this was made, in MB."""

    def __init__(self) -> None:
        self._status = Path("/proc/self/status")
        try:
            # Resets the kernel's peak of this process to what it holds now (Linux, proc(5)).
            Path("/proc/self/clear_refs").write_text("5")
        except OSError:
            # Where the kernel keeps one peak for the whole process, it stays an upper bound.
            return

    def mb(self) -> float:
        """The peak so far."""
        if self._status.exists():
            peak = re.search(r"VmHWM:\s+(\d+) kB", self._status.read_text())
            if peak:
                return int(peak[1]) / 1024
        return _portable_peak_mb()


def _portable_peak_mb() -> float:
    if sys.platform == "win32":
        return float(psutil.Process().memory_info().peak_wset) / 2**20
    import resource

    peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss
    return peak / 2**20 if sys.platform == "darwin" else peak / 1024
