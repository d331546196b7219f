"""The uncertainty of a difference of energies, split into its causes.

Every size is at two standard deviations, in the user's unit. Where two calculations measure a cause, that is
used; else the statistics of `basis_errors.json`, each with its source. A known bias is a `shift`: what would
have to be added to the number; it is shown, and not hidden in the bar. A total energy has no budget.
"""

import math
from collections.abc import Sequence

from plumbrule_core.documents.findings import BudgetLine
from plumbrule_core.documents.questions import EnergyQuestion
from plumbrule_core.judgement.answer import LadderValue
from plumbrule_core.judgement.budget_basis import basis_line
from plumbrule_core.judgement.budget_method import method_line
from plumbrule_core.judgement.budget_physics import core_line, geometry_line, relativity_line, spin_orbit_line
from plumbrule_core.judgement.budget_space import space_line
from plumbrule_core.judgement.budget_tables import energy_class
from plumbrule_core.judgement.case import Case


def budget(case: Case, best: LadderValue, values: Sequence[LadderValue]) -> tuple[BudgetLine, ...]:
    """The causes of uncertainty of the best rung's answer, the largest first; empty for a total energy."""
    if isinstance(case.question, EnergyQuestion) or not case.parts:
        return ()
    kind = energy_class(case)
    lines = (
        basis_line(case, best, kind),
        method_line(case, best, values, kind),
        space_line(case, best),
        core_line(case, kind),
        relativity_line(case, kind),
        geometry_line(case),
        spin_orbit_line(case),
    )
    return tuple(sorted((line for line in lines if line is not None), key=lambda line: -line.size))


def combined(lines: Sequence[BudgetLine]) -> float | None:
    """Independent causes in quadrature; None where there is no line."""
    return math.sqrt(math.fsum(line.size**2 for line in lines)) if lines else None
