"""The face of the core: open a casebook, edit, plan, run, fold events, judge, export.

The window and the headless command use this and `documents`, nothing deeper. One session holds one casebook.
Methods may be called from any one thread at a time; `on_event` of a run comes from the run's own thread.
"""

import threading
from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass
from pathlib import Path

from plumbrule_core import exports, geometry, judgement, planning, question_file
from plumbrule_core.basis_sets import BASES
from plumbrule_core.casebook import BriefEntry, Casebook
from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.edits import edited
from plumbrule_core.documents.events import Event, Finished
from plumbrule_core.documents.findings import Edit, Finding, Judgement
from plumbrule_core.documents.plan import Machine, Plan
from plumbrule_core.documents.results import Result
from plumbrule_core.documents.run_state import RunState
from plumbrule_core.documents.species import Species
from plumbrule_core.engine import LocalExecutor, Run, blob_folder, cache_folder, run_plan
from plumbrule_core.engine import machine as measure_machine
from plumbrule_core.errors import CasebookError, Refused, Unreadable
from plumbrule_core.exports.record import Record
from plumbrule_core.fold import begin, fold
from plumbrule_core.judgement.evidence import LOWER, limits_of
from plumbrule_core.judgement.thresholds import THRESHOLDS
from plumbrule_core.rungs import RUNGS
from plumbrule_resources import demo_questions

CASEBOOK_SUFFIX = ".plumb"


@dataclass(frozen=True, slots=True)
class RungCard:
    """What the window may know of a rung."""

    name: str
    says: str
    kind: str
    citation: str
    needs: tuple[str, ...]


def rung_cards() -> tuple[RungCard, ...]:
    """Every rung that is built, from the cheapest to the dearest of its kind."""
    return tuple(RungCard(r.name, r.says, r.kind, r.citation, tuple(r.needs)) for r in RUNGS.values())


def basis_names() -> tuple[str, ...]:
    """The names of the basis sets that the program knows."""
    return tuple(BASES)


def reading_limit(reading: str, species: Species) -> tuple[float, str, bool] | None:
    """The limit of a reading that fits the species, its unit, and whether to stay below it; else None."""
    for limit in (THRESHOLDS[name] for name in limits_of(reading, species)[:1]):
        return limit.value, limit.unit, reading not in LOWER
    return None


def read_molecules(text: str, name: str = "") -> tuple[Species, ...]:
    """Species from pasted text or SMILES; raises Unreadable. May take a second: call it in a thread."""
    return geometry.read_text(text, name)


def read_molecule_file(path: Path) -> tuple[Species, ...]:
    """Species from a molecule file; raises Unreadable. May take a second: call it in a thread."""
    return geometry.read_file(path)


