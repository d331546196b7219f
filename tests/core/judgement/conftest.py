"""Recorded systems as cases: real readings, computed by `record_readings.py`."""

import json
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

from plumbrule_core.documents.findings import Judgement
from plumbrule_core.judgement import judge
from plumbrule_core.judgement.rules.example import Example, Molecule, case_of

SYSTEMS = json.loads(Path(__file__).with_name("recorded_readings.json").read_text(encoding="utf-8"))[
    "systems"
]


def molecule(name: str) -> Molecule:
    row = SYSTEMS[name]
    return Molecule(
        xyz=row["xyz"],
        multiplicity=row["multiplicity"],
        energies=row["energies"],
        readings=row["readings"],
        notes=tuple(row["notes"]),
    )


def example(
    question: dict[str, Any] | None = None, recipe: dict[str, Any] | None = None, **names: str
) -> Example:
    basis = SYSTEMS[next(iter(names.values()))]["basis"]
    return Example(
        molecules={short: molecule(name) for short, name in names.items()},
        question=question or {},
        recipe={"basis": [basis], **(recipe or {})},
    )


def judged(one: Example) -> Judgement:
    case = case_of(one)
    return judge(case.brief, case.plan, case.results)


@pytest.fixture(scope="session")
def recorded() -> Callable[..., Judgement]:
    """`recorded(question, recipe, short="system")` judges recorded systems."""

    def make(
        question: dict[str, Any] | None = None, recipe: dict[str, Any] | None = None, **names: str
    ) -> Judgement:
        return judged(example(question, recipe, **names))

    return make


@pytest.fixture(scope="session")
def recorded_example() -> Callable[..., Example]:
    return example
