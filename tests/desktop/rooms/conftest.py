"""Values as a run and a judgement give them, and a desk that shows them without a casebook."""

import math
from collections.abc import Iterator
from types import SimpleNamespace

import pytest

from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.findings import (
    Answer,
    BudgetLine,
    Compared,
    Edit,
    Evidence,
    Finding,
    Judgement,
    Remedy,
    SpeciesJudgement,
    Verdict,
)
from plumbrule_core.documents.plan import Forecast, Plan, Settings, Task, TaskSpec
from plumbrule_core.documents.questions import BondQuestion
from plumbrule_core.documents.recipe import Recipe
from plumbrule_core.documents.results import Reading, Result
from plumbrule_core.documents.run_state import RunState, TaskState
from plumbrule_core.documents.species import Atom, Species
from plumbrule_desktop.state.desk import Desk

RUNGS = ("HF", "MP2", "CCSD", "CCSD(T)")
SETTINGS = Settings(basis="cc-pVTZ")
COSTS = {"HF": 2.0, "MP2": 1.0, "CCSD": 12.0, "CCSD(T)": 20.0}


class ShownDesk(Desk):
    """A desk whose values are put in by hand."""

    def put(self, *, running: bool = False, **values: object) -> None:
        """Replace what is known (`brief`, `plan`, `state`, `judgement`) and announce everything."""
        self._brief_id = 1
        for name, value in values.items():
            setattr(self, f"_{name}", value)
        self._starting, self._running_id = running, 1 if running else None
        self.casebook_changed.emit()
        self.brief_changed.emit()
        self.plan_changed.emit()
        self.run_changed.emit(frozenset(self._state.tasks))
        self.judgement_changed.emit()


def nitrogen(apart: float = 1.098) -> Brief:
    """The bond of nitrogen."""
    molecule = Species(
        name="nitrogen",
        atoms=(Atom(symbol="N", x=0.0, y=0.0, z=0.0), Atom(symbol="N", x=0.0, y=0.0, z=apart)),
    )
    atom = Species(name="N atom", atoms=(Atom(symbol="N", x=0.0, y=0.0, z=0.0),), multiplicity=4)
    question = BondQuestion(within=4.0, species="nitrogen", fragments=("N atom", "N atom"))
    return Brief(question=question, species=(molecule, atom), recipe=Recipe(rungs=RUNGS))


def plan_of(brief: Brief) -> Plan:
    """One chain a species, forecasts of a few seconds."""
    tasks = []
    for species in brief.species:
        for rung in RUNGS:
            spec = TaskSpec(species=species, rung=rung, settings=SETTINGS, versions="test")
            cost = COSTS[rung] / (1 if len(species.atoms) > 1 else 4)
            forecast = Forecast(seconds=cost, seconds_low=cost / 2, seconds_high=cost * 2, memory_mb=300.0)
            tasks.append(Task(id=spec.identity, spec=spec, chain=species.name, forecast=forecast))
    return Plan(tasks=tuple(tasks))


def trace(points: int = 12) -> tuple[tuple[int, float, float | None], ...]:
    """A trace that converges by a factor of five an iteration."""
    return tuple(
        (n, -109.37 - 0.4 * (1 - math.exp(-1.6 * n)), 0.3 * math.exp(-1.6 * n)) for n in range(1, points + 1)
    )


def result(task: Task, energy: float = -109.3) -> Result:
    """A result of a task that ran as forecast."""
    return Result(
        task=task.id,
        species=task.spec.species.name,
        rung=task.spec.rung,
        basis=SETTINGS.basis,
        level=SETTINGS.level,
        energy=energy,
        seconds=task.forecast.seconds,
        memory_mb=210.0,
        reference="RHF",
    )


def state_of(plan: Plan, *states: str) -> RunState:
    """The tasks in these states, in the order of the plan; the rest waits."""
    tasks = {}
    for place, task in enumerate(plan.tasks):
        state = states[place] if place < len(states) else "waiting"
        known = state in ("done", "reused")
        moved = state in ("running", "died", "stopped", "failed")
        tasks[task.id] = TaskState(
            task=task.id,
            state=state,
            fraction=1.0 if known else 0.0,
            what="iteration 7" if state == "running" else "",
            trace=trace(7) if moved else trace() if known and task.spec.rung in ("HF", "CCSD") else (),
            log=("22 orbitals are correlated, 2 are frozen.",) if moved or known else (),
            readings=(Reading(name="T1", value=0.0131),) if known and task.spec.rung == "CCSD" else (),
            reason={
                "failed": "CCSD did not converge in 100 iterations",
                "died": "killed by signal 9, most likely for want of memory",
                "stopped": "stopped by the user",
            }.get(state, ""),
            result=result(task) if known else None,
        )
    return RunState(tasks=tasks, seq=5)


