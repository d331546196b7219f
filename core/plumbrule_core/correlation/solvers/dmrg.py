"""DMRG for active spaces beyond exact diagonalisation, in a process of its own."""

import contextlib
import importlib.util
import json
import os
import queue
import shutil
import subprocess
import sys
import tempfile
import threading
from collections.abc import Iterator, Mapping
from pathlib import Path
from typing import Any

import numpy as np

from plumbrule_core.correlation.entropies import mutual_information
from plumbrule_core.correlation.excitations import MAX_ORBITALS
from plumbrule_core.correlation.protocol import Array, Coefficients, Problem, Solved, Tell
from plumbrule_core.correlation.solvers.dmrg_process import ARRAYS, JOB, RESULT
from plumbrule_core.errors import PlumbruleError

DMRG_FLAG = "--dmrg"
"""First argument of the frozen program that makes it the DMRG engine's process; the folder follows."""
PULSE = 0.5
"""Seconds between two looks at whether the user asked to stop."""
RESTING_MB = 350.0
"""Memory of the process before it holds a state."""
BYTES_PER_WIDTH = 24.0
"""Bytes per (bond dimension times orbitals) squared: from 0.6 GB for 26 orbitals at 128."""
PROFILE_MOVED = 0.05
"""Entropies that change by more between the last two bond dimensions are not settled."""
EXACT_WEIGHT = 1e-10
"""Below this discarded weight there is nothing left to extrapolate."""
_THREADS = ("OMP_NUM_THREADS", "MKL_NUM_THREADS", "OPENBLAS_NUM_THREADS")


class DMRG:
    """Density-matrix renormalisation group, without point-group symmetry, total spin fixed."""

    name = "DMRG"
    citation = (
        "S. R. White, Phys. Rev. Lett. 69, 2863 (1992); G. K.-L. Chan and M. Head-Gordon, J. Chem. Phys. "
        "116, 4462 (2002); H. Zhai and co-workers, J. Chem. Phys. 159, 234801 (2023)"
    )

    def __init__(self, bond_dimension: int = 500) -> None:
        self.bond_dimension = bond_dimension

    def missing(self) -> str:
        """How to get the engine, where it is not installed."""
        if all(importlib.util.find_spec(name) for name in ("block2", "pyblock2")):
            return ""
        return (
            "the DMRG engine block2 is not installed; `pip install plumbrule[dmrg]` adds it "
            "(about 1.1 GB on disk)"
        )

    def reach(self, problem: Problem, memory_mb: float) -> str:
        """Beyond reach where the states would not fit the memory."""
        if problem.size < 2:
            return "one orbital is no chain to sweep along"
        if problem.size > MAX_ORBITALS:
            return f"{problem.size} orbitals are more than the {MAX_ORBITALS} that DMRG is offered for"
        needed = RESTING_MB + BYTES_PER_WIDTH * 1e-6 * (self.bond_dimension * problem.size) ** 2
        if needed > memory_mb:
            return (
                f"DMRG of {problem.size} orbitals with a bond dimension of {self.bond_dimension} needs about "
                f"{needed:.0f} MB, and {memory_mb:.0f} MB are there; a smaller bond dimension would fit"
            )
        return ""

    def solve(self, problem: Problem, tell: Tell, *, threads: int, memory_mb: float) -> Solved:
        """The lowest state of the multiplicity; raises PlumbruleError where the engine fails, or Stopped.

        The energy is that of the largest bond dimension, `extrapolated` that of vanishing discarded weight.
        """
        if reason := self.missing() or self.reach(problem, memory_mb):
            raise PlumbruleError(reason)
        folder = Path(tempfile.mkdtemp(prefix="plumbrule-dmrg-"))
        try:
            self._write_job(folder, problem, threads, memory_mb)
            _run(folder, threads, tell)
            with np.load(folder / RESULT, allow_pickle=False) as found:
                arrays = {name: found[name] for name in found.files}
        finally:
            # What a killed engine still held open goes with the task's own scratch folder.
            shutil.rmtree(folder, ignore_errors=True)
        return _solved(problem, arrays)

    def _write_job(self, folder: Path, problem: Problem, threads: int, memory_mb: float) -> None:
        arrays = {"one": problem.one, "two": problem.two}
        if problem.overlap is not None:
            arrays["overlap"] = problem.overlap
        np.savez(folder / ARRAYS, allow_pickle=False, **arrays)
        job = {
            "alpha": problem.alpha,
            "beta": problem.beta,
            "multiplicity": problem.multiplicity,
            "core_energy": problem.core_energy,
            "bond_dimension": self.bond_dimension,
            "threads": threads,
            "memory_mb": max(128.0, memory_mb - RESTING_MB),
        }
        (folder / JOB).write_text(json.dumps(job))


def _command(folder: Path) -> tuple[str, ...]:
    if getattr(sys, "frozen", False):
        return (sys.executable, DMRG_FLAG, str(folder))
    return (sys.executable, "-P", "-m", "plumbrule_core.correlation.solvers.dmrg_process", str(folder))


def _environment(folder: Path, threads: int) -> Mapping[str, str]:
    variables = dict(os.environ) | {name: str(threads) for name in _THREADS}
    variables |= {"OMP_WAIT_POLICY": "PASSIVE", "KMP_BLOCKTIME": "0", "OMP_DYNAMIC": "FALSE"}
    variables["PYTHONPATH"] = os.pathsep.join(str(Path(entry).absolute()) for entry in sys.path if entry)
    return variables | {"TMPDIR": str(folder)}


