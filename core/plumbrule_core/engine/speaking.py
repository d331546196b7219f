"""How a worker speaks: numbered events, one JSON line each, on a channel that nothing else can reach."""

import math
import os
import threading
import time
from typing import Any

from plumbrule_core.documents.events import MAX_LINE, Checkpoint, EventBase, Iteration, Log, Progress
from plumbrule_core.errors import PlumbruleError, Stopped

BURST = 200
"""So many events of one kind may follow each other without a pause ..."""
PER_SECOND = 20.0
"""... and then so many a second."""
MAX_TEXT = 4000
PARENT_GONE = 3
"""Exit status of a worker whose parent is gone."""


class Speaker:
    """Writes events to one descriptor; may be called from any thread."""

    def __init__(self, descriptor: int) -> None:
        self._descriptor = descriptor
        self._lock = threading.Lock()
        self._seq = 0

    def say(self, kind: type[EventBase], **fields: Any) -> None:
        """Send one event; raises PlumbruleError for a longer line than the protocol allows."""
        with self._lock:
            line = kind(seq=self._seq, **fields).to_json().encode() + b"\n"
            if len(line) > MAX_LINE:
                raise PlumbruleError(
                    f"a message of {len(line)} bytes is too long to be sent (at most {MAX_LINE}); "
                    "the calculation holds larger lists than the program can pass on"
                )
            self._seq += 1
            self._write(line)

    def _write(self, line: bytes) -> None:
        rest = memoryview(line)
        try:
            while rest:
                rest = rest[os.write(self._descriptor, rest) :]
        except BrokenPipeError:
            # Nobody is left to work for.
            os._exit(PARENT_GONE)


class Allowance:
    """A bucket of permissions that fills again with time: quick methods must not flood the window."""

    def __init__(self) -> None:
        self._left = float(BURST)
        self._last = time.monotonic()

    def spend(self) -> bool:
        """Whether one more may pass now."""
        now = time.monotonic()
        self._left = min(BURST, self._left + (now - self._last) * PER_SECOND)
        self._last = now
        if self._left < 1:
            return False
        self._left -= 1
        return True


class Teller:
    """What a rung speaks through while it computes one task (`rungs.protocol.Tell`)."""

    def __init__(self, speaker: Speaker, task: str, asked_to_stop: threading.Event) -> None:
        self._speaker = speaker
        self._task = task
        self._asked_to_stop = asked_to_stop
        self._iterations, self._progress = Allowance(), Allowance()
        self._notes, self._checkpoints = Allowance(), Allowance()
        self._held: dict[str, Any] | None = None
        self._unsaid = 0

    def iteration(self, n: int, energy: float, residual: float | None = None, stage: str = "") -> None:
        """One iteration; raises PlumbruleError where the numbers ceased to be numbers, or Stopped."""
        if not (math.isfinite(energy) and math.isfinite(residual or 0.0)):
            raise PlumbruleError(
                f"in iteration {n} the energy or the residual is no longer a number: the iteration "
                "diverged; check the geometry, or choose another reference"
            )
        residual = None if residual is None else float(residual)
        self._held = {"n": int(n), "energy": float(energy), "residual": residual, "stage": stage}
        if self._iterations.spend():
            self._let_go()
        self._go_on()

    def progress(self, fraction: float, what: str = "") -> None:
        """How far a task without iterations has come, 0 to 1; raises Stopped."""
        self._go_on()
        if self._progress.spend():
            within = min(1.0, max(0.0, float(fraction)))
            self._speaker.say(Progress, task=self._task, fraction=within, what=what)

    def note(self, text: str) -> None:
        """A line for people; raises Stopped."""
        self._go_on()
        self.log(text)

    def checkpoint(self, what: str) -> None:
        """The checkpoint is safe; raises Stopped."""
        if self._checkpoints.spend():
            self._speaker.say(Checkpoint, task=self._task, what=what)
        self._go_on()

    def log(self, text: str) -> None:
        """A line for people that is said even after a stop."""
        if self._notes.spend():
            self._speaker.say(Log, task=self._task, text=text[:MAX_TEXT])
        else:
            self._unsaid += 1

    def close(self) -> None:
        """Say what was held back, before the task ends."""
        self._let_go()
        if self._unsaid:
            text = f"{self._unsaid} more lines came too fast to be shown"
            self._speaker.say(Log, task=self._task, text=text)
            self._unsaid = 0

    def _let_go(self) -> None:
        if self._held is not None:
            self._speaker.say(Iteration, task=self._task, **self._held)
            self._held = None

    def _go_on(self) -> None:
        if self._asked_to_stop.is_set():
            raise Stopped


class Silent:
    """Speaks of nothing and hears only the wish to stop: for tasks that are known already."""

    def __init__(self, asked_to_stop: threading.Event) -> None:
        self._asked_to_stop = asked_to_stop

    def iteration(self, n: int, energy: float, residual: float | None = None, stage: str = "") -> None:
        """Raises Stopped where asked to."""
        self._go_on()

    def progress(self, fraction: float, what: str = "") -> None:
        """Raises Stopped where asked to."""
        self._go_on()

    def note(self, text: str) -> None:
        """Raises Stopped where asked to."""
        self._go_on()

    def checkpoint(self, what: str) -> None:
        """Raises Stopped where asked to."""
        self._go_on()

    def _go_on(self) -> None:
        if self._asked_to_stop.is_set():
            raise Stopped
