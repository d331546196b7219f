"""Which stored results of a plan belong together."""

from collections.abc import Mapping
from types import MappingProxyType

from plumbrule_core.documents.plan import Plan
from plumbrule_core.documents.results import Result
from plumbrule_core.documents.run_state import RunState

SAME = 1e-6
"""Energies of one task within this many hartree belong to one solution.

A hundred times what a converged rung leaves open, and far below any two solutions that were met.
"""


def standing(plan: Plan, results: Mapping[str, Result]) -> dict[str, Result]:
    """The results (by task id) of this plan that stand on what is stored of the rungs below them.

    A result that was built on another Hartree-Fock solution than the one that is kept now is left out, so
    that no sum, extrapolation or comparison mixes two solutions.
    """
    of_chain: dict[tuple[str, str], float] = {}
    found: dict[str, Result] = {}
    for task in plan.tasks:
        result = results.get(task.id)
        if result is None:
            continue
        of_chain[task.chain, task.spec.rung] = result.energy
        below = ((of_chain.get((task.chain, rung)), energy) for rung, energy in result.stands_on.items())
        if all(now is None or abs(now - then) <= SAME for now, then in below):
            found[task.id] = result
    return found


def unmixed(plan: Plan, state: RunState) -> RunState:
    """The state in which a task waits again whose result stands on another solution than the one below it."""
    found = {key: task.result for key, task in state.tasks.items() if task.result is not None}
    left_out = found.keys() - standing(plan, found).keys()
    if not left_out:
        return state
    tasks = {key: task.waiting if key in left_out else task for key, task in state.tasks.items()}
    return state.model_copy(update={"tasks": MappingProxyType(tasks)})
