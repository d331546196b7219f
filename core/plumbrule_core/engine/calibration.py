"""How fast this computer is: measured once for about a second, kept in the cache."""

import os
import platform
import shutil
import tempfile
import time
from pathlib import Path
from typing import Annotated

import numpy as np
from pydantic import Field, ValidationError

from plumbrule_core.documents.base import Document, digest_of
from plumbrule_core.documents.plan import Machine
from plumbrule_core.engine.cache import cache_folder
from plumbrule_core.engine.executor import LocalExecutor
from plumbrule_core.engine.files import write_whole
from plumbrule_core.engine.limits import usable_cores, usable_memory_mb
from plumbrule_core.engine.order import Order

MEASURE_SECONDS = 0.5
MATRIX = 400
START_PATIENCE = 60.0


class Calibration(Document):
    """What was measured, and for which computer and library."""

    computer: str
    seconds_per_gigaflop: Annotated[float, Field(gt=1e-5, lt=1e3)]
    start_seconds: Annotated[float, Field(gt=0, lt=1e3)]


def machine(cache: Path | None = None) -> Machine:
    """What this computer offers. The first call ever takes a few seconds, so call it in a thread.

    Speed is read from the cache folder; memory and disk are looked up every time.
    """
    folder = cache or cache_folder()
    speed = _kept(folder / "machine.json") or _measured(folder)
    return Machine(
        cores=usable_cores(),
        memory_mb=usable_memory_mb(),
        disk_mb=shutil.disk_usage(folder).free / 2**20,
        seconds_per_gigaflop=speed.seconds_per_gigaflop,
        start_seconds=speed.start_seconds,
    )


def _kept(file: Path) -> Calibration | None:
    """The calibration of an earlier start, or None where there is none for this computer."""
    try:
        kept = Calibration.from_json(file.read_bytes())
    except (OSError, ValidationError):
        return None
    return kept if kept.computer == _computer() else None


def _measured(folder: Path) -> Calibration:
    start = _start_seconds()
    measured = Calibration(
        computer=_computer(),
        seconds_per_gigaflop=seconds_per_gigaflop(),
        start_seconds=start or Machine.model_fields["start_seconds"].default,
    )
    if start is not None:
        write_whole(folder / "machine.json", lambda file: file.write(measured.to_json().encode()))
    return measured


def _computer() -> str:
    facts = (platform.node(), platform.machine(), platform.processor(), platform.python_version())
    return digest_of([*facts, os.cpu_count(), np.__version__])


def seconds_per_gigaflop() -> float:
    """Seconds for 1e9 floating-point operations of a matrix product on one thread (the best one)."""
    from threadpoolctl import threadpool_limits  # type: ignore[import-untyped]

    left = np.random.default_rng(1).random((MATRIX, MATRIX))
    best = float("inf")
    with threadpool_limits(limits=1):
        ends = time.perf_counter() + MEASURE_SECONDS
        while time.perf_counter() < ends:
            begun = time.perf_counter()
            left @ left
            best = min(best, time.perf_counter() - begun)
    return best / (2 * MATRIX**3 / 1e9)


def _start_seconds() -> float | None:
    """Seconds until a worker has loaded the library and ended again; None where it could not start."""
    begun = time.perf_counter()
    with tempfile.TemporaryDirectory() as folder:
        handle = LocalExecutor().submit(Order(shelf=folder, blobs=folder), lambda event: None)
        if not handle.wait(START_PATIENCE):
            handle.ask("kill")
            handle.wait()
    return time.perf_counter() - begun if handle.ending == "done" else None
