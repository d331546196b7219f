"""Run offers what has no answer yet, and what has one that does not count."""

from types import SimpleNamespace

import pytest

from plumbrule_core.documents.plan import Forecast, Plan, Settings, Task, TaskSpec
from plumbrule_core.documents.results import Result
from plumbrule_core.documents.run_state import RunState, TaskState
from plumbrule_desktop.question_line import QuestionLine


@pytest.mark.parametrize(
    ("flaw", "left"), [({}, False), ({"converged": False}, True), ({"unchecked": True}, True)]
)
@pytest.mark.parametrize("state", ["done", "reused"])
def test_a_result_that_did_not_converge_or_was_not_checked_is_still_to_run(flaw, left, state, water):
    spec = TaskSpec(species=water, rung="HF", settings=Settings(basis="STO-3G"), versions="test")
    cost = Forecast(seconds=1, seconds_low=1, seconds_high=1, memory_mb=1)
    task = Task(id="a", spec=spec, chain="c", forecast=cost)
    result = Result(
        task="a",
        species="water",
        rung="HF",
        basis="STO-3G",
        level="l",
        energy=-75.0,
        seconds=1.0,
        memory_mb=1.0,
        reference="RHF",
        **flaw,
    )
    told = RunState(tasks={"a": TaskState(task="a", state=state, result=result)})
    line = SimpleNamespace(_desk=SimpleNamespace(plan=Plan(tasks=(task,)), state=told))
    assert bool(QuestionLine._left(line).tasks) is left
