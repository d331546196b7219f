"""A record as a run leaves it, made by hand: an answered reaction of two species with a finding."""

import pytest

from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.findings import (
    Answer,
    BudgetLine,
    Compared,
    Evidence,
    Finding,
    Judgement,
    Remedy,
    SpeciesJudgement,
    Verdict,
)
from plumbrule_core.documents.plan import Forecast, Machine, Plan, Settings, Task, TaskSpec
from plumbrule_core.documents.questions import ReactionQuestion
from plumbrule_core.documents.recipe import Recipe
from plumbrule_core.documents.results import Reading, Result
from plumbrule_core.documents.run_state import RunState, TaskState
from plumbrule_core.documents.species import Atom, Species
from plumbrule_core.exports.record import Record

NASTY = "h2 <script>alert('x')</script>"
ENERGIES = {
    "h": {"HF": -0.4993, "CCSD": -0.4993},
    NASTY: {"HF": -1.1287, "CCSD": -1.1634},
}
READINGS = (
    Reading(name="T1", value=0.031),
    Reading(name="D1", value=0.04),
    Reading(name="stable", value=True),
    Reading(name="natural_occupations", value=(1.97, 0.03), unit="electrons"),
)


def species():
    two = (Atom(symbol="H", x=0.0, y=0.0, z=0.0), Atom(symbol="H", x=0.0, y=0.1, z=0.7412345678901))
    return (
        Species(name="h", atoms=two[:1], multiplicity=2),
        Species(name=NASTY, atoms=two, origin="built from SMILES [H][H]"),
    )


def brief():
    return Brief(
        title="A <b>title</b> & more",
        question=ReactionQuestion(within=4.0, terms={"h": 2.0, NASTY: -1.0}),
        species=species(),
        recipe=Recipe(basis=("cc-pVDZ",), rungs=("HF", "CCSD")),
    )


def tasks():
    settings = Settings(basis="cc-pVDZ")
    for one in species():
        for rung in ("HF", "CCSD"):
            spec = TaskSpec(species=one, rung=rung, settings=settings, versions="test")
            forecast = Forecast(seconds=1.0, seconds_low=0.5, seconds_high=2.0, memory_mb=100.0)
            needs = ("HF",) if rung == "CCSD" else ()
            yield Task(id=spec.identity, spec=spec, needs=needs, chain=one.content, forecast=forecast)


def result_of(task):
    name, rung = task.spec.species.name, task.spec.rung
    return Result(
        task=task.id,
        species=name,
        rung=rung,
        basis="cc-pVDZ",
        level=task.spec.settings.level,
        energy=ENERGIES[name][rung],
        correlation=ENERGIES[name][rung] - ENERGIES[name]["HF"],
        iterations=7,
        seconds=1.2,
        memory_mb=120.0,
        reference="UHF" if name == "h" else "RHF",
        readings=READINGS if (name, rung) == (NASTY, "CCSD") else (),
        used={"threads": "2", "starting guess": "minimal basis"},
    )


def judgement():
    return Judgement(
        verdict=Verdict(level="take care", headline="Take care: T1 is large.", reasons=("T1 is large.",)),
        answer=Answer(
            value=432.123, unit="kJ/mol", rung="CCSD", basis="cc-pVDZ", uncertainty=12.34, meets_target=False
        ),
        comparison=(
            Compared(rung="HF", value=341.4, from_best=-90.723, basis="cc-pVDZ", stopped=True),
            Compared(rung="CCSD", value=432.123, from_best=0.0, basis="cc-pVDZ", uncertainty=12.34),
        ),
        budget=(
            BudgetLine(cause="basis set", size=12.0, unit="kJ/mol", how="twice the rms", source="own table"),
            BudgetLine(
                cause="geometry", size=0.6, unit="kJ/mol", how="half k d^2", source="arithmetic", shift=-0.2
            ),
        ),
        findings=(
            Finding(
                code="t1-large",
                severity="care",
                species=NASTY,
                headline="T1 is 0.031.",
                consequence="The energy may be off.",
                evidence=(Evidence(reading="T1", value=0.031, threshold=0.02, source="Lee and Taylor 1989"),),
                remedies=(Remedy(label="Add the next basis set"),),
            ),
        ),
        species=(
            SpeciesJudgement(
                name=NASTY,
                formula="H2",
                verdict=Verdict(level="take care", reasons=("T1 is large.",)),
                energies=ENERGIES[NASTY],
                readings=READINGS,
            ),
        ),
        citations=("C. Itation, J. Chem. Phys. 1, 1 (1999)",),
    )


def no_array(ref):
    raise KeyError(ref.blob)


@pytest.fixture
def record():
    planned = tuple(tasks())
    results = {task.id: result_of(task) for task in planned}
    states = {
        task.id: TaskState(task=task.id, state="done", trace=((1, -1.0, None), (2, -1.1, 1e-6)))
        for task in planned
    }
    return Record(
        brief=brief(),
        plan=Plan(tasks=planned, notes=("The answer is electronic.",)),
        state=RunState(tasks=states),
        results=results,
        judgement=judgement(),
        machine=Machine(cores=2, memory_mb=24576.0, disk_mb=50000.0),
        versions={"plumbrule": "0.1.0", "pyscf": "2.14.0"},
        array=no_array,
    )


@pytest.fixture
def empty_record(record):
    """The same question before anything was computed."""
    return Record(
        brief=record.brief,
        plan=record.plan,
        state=RunState(),
        results={},
        judgement=Judgement(verdict=Verdict(level="unknown")),
        machine=record.machine,
        versions=record.versions,
        array=no_array,
    )


@pytest.fixture
def unasked_record(empty_record):
    """Molecules without a question, as while the user is still drawing."""
    return Record(
        brief=Brief(species=species()),
        plan=Plan(faults=Brief(species=species()).faults()),
        state=RunState(),
        results={},
        judgement=empty_record.judgement,
        machine=empty_record.machine,
        versions=empty_record.versions,
        array=no_array,
    )
