"""The solvers of an active space; SOLVERS is the one list."""

from collections.abc import Mapping

from plumbrule_core.correlation.protocol import Problem, Solver
from plumbrule_core.correlation.solvers.exact import Exact
from plumbrule_core.errors import PlumbruleError

SOLVERS: Mapping[str, Solver] = {solver.name: solver for solver in (Exact(),)}


def choose(name: str, problem: Problem, memory_mb: float) -> Solver:
    """The solver of that name, or with "auto" the first one in the list that can be used and reaches so far.

    Raises PlumbruleError, with the reason of each solver, where none will do.
    """
    asked = SOLVERS.values() if name == "auto" else [SOLVERS[name]] if name in SOLVERS else []
    reasons = []
    for solver in asked:
        reason = solver.missing() or solver.reach(problem, memory_mb)
        if not reason:
            return solver
        reasons.append(f"{solver.name}: {reason}")
    if not reasons:
        raise PlumbruleError(f"there is no solver called {name}; choose auto, {', '.join(SOLVERS)}")
    raise PlumbruleError("this active space cannot be solved here; " + "; ".join(reasons))
