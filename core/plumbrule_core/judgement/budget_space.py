"""The line of the active space: how far the tailored answer still moves as the space grows."""

import math

from plumbrule_core.documents.findings import BudgetLine
from plumbrule_core.documents.results import Result
from plumbrule_core.judgement.answer import LadderValue
from plumbrule_core.judgement.case import Case
from plumbrule_core.units import from_hartree

CAUSE = "active-space choice"
LAST_SIZES = 3
SOURCE = "estimate: half of how far the energies of the last sizes lie apart, the species in quadrature"


def space_line(case: Case, best: LadderValue) -> BudgetLine | None:
    """Half the spread over the last sizes; nothing where no species was followed over two sizes or more."""
    basis = [*best.at][-1]
    sizes = [
        part.coefficient * half
        for part in case.parts
        if (result := case.view(part.species).results.get((best.rung, basis))) is not None
        and (half := half_spread(result)) is not None
    ]
    if not sizes:
        return None
    return BudgetLine(
        cause=CAUSE,
        size=from_hartree(math.hypot(*sizes), case.unit),
        unit=case.unit,
        how=f"half the spread of {best.rung} over the last sizes of the active space",
        source=SOURCE,
    )


def half_spread(result: Result) -> float | None:
    """Half the largest difference, in hartree, of the last sizes; None where fewer than two are known."""
    energies = [point.energies[result.rung] for point in result.growth if result.rung in point.energies]
    last = energies[-LAST_SIZES:]
    return (max(last) - min(last)) / 2 if len(last) > 1 else None