@contextlib.contextmanager
def _engine(folder: Path, threads: int) -> Iterator[subprocess.Popen[bytes]]:
    """The engine's process; whatever happens, it is gone at the end."""
    with (folder / "log").open("wb") as log:
        process = subprocess.Popen(
            _command(folder),
            stdin=subprocess.PIPE,
            stdout=subprocess.PIPE,
            stderr=log,
            env=_environment(folder, threads),
            cwd=folder,
        )
    with process:
        try:
            yield process
        finally:
            process.kill()


def _run(folder: Path, threads: int, tell: Tell) -> None:
    """Follow the engine to its end; raises Stopped through `tell`, PlumbruleError where it dies."""
    with _engine(folder, threads) as process:
        lines: queue.SimpleQueue[bytes] = queue.SimpleQueue()
        reader = threading.Thread(target=_read, args=(process, lines), daemon=True)
        reader.start()
        try:
            finished = _follow(lines, tell)
            status = process.wait() if not finished else 0
        finally:
            process.kill()
            reader.join()
        if not finished:
            raise PlumbruleError(_death(folder, status))


def _read(process: subprocess.Popen[bytes], lines: "queue.SimpleQueue[bytes]") -> None:
    assert process.stdout is not None
    for line in process.stdout:
        lines.put(line)
    lines.put(b"")


def _follow(lines: "queue.SimpleQueue[bytes]", tell: Tell) -> bool:
    """Pass on what the engine says; whether it finished."""
    sweeps, what = 0, "starting the DMRG engine"
    while True:
        try:
            line = lines.get(timeout=PULSE)
        except queue.Empty:
            tell.progress(0.0, what)
            continue
        if not line:
            return False
        message: Mapping[str, Any] = json.loads(line)
        if message["kind"] == "done":
            return True
        if message["kind"] == "sweep":
            sweeps += 1
            tell.iteration(sweeps, message["energy"], message["change"], message["stage"])
        else:
            what = message.get("stage") or message["text"]
            tell.progress(0.0, what)


def _death(folder: Path, status: int) -> str:
    said = (folder / "log").read_text(errors="replace").strip().splitlines()
    if status < 0 and not said:
        return (
            f"the DMRG engine was ended by signal {-status}, most likely for want of memory; choose a "
            "smaller bond dimension or active space"
        )
    return f"the DMRG engine failed: {said[-1] if said else f'exit status {status}'}"


def _solved(problem: Problem, arrays: Mapping[str, Any]) -> Solved:
    stages = arrays["stages"]
    energy, reference = float(stages[-1, 1]), reference_energy(problem)
    moved = float(np.abs(arrays["entropies"] - arrays["narrow_entropies"]).max())
    notes = [str(note) for note in arrays["notes"]]
    if moved > PROFILE_MOVED:
        notes.append(
            f"an orbital entropy still changes by {moved:.2f} between bond dimensions {stages[-2, 0]:.0f} "
            f"and {stages[-1, 0]:.0f}; choose a larger one"
        )
    if wrong := energy > reference + 1e-8:
        notes.append("DMRG ended above its own reference determinant, so it is stuck in a wrong state")
    limit, error = extrapolate(stages[:, 2], stages[:, 1])
    notes.append(
        f"bond dimension {stages[-1, 0]:.0f}, discarded weight {stages[-1, 2]:.1e}, extrapolated energy "
        f"{limit:.6f} hartree, give or take {error:.6f}"
    )
    return Solved(
        energy=energy,
        converged=bool(arrays["settled"]) and not wrong,
        densities=arrays["densities"],
        entropies=np.maximum(0.0, arrays["entropies"]),
        narrow_entropies=np.maximum(0.0, arrays["narrow_entropies"]),
        mutual_information=mutual_information(arrays["entropies"], arrays["pair_entropies"]),
        coefficients=Coefficients(
            c0=float(arrays["c0"]),
            **{name: arrays[name] for name in ("c1a", "c1b", "c2aa", "c2ab", "c2bb")},
        ),
        spin_squared=float(arrays["spin_squared"]),
        leading=tuple(
            (
                float(weight),
                tuple(int(p) for p in np.flatnonzero(codes & 1)),
                tuple(int(p) for p in np.flatnonzero(codes & 2)),
            )
            for weight, codes in zip(arrays["leading_weights"], arrays["leading_codes"], strict=True)
        ),
        notes=tuple(notes),
        extrapolated=limit,
        extrapolation_error=error,
    )


def extrapolate(weights: Array, energies: Array) -> tuple[float, float]:
    """The energy at vanishing discarded weight by a straight line, and how far it may be off (hartree).

    The error is taken as large as the step from the last energy to the limit: common practice, no source.
    """
    last = float(energies[-1])
    if weights[-1] < EXACT_WEIGHT or len(weights) < 2 or weights[-2] <= weights[-1]:
        return last, float(abs(energies[-1] - energies[-2])) if len(energies) > 1 else 0.0
    slope = (energies[-2] - energies[-1]) / (weights[-2] - weights[-1])
    limit = last - max(0.0, float(slope)) * float(weights[-1])
    return limit, last - limit


def reference_energy(problem: Problem) -> float:
    """The energy of the reference determinant in hartree."""
    one = problem.one if problem.unrestricted else np.stack([problem.one] * 2)
    two = problem.two if problem.unrestricted else np.stack([problem.two] * 3)
    up, down = slice(problem.alpha), slice(problem.beta)
    energy = np.trace(one[0][up, up]) + np.trace(one[1][down, down])
    for block, filled in ((two[0], up), (two[2], down)):
        inside = block[filled, filled, filled, filled]
        energy += 0.5 * (np.einsum("iijj->", inside) - np.einsum("ijji->", inside))
    energy += np.einsum("iijj->", two[1][up, up, down, down])
    return float(energy + problem.core_energy)
