"""How long strong correlation takes to be looked for: naphthalene (ten heavy atoms), 20 orbitals.

Computes HF, then the rung "Active space" up to its profile, and prints the seconds of each stage on the
clock, the seconds of the processors, the profile and the space that it asks for; exits 1 where the detection
took longer than `--limit` seconds on the clock, or where the profile is not settled. The accurate solution
of the chosen space comes after the detection and is not part of it.

    python tests/benchmarks/detection_time.py [--basis 6-31G*] [--threads 2] [--limit 300]
"""

import argparse
import contextlib
import math
import resource
import sys
import time

from plumbrule_core.correlation.proposal import propose
from plumbrule_core.correlation.stored import profile_of_arrays
from plumbrule_core.documents.plan import Settings, TaskSpec
from plumbrule_core.documents.species import Atom, Species
from plumbrule_core.errors import Stopped
from plumbrule_core.rungs.active_space import ActiveSpace
from plumbrule_core.rungs.hartree_fock import HartreeFock
from plumbrule_core.rungs.protocol import Bench, Given

BOND, BOND_TO_HYDROGEN = 1.40, 1.09
"""Angstrom; two regular hexagons that share an edge are near enough to naphthalene."""


def naphthalene() -> Species:
    """Ten carbon and eight hydrogen atoms in one plane."""
    centres = [(-BOND * math.cos(math.pi / 6), 0.0), (BOND * math.cos(math.pi / 6), 0.0)]
    atoms: dict[tuple[float, float], Atom] = {}
    for x, y in centres:
        for corner in range(6):
            angle = math.pi / 6 + corner * math.pi / 3
            across, along = math.cos(angle), math.sin(angle)
            place = (x + BOND * across, y + BOND * along)
            atoms[round(place[0], 4), round(place[1], 4)] = Atom(symbol="C", x=place[0], y=place[1], z=0.0)
            if abs(place[0]) > 0.1:
                far = BOND + BOND_TO_HYDROGEN
                outer = (x + far * across, y + far * along)
                atoms[round(outer[0], 4), round(outer[1], 4)] = Atom(
                    symbol="H", x=outer[0], y=outer[1], z=0.0
                )
    return Species(name="naphthalene", atoms=tuple(atoms.values()))


class Clock:
    """A Tell that says the stages with their times, and ends the rung once the profile is safe."""

    def __init__(self) -> None:
        self.begun, self.stages = time.perf_counter(), set[str]()

    def iteration(self, n: int, energy: float, residual: float | None = None, stage: str = "") -> None:
        """The first iteration of each stage."""
        if stage not in self.stages:
            self.stages.add(stage)
            print(f"{time.perf_counter() - self.begun:7.1f} s  {stage}", flush=True)

    def progress(self, fraction: float, what: str = "") -> None:
        """A stage without iterations."""
        self.iteration(0, 0.0, None, what)

    def note(self, text: str) -> None:
        """A line for people."""
        print(f"           {text}", flush=True)

    def checkpoint(self, what: str) -> None:
        """The profile is there: the detection is done."""
        raise Stopped


class KeptShelf:
    """Keeps the checkpoint in memory."""

    kept: dict[str, object] | None = None

    def load(self) -> None:
        """Nothing to carry on from."""

    def save(self, arrays: dict[str, object]) -> None:
        """Keep it."""
        self.kept = dict(arrays)


class Silent(Clock):
    """A Tell that nobody listens to."""

    def iteration(self, n: int, energy: float, residual: float | None = None, stage: str = "") -> None:
        """Nothing."""

    def note(self, text: str) -> None:
        """Nothing."""

    def checkpoint(self, what: str) -> None:
        """Nothing."""


def processor_seconds() -> float:
    """Of this process and its children so far."""
    used = [resource.getrusage(who) for who in (resource.RUSAGE_SELF, resource.RUSAGE_CHILDREN)]
    return sum(one.ru_utime + one.ru_stime for one in used)


def main() -> int:
    """Measure and compare with the limit."""
    parser = argparse.ArgumentParser(
        description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter
    )
    parser.add_argument("--basis", default="6-31G*")
    parser.add_argument("--threads", type=int, default=2)
    parser.add_argument("--limit", type=float, default=300.0)
    asked = parser.parse_args()
    species, bench, shelf = naphthalene(), Bench(), KeptShelf()
    assert species.formula == "C10H8"
    settings = Settings(basis=asked.basis)

    def given(rung: str) -> Given:
        spec = TaskSpec(species=species, rung=rung, settings=settings, versions="benchmark")
        return Given(spec=spec, bench=bench, shelf=shelf, threads=asked.threads, memory_mb=6000)

    begun = time.perf_counter()
    HartreeFock().compute(given("HF"), Silent())
    print(f"HF/{asked.basis} took {time.perf_counter() - begun:.1f} s", flush=True)
    begun, busy = time.perf_counter(), processor_seconds()
    with contextlib.suppress(Stopped):
        ActiveSpace().compute(given("Active space"), Clock())
    seconds, busy = time.perf_counter() - begun, processor_seconds() - busy
    profile = profile_of_arrays(shelf.kept or {})
    print(f"detection: {seconds:.0f} s on the clock, {busy:.0f} s of the processors")
    for number, entropy in zip(profile.orbitals, profile.entropies, strict=True):
        print(f"  orbital {number:3d}  entropy {entropy:.3f}")
    print(f"largest change between two settings {profile.change:.4f}")
    print(propose(profile).space.label, propose(profile).space.why)
    return int(seconds > asked.limit or not profile.settled)


if __name__ == "__main__":
    sys.exit(main())
