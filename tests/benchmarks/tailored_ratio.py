"""What tailoring costs: TCCSD of butadiene/cc-pVDZ, space (4,4), against CCSD and the active space alone.

All run in one process on one thread, on the same integrals, one after the other, the order turned round from
repeat to repeat; the best of `--repeats` counts. TCCSD starts from MP2 and writes checkpoints as CCSD does,
and solves its active space within its own time. A series of growing spaces is timed too. Prints the seconds
(processor time), the iterations, and two ratios: TCCSD / (CCSD + active space) as they ran, and the same
where CCSD is given as many iterations as TCCSD took; exits 1 where either is above `--limit`.

    python tests/benchmarks/tailored_ratio.py [--repeats 3] [--limit 1.1]
"""

import argparse
import sys
import tempfile
import time
from collections.abc import Callable
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from plumbrule_core.correlation.integrals import problem_from
from plumbrule_core.correlation.solvers import SOLVERS
from plumbrule_core.documents.active_space import Space
from plumbrule_core.documents.plan import Settings, TaskSpec
from plumbrule_core.documents.species import Atom, Species
from plumbrule_core.engine.shelf import FolderShelf
from plumbrule_core.rungs import RUNGS
from plumbrule_core.rungs.correlated.solvers import integrals
from plumbrule_core.rungs.protocol import Bench, Given, Outcome
from plumbrule_core.rungs.tccsd import TCCSD

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
MEMORY_MB = 4000
CHOSEN = Space(electrons=4, orbitals=(14, 15, 16, 17))
SERIES = (
    Space(electrons=2, orbitals=(15, 16)),
    CHOSEN,
    Space(electrons=6, orbitals=(13, 14, 15, 16, 17, 18)),
)


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


@dataclass
class Race:
    """The molecule on a bench with its integrals made, and a fresh shelf for every run."""

    folder: Path
    bench: Bench = field(default_factory=Bench)
    runs: int = 0

    def given(self, rung: str) -> Given:
        """What a rung computes with."""
        rows = [line.split() for line in BUTADIENE.splitlines()]
        atoms = tuple(Atom(symbol=s, x=float(x), y=float(y), z=float(z)) for s, x, y, z in rows)
        spec = TaskSpec(
            species=Species(name="butadiene", atoms=atoms),
            rung=rung,
            settings=Settings(basis="cc-pVDZ"),
            versions="benchmark",
        )
        self.runs += 1
        shelf = FolderShelf(self.folder, f"{spec.identity}-{self.runs}")
        return Given(spec=spec, bench=self.bench, shelf=shelf, threads=1, memory_mb=MEMORY_MB)

    def field(self) -> None:
        """Hartree-Fock and the integrals, which both methods share."""
        RUNGS["HF"].compute(self.given("HF"), Quiet())
        integrals(self.given("CCSD"))

    def ccsd(self) -> Outcome:
        """Plain CCSD."""
        return RUNGS["CCSD"].compute(self.given("CCSD"), Quiet())

    def space(self) -> Any:
        """The chosen active space alone."""
        orbitals = self.bench.mean_field.mo_coeff
        core, active = range(13), [number - 1 for number in CHOSEN.orbitals]
        problem = problem_from(self.bench.mean_field, orbitals, core, active, 1)
        return SOLVERS["exact"].solve(problem, Quiet(), threads=1, memory_mb=MEMORY_MB)

    def tailored(self) -> Outcome:
        """TCCSD in the chosen space, from MP2."""
        self.bench.space, self.bench.growth_spaces, self.bench.coupled_cluster = CHOSEN, (), None
        return TCCSD().compute(self.given("TCCSD"), Quiet())

    def series(self) -> Outcome:
        """TCCSD in three spaces, from MP2 the first."""
        self.bench.space, self.bench.growth_spaces, self.bench.coupled_cluster = CHOSEN, SERIES, None
        return TCCSD().compute(self.given("TCCSD"), Quiet())


def timed(run: Callable[[], Any]) -> tuple[float, Any]:
    """Processor seconds, which other programs on the machine disturb less, and what came out."""
    begun = time.process_time()
    found = run()
    return time.process_time() - begun, found


def main() -> int:
    """Measure and compare."""
    parser = argparse.ArgumentParser(
        description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter
    )
    parser.add_argument("--repeats", type=int, default=3)
    parser.add_argument("--limit", type=float, default=1.1)
    asked = parser.parse_args()
    with tempfile.TemporaryDirectory() as folder:
        race = Race(Path(folder))
        race.field()
        runs = {"CCSD": race.ccsd, "space": race.space, "TCCSD": race.tailored, "series": race.series}
        best, found = dict.fromkeys(runs, float("inf")), {}
        for repeat in range(asked.repeats):
            order = list(runs) if repeat % 2 == 0 else list(runs)[::-1]
            for name in order:
                seconds, found[name] = timed(runs[name])
                best[name] = min(best[name], seconds)
    for name in ("CCSD", "TCCSD", "series"):
        print(f"{name}: {best[name]:.2f} s, {found[name].iterations} iterations")
    print(f"active space alone: {best['space']:.2f} s")
    ratio = best["TCCSD"] / (best["CCSD"] + best["space"])
    as_many = best["CCSD"] * found["TCCSD"].iterations / found["CCSD"].iterations
    equal = best["TCCSD"] / (as_many + best["space"])
    print(f"TCCSD / (CCSD + active space): {ratio:.3f}, at equal numbers of iterations {equal:.3f}")
    print(f"series of {len(SERIES)} sizes / its last member alone: {best['series'] / best['TCCSD']:.2f}")
    return int(max(ratio, equal) > asked.limit)


if __name__ == "__main__":
    sys.exit(main())