COMPARISON = (
    Compared(rung="HF", value=498.3, from_best=-438.6, basis="cc-pVTZ"),
    Compared(rung="MP2", value=962.1, from_best=25.2, basis="cc-pVTZ", uncertainty=35.0),
    Compared(rung="CCSD", value=898.4, from_best=-38.5, basis="cc-pVTZ", uncertainty=20.0),
    Compared(rung="CCSD(T)", value=936.9, from_best=0.0, basis="cc-pVTZ", uncertainty=12.4),
)
BUDGET = (
    BudgetLine(
        cause="beyond CCSD(T)",
        size=1.4,
        unit="kJ/mol",
        how="a tenth of the triples correction",
        source="own proposal",
    ),
    BudgetLine(
        cause="basis set",
        size=12.2,
        unit="kJ/mol",
        how="twice the rms error of cc-pVTZ for atomisation energies",
        source="44 atomisation energies to the 6Z limit",
        shift=9.8,
    ),
    BudgetLine(
        cause="geometry", size=0.6, unit="kJ/mol", how="0.01 angstrom of one bond", source="arithmetic"
    ),
)
T1 = Finding(
    code="t1-large",
    severity="care",
    species="nitrogen",
    headline="One determinant describes nitrogen less well than usual",
    consequence="The bond energy may be off by more than the budget says.",
    evidence=(Evidence(reading="T1", value=0.024, threshold=0.02, source="Lee and Taylor 1989"),),
    remedies=(
        Remedy(
            label="Use the next larger basis",
            edits=(Edit(path="recipe.basis", value=["cc-pVQZ"]),),
        ),
        Remedy(label="Measure it in another way"),
    ),
)
STRETCHED = Finding(
    code="t2-large",
    severity="stop",
    species="nitrogen",
    headline="The bond of nitrogen is breaking, and coupled cluster cannot follow it",
    consequence="The energy of nitrogen is wrong by tens of kJ/mol; so is the bond energy.",
    evidence=(
        Evidence(reading="largest_t2", value=0.48, threshold=0.2, source="common practice, no source"),
    ),
)


def judged(level: str = "take care") -> Judgement:
    """A judgement of the bond at one level of trust."""
    stop = level == "do not rely on it"
    readings = (
        Reading(name="T1", value=0.024),
        Reading(name="stable", value=True),
        Reading(name="natural_occupations", value=(1.98, 1.97, 1.93, 0.07, 0.03), unit="electrons"),
    )
    verdict = Verdict(
        level=level,
        headline="One determinant does not describe nitrogen"
        if stop
        else "The basis set leaves the most open",
        reasons=("largest doubles amplitude 0.48, over 0.2",)
        if stop
        else ("T1 of nitrogen is 0.024, over 0.02",),
    )
    return Judgement(
        verdict=verdict,
        answer=Answer(
            value=936.9,
            unit="kJ/mol",
            rung="CCSD(T)",
            basis="cc-pVTZ",
            uncertainty=None if stop else 12.4,
            meets_target=None if stop else False,
        ),
        comparison=tuple(one.model_copy(update={"stopped": stop and "CC" in one.rung}) for one in COMPARISON),
        budget=() if stop else BUDGET,
        findings=(STRETCHED, T1) if stop else (T1,),
        species=(
            SpeciesJudgement(
                name="nitrogen",
                formula="N2",
                verdict=verdict,
                energies={"HF": -108.98, "CCSD(T)": -109.37},
                readings=readings,
            ),
            SpeciesJudgement(
                name="N atom",
                formula="N",
                verdict=Verdict(level="sound", headline="One determinant describes it"),
                energies={"HF": -54.40, "CCSD(T)": -54.51},
            ),
        ),
    )


@pytest.fixture
def made() -> SimpleNamespace:
    """The builders of this file."""
    return SimpleNamespace(
        nitrogen=nitrogen, plan_of=plan_of, state_of=state_of, judged=judged, trace=trace, SETTINGS=SETTINGS
    )


@pytest.fixture
def desk(qapp: object) -> Iterator[ShownDesk]:
    """A desk that shows the nitrogen question before any run."""
    shown = ShownDesk()
    brief = nitrogen()
    plan = plan_of(brief)
    shown.put(brief=brief, plan=plan, state=state_of(plan))
    yield shown
    shown.close()


def pytest_collection_modifyitems(items: list[pytest.Item]) -> None:
    """The offscreen platform says on every window that it knows no size hints; that is no fault of ours."""
    for item in items:
        if "/rooms/" in item.path.as_posix():
            item.add_marker(pytest.mark.qt_log_ignore("This plugin does not support propagateSizeHints"))
