import io
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest

from plumbrule_core.casebook import Casebook
from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.questions import EnergyQuestion
from plumbrule_core.documents.results import ArrayRef, Reading, Result
from plumbrule_core.documents.species import Atom, Species

SAMPLES = Path(__file__).parents[2] / "casebooks"


@pytest.fixture
def samples() -> Path:
    return SAMPLES


@pytest.fixture
def water_brief() -> Callable[[str], Brief]:
    atoms = (
        Atom(symbol="O", x=0.0, y=0.0, z=0.117),
        Atom(symbol="H", x=0.0, y=0.757, z=-0.469),
        Atom(symbol="H", x=0.0, y=-0.757, z=-0.469),
    )
    water = Species(name="water", atoms=atoms)

    def make(title: str) -> Brief:
        return Brief(title=title, question=EnergyQuestion(within=4.0), species=(water,))

    return make


@pytest.fixture
def result() -> Callable[..., Result]:
    def make(task: str, energy: float = -76.0, arrays: dict[str, ArrayRef] | None = None) -> Result:
        return Result(
            task=task,
            species="water",
            rung="HF",
            basis="cc-pVDZ",
            level="level",
            energy=energy,
            seconds=0.5,
            memory_mb=60.0,
            reference="RHF",
            readings=(Reading(name="T1", value=0.008), Reading(name="occupations", value=(2.0, 0.0))),
            arrays=arrays or {},
            notes=("followed nothing",),
            used={"guess": "minao"},
        )

    return make


@pytest.fixture
def npy() -> Callable[[object], bytes]:
    def make(values: object) -> bytes:
        buffer = io.BytesIO()
        np.save(buffer, np.asarray(values))
        return buffer.getvalue()

    return make


@pytest.fixture
def closed(tmp_path: Path, result: Callable[..., Result]) -> Path:
    path = tmp_path / "closed.plumb"
    with Casebook.open(path) as book:
        book.add_brief(Brief(title="one"), "Add")
        for n in range(20):
            book.put_result(result(f"t{n}"))
    return path
