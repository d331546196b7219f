"""The solvers of an active space; SOLVERS is the one list, in the order in which "auto" asks them."""

from collections.abc import Mapping

from plumbrule_core.correlation.protocol import Problem, Solver
from plumbrule_core.correlation.solvers.dmrg import DMRG
from plumbrule_core.correlation.solvers.exact import Exact, determinants
from plumbrule_core.correlation.solvers.selected import SelectedCI
from plumbrule_core.errors import PlumbruleError

SOLVERS: Mapping[str, Solver] = {solver.name: solver for solver in (Exact(), DMRG(), SelectedCI())}
QUICK = 1_000_000
"""Determinants up to which "auto" prefers exact diagonalisation; above, DMRG is faster (own measurement)."""


def choose(name: str, problem: Problem, memory_mb: float, bond_dimension: int | None = None) -> Solver:
    """The solver of that name, or with "auto" the best one that can be used and reaches so far.

    `bond_dimension` is for DMRG. Raises PlumbruleError, with each solver's reason, where none will do.
    """
    offered = dict(SOLVERS)
    if bond_dimension is not None:
        offered[DMRG.name] = DMRG(bond_dimension)
    if name != "auto" and name not in offered:
        raise PlumbruleError(f"there is no solver called {name}; choose auto, {', '.join(offered)}")
    names = [name] if name != "auto" else _in_order(problem)
    reasons = []
    for solver in (offered[one] for one in names):
        reason = solver.missing() or solver.reach(problem, memory_mb)
        if not reason:
            return solver
        reasons.append(f"{solver.name}: {reason}")
    raise PlumbruleError("this active space cannot be solved here; " + "; ".join(reasons))


def _in_order(problem: Problem) -> list[str]:
    if determinants(problem) <= QUICK:
        return list(SOLVERS)
    return [DMRG.name, *(name for name in SOLVERS if name != DMRG.name)]
