"""Compute the readings that the verdict tests stand on, and write them to `recorded_readings.json`.

Run from the root of the repository, one thread, about a minute:

    PYTHONPATH=core:resources OMP_NUM_THREADS=1 python tests/core/judgement/record_readings.py
"""

import json
import math
from collections.abc import Mapping
from importlib import metadata
from pathlib import Path

import numpy as np

from plumbrule_core.documents.plan import Settings, TaskSpec
from plumbrule_core.documents.species import Atom, Species
from plumbrule_core.judgement.readings import take
from plumbrule_core.rungs import RUNGS
from plumbrule_core.rungs.protocol import Bench, Given

LADDER = ("HF", "MP2", "CCSD", "CCSD(T)")
LISTS = ("uhf_natural_occupations", "natural_occupations")
FILE = Path(__file__).with_name("recorded_readings.json")


class Quiet:
    def iteration(self, n: int, energy: float, residual: float | None = None, stage: str = "") -> None: ...

    def progress(self, fraction: float, what: str = "") -> None: ...

    def note(self, text: str) -> None: ...

    def checkpoint(self, what: str) -> None: ...


class Forgetful:
    def load(self) -> None:
        return None

    def save(self, arrays: Mapping[str, np.ndarray]) -> None: ...


def twisted_ethylene(degrees: float) -> str:
    cosine, sine, turn = math.cos(math.radians(121.2)), math.sin(math.radians(121.2)), math.radians(degrees)
    end, out = 1.339 / 2 - 1.086 * cosine, 1.086 * sine
    x, y = out * math.cos(turn), out * math.sin(turn)
    carbons = "C 0 0 0.6695; C 0 0 -0.6695"
    return f"{carbons}; H {out} 0 {end}; H {-out} 0 {end}; H {x} {y} {-end}; H {-x} {-y} {-end}"


def water(scale: float) -> str:
    half, length = math.radians(104.52 / 2), 0.9572 * scale
    x, z = length * math.sin(half), length * math.cos(half)
    return f"O 0 0 0; H {x} 0 {z}; H {-x} 0 {z}"


SYSTEMS: dict[str, tuple[str, int, str]] = {
    **{f"N2 at {r} A": (f"N 0 0 0; N 0 0 {r}", 1, "cc-pVDZ") for r in (1.1, 1.3, 1.5, 2.0, 2.2)},
    **{f"ethylene at {d} degrees": (twisted_ethylene(d), 1, "cc-pVDZ") for d in (0, 60, 90)},
    "O3": ("O 0 0 0; O 0 1.0885 0.6697; O 0 -1.0885 0.6697", 1, "cc-pVDZ"),
    "F2": ("F 0 0 0; F 0 0 1.4119", 1, "cc-pVDZ"),
    "C2": ("C 0 0 0; C 0 0 1.2425", 1, "cc-pVDZ"),
    "O2 singlet": ("O 0 0 0; O 0 0 1.2155", 1, "cc-pVDZ"),
    "O2 triplet": ("O 0 0 0; O 0 0 1.2075", 3, "cc-pVDZ"),
    "water": (water(1.0), 1, "cc-pVDZ"),
    "water at twice its bonds": (water(2.0), 1, "cc-pVDZ"),
    "CO": ("C 0 0 0; O 0 0 1.1283", 1, "cc-pVDZ"),
    "H2O2": (
        "O 0 0.7375 -0.0528; O 0 -0.7375 -0.0528; H 0.819 0.817 0.422; H -0.819 -0.817 0.422",
        1,
        "cc-pVDZ",
    ),
    "OH": ("O 0 0 0; H 0 0 0.9697", 2, "cc-pVDZ"),
    "CN": ("C 0 0 0; N 0 0 1.1718", 2, "cc-pVDZ"),
    "H2 at 2.2 A": ("H 0 0 0; H 0 0 2.2", 1, "cc-pVDZ"),
    "H2 at 3.0 A": ("H 0 0 0; H 0 0 3.0", 1, "cc-pVDZ"),
    "LiF at 5.0 A": ("Li 0 0 0; F 0 0 5.0", 1, "cc-pVDZ"),
    "N": ("N 0 0 0", 4, "cc-pVDZ"),
    "O": ("O 0 0 0", 3, "cc-pVDZ"),
    "F": ("F 0 0 0", 2, "cc-pVDZ"),
    "NiO": ("Ni 0 0 0; O 0 0 1.627", 3, "def2-SVP"),
}


def species(xyz: str, multiplicity: int) -> Species:
    rows = [row.split() for row in xyz.split(";")]
    atoms = tuple(Atom(symbol=s, x=float(x), y=float(y), z=float(z)) for s, x, y, z in rows)
    return Species(name="recorded", atoms=atoms, multiplicity=multiplicity)


def record(xyz: str, multiplicity: int, basis: str) -> dict[str, object]:
    bench, one = Bench(), species(xyz, multiplicity)
    energies: dict[str, float] = {}
    readings: dict[str, object] = {}
    notes: list[str] = []
    for rung in LADDER:
        spec = TaskSpec(species=one, rung=rung, settings=Settings(basis=basis), versions="recorded")
        given = Given(spec=spec, bench=bench, shelf=Forgetful(), threads=1, memory_mb=2000)
        outcome = RUNGS[rung].compute(given, Quiet())
        bench.outcomes[rung] = outcome
        energies[rung] = outcome.energy
        notes += [] if rung != "HF" else outcome.notes
        readings |= {r.name: r.value for r in take(rung, bench, spec) if r.name not in LISTS}
        if not outcome.converged:
            notes.append(f"{rung} did not converge")
            break
    shown = {"xyz": xyz, "multiplicity": multiplicity, "basis": basis}
    return {**shown, "energies": energies, "readings": readings, "notes": notes}


def main() -> None:
    made = {"command": __doc__, "pyscf": metadata.version("pyscf")}
    found = {name: record(*system) for name, system in SYSTEMS.items()}
    FILE.write_text(json.dumps({**made, "systems": found}, indent=1) + "\n", encoding="utf-8")


if __name__ == "__main__":
    main()