class Session:
    """One open casebook with what is known of its questions."""

    def __init__(self, casebook: Casebook) -> None:
        self._casebook = casebook
        self._lock = threading.RLock()
        self._machine: Machine | None = None
        self._plans: dict[str, Plan] = {}
        self._live: dict[int, tuple[str, RunState]] = {}
        self._judged: dict[int, tuple[object, Judgement]] = {}

    @classmethod
    def open(cls, path: Path | None = None) -> "Session":
        """Open or create a casebook; None makes an unsaved one. Raises CasebookError."""
        return cls(Casebook.open(path))

    @classmethod
    def demo(cls) -> "Session":
        """An unsaved casebook with the demo questions."""
        session = cls.open(None)
        for path in demo_questions():
            session.add_brief(question_file.read_question(path), "Open the demo")
        session.forget_history()
        return session

    @property
    def path(self) -> Path | None:
        """Where the casebook is saved, or None while it is not."""
        return self._casebook.path

    @property
    def read_only(self) -> bool:
        """Whether another window, or the disk, keeps this one from writing."""
        return self._casebook.read_only

    @property
    def why_read_only(self) -> str:
        """The sentence for people, empty where the casebook can be written."""
        return self._casebook.why_read_only

    @property
    def damaged(self) -> tuple[str, ...]:
        """What could not be read of the casebook, in words."""
        return self._casebook.damaged

    # the questions

    def briefs(self) -> tuple[BriefEntry, ...]:
        """The questions of the casebook in their order, each with its number `id`."""
        return self._casebook.briefs()

    def brief(self, brief_id: int) -> Brief:
        """One question; raises KeyError."""
        return self._casebook.brief(brief_id)

    def add_brief(self, brief: Brief, says: str = "Add a question") -> int:
        """Add a question; returns its number."""
        return self._casebook.add_brief(brief, says)

    def put_brief(self, brief_id: int, brief: Brief, says: str) -> None:
        """Replace a question; `says` names the step in the undo history."""
        self._casebook.put_brief(brief_id, brief, says)

    def edit(self, brief_id: int, edits: Iterable[Edit], says: str) -> Brief:
        """Change a question by edits; raises Refused where the outcome would be no valid brief."""
        brief = edited(self.brief(brief_id), edits)
        self.put_brief(brief_id, brief, says)
        return brief

    def remove_brief(self, brief_id: int, says: str = "Remove the question") -> None:
        """Take a question out of the casebook; results stay."""
        self._casebook.remove_brief(brief_id, says)

    def undo(self) -> str | None:
        """Take the last step back; returns its label."""
        return self._casebook.undo()

    def redo(self) -> str | None:
        """Make the step again; returns its label."""
        return self._casebook.redo()

    def forget_history(self) -> None:
        """Make what was done so far the beginning: undo does not go behind it."""
        self._casebook.forget_history()

    @property
    def undo_label(self) -> str | None:
        """What undo would take back."""
        return self._casebook.undo_label

    @property
    def redo_label(self) -> str | None:
        """What redo would make again."""
        return self._casebook.redo_label

    # planning

    def machine(self) -> Machine:
        """What this computer offers. The first call ever measures for about a second."""
        with self._lock:
            if self._machine is None:
                self._machine = measure_machine(cache_folder())
            return self._machine

    def plan(self, brief_id: int) -> Plan:
        """The tasks with their forecasts, or all faults."""
        brief = self.brief(brief_id)
        with self._lock:
            if brief.digest not in self._plans:
                self._plans[brief.digest] = planning.make_plan(brief, self.machine())
            return self._plans[brief.digest]

    def check(self, brief_id: int) -> tuple[Finding, ...]:
        """Findings that can be made before a second of computing is spent."""
        return judgement.check(self.brief(brief_id), self.plan(brief_id), self.machine())

    # running

    def run(
        self,
        brief_id: int,
        on_event: Callable[[Event], None],
        *,
        threads: int | None = None,
        memory_mb: float | None = None,
    ) -> Run:
        """Start the tasks that are not answered yet; raises Refused or CasebookError.

        Events are folded and stored before `on_event` hears of them, in the run's own thread.
        """
        if self.read_only:
            raise CasebookError(self.why_read_only)
        plan = self.plan(brief_id)
        if plan.faults:
            raise Refused(plan.faults)
        machine = self.machine()
        known = self._known(plan)
        begun = {key: task.waiting for key, task in self.state(brief_id).tasks.items()}
        with self._lock:
            self._live[brief_id] = (_key(plan), RunState(tasks=begun))

        def heard(event: Event) -> None:
            self._fold(brief_id, event)
            on_event(event)

        return run_plan(
            plan,
            known,
            LocalExecutor(),
            heard,
            threads=threads or machine.cores,
            memory_mb=memory_mb or machine.memory_mb,
            cache=cache_folder(),
        )

    def _fold(self, brief_id: int, event: Event) -> None:
        with self._lock:
            key, state = self._live[brief_id]
            state = fold(state, event)
            self._live[brief_id] = (key, state)
            if isinstance(event, Finished) and not event.reused:
                for ref in event.result.arrays.values():
                    self._casebook.put_array(blob_folder(cache_folder()) / f"{ref.blob}.npy")
                self._casebook.put_result(event.result)
            task = state.tasks.get(event.task)
            if task is not None and task.state not in ("waiting", "running", "reused"):
                self._casebook.put_task_state(task)

    def _stored(self, plan: Plan) -> Mapping[str, Result]:
        return planning.standing(plan, self._casebook.results())

    def _known(self, plan: Plan) -> Mapping[str, Result]:
        """What need not be computed again: what did not converge, or was not checked, is."""
        return {key: result for key, result in self._stored(plan).items() if result.settled}

    def state(self, brief_id: int) -> RunState:
        """Where the tasks stand: of the run, or as the casebook remembers them."""
        plan = self.plan(brief_id)
        with self._lock:
            key, live = self._live.get(brief_id, ("", RunState()))
        if key != _key(plan):
            kept = self._casebook.task_states(tuple(task.id for task in plan.tasks))
            live = RunState(tasks={**begin(plan).tasks, **kept})
        return planning.unmixed(plan, live)

    # the outcome

    def judge(self, brief_id: int) -> Judgement:
        """The answer, its budget, the findings and the verdict, from what is known so far."""
        brief, plan = self.brief(brief_id), self.plan(brief_id)
        stored, failed = self._stored(plan), self.state(brief_id).failed
        key = (brief.digest, stored, failed)
        kept = self._judged.get(brief_id)
        if kept is None or kept[0] != key:
            kept = (key, judgement.judge(brief, plan, stored, failed=failed))
            self._judged[brief_id] = kept
        return kept[1]

    def record(self, brief_id: int) -> Record:
        """Everything that an exporter may want to write of one question."""
        plan = self.plan(brief_id)
        return Record(
            brief=self.brief(brief_id),
            plan=plan,
            state=self.state(brief_id),
            results=self._stored(plan),
            judgement=self.judge(brief_id),
            machine=self.machine(),
            versions=planning.versions(),
            array=self._casebook.array,
        )

    def report_html(self, brief_id: int) -> str:
        """The report as one HTML page."""
        return exports.EXPORTS[".html"].write(self.record(brief_id)).decode()

    def export(self, brief_id: int, path: Path) -> None:
        """Write one question in the format that the suffix names; raises Unreadable for an unknown one."""
        exporter = exports.EXPORTS.get(path.suffix.lower())
        if exporter is None:
            raise Unreadable(f"'{path.name}' ends in none of {', '.join(exports.EXPORTS)}")
        exports.save(path, exporter.write(self.record(brief_id)))

    @staticmethod
    def export_suffixes() -> Mapping[str, str]:
        """The formats that can be written: suffix to what it is, in words."""
        return {suffix: exporter.name for suffix, exporter in exports.EXPORTS.items()}

    def save_copy(self, path: Path) -> None:
        """Write the whole casebook to another file; raises CasebookError."""
        self._casebook.save_copy(path)

    def close(self) -> None:
        """Close the casebook; a run must have ended before."""
        self._casebook.close()


def _key(plan: Plan) -> str:
    return " ".join(task.id for task in plan.tasks)
