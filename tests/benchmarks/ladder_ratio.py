"""What the program adds to the library: the ladder HF, MP2, CCSD, CCSD(T) in cc-pVDZ, frozen core.

Each side is a whole process on one thread, started after the other, from interpreter start to exit: a bare
PySCF script of the same settings, and our rungs with stability analysis, checkpoints on disk and readings.
Prints the times (the best of `--repeats`) on the clock and on the processor, their ratios and the largest
difference of an energy; exits 1 where the ratio of the clock times is above `--limit`.

    python tests/benchmarks/ladder_ratio.py [--molecule ethanol] [--repeats 2] [--limit 1.15]
"""

import argparse
import json
import os
import resource
import subprocess
import sys
import tempfile
import time
from pathlib import Path

BUTADIENE = """C 1.4610 1.1289 0.0
C 0.7335 0.0000 0.0
C -0.7335 0.0000 0.0
C -1.4610 -1.1289 0.0
H 1.2553 -0.9570 0.0
H 2.5455 1.0948 0.0
H 0.9820 2.1024 0.0
H -1.2553 0.9570 0.0
H -2.5455 -1.0948 0.0
H -0.9820 -2.1024 0.0"""
ETHANOL = """C 1.1879 -0.3829 0.0
C 0.0 0.5526 0.0
O -1.1867 -0.2472 0.0
H -1.9237 0.3850 0.0
H 2.0985 0.2306 0.0
H 1.1184 -1.0093 0.8869
H 1.1184 -1.0093 -0.8869
H -0.0227 1.1812 0.8852
H -0.0227 1.1812 -0.8852"""
MOLECULES = {"butadiene": (BUTADIENE, 4), "ethanol": (ETHANOL, 3)}
"""The atoms in angstrom and the number of frozen core orbitals."""
BASIS = "cc-pVDZ"
RUNGS = ("HF", "MP2", "CCSD", "CCSD(T)")
MEMORY_MB = 4000


def bare(name: str) -> dict[str, float]:
    """The ladder as a few lines of PySCF."""
    from pyscf import cc, gto, lib, mp, scf

    lib.num_threads(1)
    atoms, frozen = MOLECULES[name]
    molecule = gto.M(atom=atoms, basis=BASIS, verbose=0, max_memory=MEMORY_MB)
    field = scf.RHF(molecule)
    field.conv_tol, field.conv_tol_grad = 1e-10, 1e-6
    field.kernel()
    second_order = mp.MP2(field, frozen=frozen)
    second_order.kernel()
    coupled = cc.CCSD(field, frozen=frozen)
    coupled.conv_tol, coupled.conv_tol_normt = 1e-8, 1e-6
    integrals = coupled.ao2mo()
    coupled.kernel(eris=integrals)
    triples = coupled.ccsd_t(eris=integrals)
    energies = (field.e_tot, second_order.e_tot, coupled.e_tot, coupled.e_tot + triples)
    return {rung: float(energy) for rung, energy in zip(RUNGS, energies, strict=True)}


def ours(name: str) -> dict[str, float]:
    """The same with our rungs: stability, checkpoints and readings included."""
    from plumbrule_core.documents.plan import Settings, TaskSpec
    from plumbrule_core.documents.species import Atom, Species
    from plumbrule_core.engine.shelf import FolderShelf
    from plumbrule_core.judgement.readings import take
    from plumbrule_core.rungs import RUNGS as ALL
    from plumbrule_core.rungs.protocol import Bench, Given

    rows = [line.split() for line in MOLECULES[name][0].splitlines()]
    atoms = tuple(Atom(symbol=s, x=float(x), y=float(y), z=float(z)) for s, x, y, z in rows)
    species, bench, energies = Species(name=name, atoms=atoms), Bench(), {}
    with tempfile.TemporaryDirectory() as folder:
        for rung in RUNGS:
            spec = TaskSpec(species=species, rung=rung, settings=Settings(basis=BASIS), versions="benchmark")
            shelf = FolderShelf(Path(folder), spec.identity)
            given = Given(spec=spec, bench=bench, shelf=shelf, threads=1, memory_mb=MEMORY_MB)
            outcome = ALL[rung].compute(given, Quiet())
            bench.outcomes[rung] = outcome
            assert take(rung, bench, spec), f"no reading after {rung}"
            energies[rung] = outcome.energy
    return energies


class Quiet:
    """A Tell that nobody listens to."""

    def iteration(self, n: int, energy: float, residual: float | None = None, stage: str = "") -> None:
        """Nothing."""

    def progress(self, fraction: float, what: str = "") -> None:
        """Nothing."""

    def note(self, text: str) -> None:
        """Nothing."""

    def checkpoint(self, what: str) -> None:
        """Nothing."""


def timed(side: str, name: str) -> tuple[float, float, dict[str, float]]:
    """Seconds of one whole process on the clock and on the processor, and its energies."""
    environment = {**os.environ, "OMP_NUM_THREADS": "1", "OMP_WAIT_POLICY": "PASSIVE"}
    begun, busy = time.perf_counter(), processor_seconds()
    done = subprocess.run(
        [sys.executable, __file__, "--side", side, "--molecule", name],
        env=environment,
        capture_output=True,
        text=True,
        check=True,
    )
    return time.perf_counter() - begun, processor_seconds() - busy, json.loads(done.stdout)


def processor_seconds() -> float:
    """Of all children so far."""
    used = resource.getrusage(resource.RUSAGE_CHILDREN)
    return used.ru_utime + used.ru_stime


def main() -> int:
    """Measure both sides and compare."""
    parser = argparse.ArgumentParser(
        description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter
    )
    parser.add_argument("--repeats", type=int, default=2)
    parser.add_argument("--limit", type=float, default=1.15)
    parser.add_argument("--molecule", choices=tuple(MOLECULES), default="butadiene")
    parser.add_argument("--side", choices=("bare", "ours"), help=argparse.SUPPRESS)
    asked = parser.parse_args()
    if asked.side:
        print(json.dumps((bare if asked.side == "bare" else ours)(asked.molecule)))
        return 0
    best = {"bare": float("inf"), "ours": float("inf")}
    busy = dict(best)
    energies: dict[str, dict[str, float]] = {}
    for _ in range(asked.repeats):
        for side in best:
            seconds, processor, energies[side] = timed(side, asked.molecule)
            best[side], busy[side] = min(best[side], seconds), min(busy[side], processor)
    apart = max(abs(energies["bare"][rung] - energies["ours"][rung]) for rung in RUNGS)
    ratio = best["ours"] / best["bare"]
    print(f"clock: bare {best['bare']:.1f} s, ours {best['ours']:.1f} s, ratio {ratio:.3f}")
    share = busy["ours"] / busy["bare"]
    print(f"processor: bare {busy['bare']:.1f} s, ours {busy['ours']:.1f} s, ratio {share:.3f}")
    print(f"energies within {apart:.1e} hartree")
    return int(ratio > asked.limit or apart > 1e-6)


if __name__ == "__main__":
    sys.exit(main())
