"""`plumbrule doctor`: whether everything works on this computer, with one tiny real calculation."""

import argparse
import os
import tempfile
import time
from collections.abc import Iterator
from dataclasses import dataclass
from importlib import metadata
from pathlib import Path
from typing import Any

from plumbrule_core import __version__
from plumbrule_core.documents.amounts import memory
from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.events import Event, Failed
from plumbrule_core.documents.plan import Machine
from plumbrule_core.documents.questions import EnergyQuestion
from plumbrule_core.documents.recipe import Recipe
from plumbrule_core.documents.species import Atom, Species
from plumbrule_core.engine import cache_folder
from plumbrule_core.errors import PlumbruleError
from plumbrule_core.headless.asked import check_output, write_json
from plumbrule_core.headless.endings import ANSWERED, FAILED, print_out
from plumbrule_core.headless.forecast import machine_data
from plumbrule_core.headless.tables import table
from plumbrule_core.planning import versions
from plumbrule_core.session import Session
from plumbrule_core.units import ANGSTROM_PER_BOHR

KNOWN_ENERGY = -1.1373
"""H2 at 1.4 bohr in STO-3G, full CI (CCSD is exact for two electrons), in hartree."""
KNOWN_SOURCE = "Szabo and Ostlund, Modern Quantum Chemistry, 1989, section 4.3"
TOLERANCE = 5e-5
"""Half of the last digit printed there, in hartree."""
PATIENCE = 120.0
"""Seconds that the tiny calculation may take."""
LITTLE_MEMORY_MB, LITTLE_DISK_MB = 2048.0, 2048.0
"""Below this, calculations beyond the smallest fail: common practice, no source."""
OPTIONAL = {
    "block2": "the DMRG engine",
    "PySide6-Essentials": "the window",
    "vtk": "the 3-D picture of the window",
}
TUNING = ("OMP_NUM_THREADS", "OMP_WAIT_POLICY", "PLUMBRULE_CACHE")


@dataclass(frozen=True, slots=True)
class Trial:
    """The tiny calculation: its energy in hartree, how long it took, and what was wrong."""

    energy: float | None
    seconds: float
    problem: str = ""


def command(arguments: argparse.Namespace) -> int:
    """Print versions, machine and the trial; 0 where there is no problem, 3 otherwise."""
    check_output(arguments.json, "--json")
    session = Session.open(None)
    try:
        here = session.machine()
        trial = try_out(session)
    finally:
        session.close()
    problems = [*_problems(here), *([trial.problem] if trial.problem else [])]
    print_out(_text(here, trial, problems))
    write_json(arguments.json, _data(here, trial, problems))
    return FAILED if problems else ANSWERED


def try_out(session: Session) -> Trial:
    """Run the tiny calculation through a worker process, as every other one."""
    number = session.add_brief(_brief())
    reasons: list[str] = []

    def heard(event: Event) -> None:
        if isinstance(event, Failed):
            reasons.append(event.reason)

    start = time.monotonic()
    try:
        run = session.run(number, heard, threads=1)
        ended = run.wait(PATIENCE)
        if not ended:
            run.stop()
            run.wait(10)
    except PlumbruleError as error:
        return Trial(None, time.monotonic() - start, f"the trial calculation could not be started: {error}")
    seconds = time.monotonic() - start
    found = [one.energies.get("CCSD") for one in session.judge(number).species]
    energy = found[0] if found else None
    return Trial(energy, seconds, _trial_problem(energy, ended, reasons))


def _trial_problem(energy: float | None, ended: bool, reasons: list[str]) -> str:
    if not ended:
        return f"the trial calculation did not end within {PATIENCE:.0f} s"
    if energy is None:
        return f"the trial calculation failed: {'; '.join(reasons) or 'no reason was given'}"
    if abs(energy - KNOWN_ENERGY) > TOLERANCE:
        return f"the trial calculation gave {energy:.6f} hartree; {KNOWN_ENERGY} is right ({KNOWN_SOURCE})"
    return ""


def _brief() -> Brief:
    apart = 1.4 * ANGSTROM_PER_BOHR
    atoms = (Atom(symbol="H", x=0.0, y=0.0, z=0.0), Atom(symbol="H", x=0.0, y=0.0, z=apart))
    return Brief(
        title="Trial",
        question=EnergyQuestion(within=1.0),
        species=(Species(name="dihydrogen", atoms=atoms, origin="1.4 bohr"),),
        recipe=Recipe(basis=("STO-3G",), rungs=("HF", "CCSD")),
    )


def _problems(here: Machine) -> Iterator[str]:
    for name, version in versions().items():
        if version == "not installed":
            yield f"{name} is not installed; `pip install plumbrule` brings it"
    if here.memory_mb < LITTLE_MEMORY_MB:
        yield f"only {here.memory_mb:.0f} MB of memory can be used; ordinary molecules need 2 GB or more"
    if here.disk_mb < LITTLE_DISK_MB:
        yield f"only {here.disk_mb:.0f} MB are free on the disk of {cache_folder()}; make room there"
    if not _writable(cache_folder()):
        yield f"{cache_folder()} cannot be written; set PLUMBRULE_CACHE to a folder that can"


def _writable(folder: Path) -> bool:
    try:
        with tempfile.TemporaryFile(dir=folder):
            return True
    except OSError:
        return False


def _engines() -> dict[str, str]:
    """What may be there or not, with its version."""
    found = {}
    for name in OPTIONAL:
        try:
            found[name] = metadata.version(name)
        except metadata.PackageNotFoundError:
            found[name] = "not installed"
    return found


def _text(here: Machine, trial: Trial, problems: list[str]) -> str:
    rows = [(name, version, "") for name, version in versions().items()]
    rows += [(name, version, OPTIONAL[name]) for name, version in _engines().items()]
    lines = [
        table(("what", "version", "for"), rows, words_first=3),
        f"cores {here.cores}, memory {memory(here.memory_mb)}, free disk {memory(here.disk_mb)} "
        f"in {cache_folder()}",
        f"speed {1 / here.seconds_per_gigaflop:.1f} gigaflop a second and core; a worker starts in "
        f"{here.start_seconds:.1f} s",
        _trial_text(trial),
        "\n".join(f"problem: {problem}" for problem in problems) or "no problem found",
    ]
    return "\n\n".join(lines)


def _trial_text(trial: Trial) -> str:
    if trial.energy is None:
        return "trial calculation: no result"
    return (
        f"trial calculation: H2 at 1.4 bohr, CCSD/STO-3G: {trial.energy:.6f} hartree "
        f"in {trial.seconds:.1f} s; known {KNOWN_ENERGY} ({KNOWN_SOURCE})"
    )


def _data(here: Machine, trial: Trial, problems: list[str]) -> dict[str, Any]:
    energy = {"energy": trial.energy} if trial.energy is not None else {}
    return {
        "plumbrule": __version__,
        "versions": dict(versions()),
        "engines": {name: version for name, version in _engines().items() if version != "not installed"},
        "threads": here.cores,
        "machine": machine_data(here),
        "environment": {name: os.environ[name] for name in TUNING if name in os.environ},
        "cache": str(cache_folder()),
        "trial": {
            **energy,
            "known": KNOWN_ENERGY,
            "source": KNOWN_SOURCE,
            "unit": "hartree",
            "seconds": trial.seconds,
        },
        "problems": problems,
    }
