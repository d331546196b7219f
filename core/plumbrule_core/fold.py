"""The state of a run as a pure fold over its events: the window, the command and the casebook share it."""

from collections.abc import Mapping
from types import MappingProxyType
from typing import Any

from plumbrule_core.documents.events import (
    Event,
    Failed,
    Finished,
    Iteration,
    Log,
    Measured,
    Progress,
    Started,
    TaskStopped,
)
from plumbrule_core.documents.plan import Plan
from plumbrule_core.documents.run_state import RunState, TaskState

LOG_LINES = 2000
"""So many last lines of a task's log are kept."""
TRACE_POINTS = 5000
"""So many last iterations of a task's trace are kept."""


def begin(plan: Plan) -> RunState:
    """Every task of the plan waits."""
    return RunState(tasks={task.id: TaskState(task=task.id) for task in plan.tasks})


def fold(state: RunState, event: Event) -> RunState:
    """The state after one event. An event that was folded in before changes nothing."""
    if event.seq <= state.seq:
        return state
    changes: dict[str, Any] = {"seq": event.seq}
    before = state.tasks.get(event.task)
    change = _change(before, event) if before is not None else {}
    if before is not None and change:
        after = before.model_copy(update=change)
        changes["tasks"] = MappingProxyType({**state.tasks, event.task: after})
    return state.model_copy(update=changes)


def _change(task: TaskState, event: Event) -> Mapping[str, Any]:
    match event:
        case Started():
            return _started(event)
        case Iteration():
            point = (event.n, event.energy, event.residual)
            return {
                "trace": (*task.trace, point)[-TRACE_POINTS:],
                "what": event.stage or f"iteration {event.n}",
            }
        case Progress():
            return {"fraction": event.fraction, "what": event.what or task.what}
        case Measured():
            return {"readings": (*task.readings, event.reading)}
        case Log():
            return {"log": (*task.log, event.text)[-LOG_LINES:]}
        case Finished() | Failed() | TaskStopped():
            return _ended(event)
        case _:
            return {}


def _started(event: Started) -> Mapping[str, Any]:
    fresh: dict[str, Any] = {"fraction": 0.0, "what": "", "reason": "", "readings": (), "result": None}
    if not event.resumed_from:
        fresh["trace"] = ()
    return {**fresh, "state": "running", "resumed_from": event.resumed_from}


def _ended(event: Finished | Failed | TaskStopped) -> Mapping[str, Any]:
    if isinstance(event, Finished):
        state = "reused" if event.reused else "done"
        result = event.result
        return {"state": state, "fraction": 1.0, "result": result, "readings": result.readings, "reason": ""}
    if isinstance(event, Failed):
        return {"state": "died" if event.died else "failed", "reason": event.reason}
    return {"state": "stopped", "reason": "stopped by the user"}
