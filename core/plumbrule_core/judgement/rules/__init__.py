"""The rules: each draws findings from readings; `RULES` is the one list."""

from plumbrule_core.judgement.rules import (
    active_space,
    amplitudes,
    basis,
    convergence,
    correlation,
    cost,
    failures,
    hazard,
    ladder,
    meaning,
    one_determinant,
    origin,
    reference,
    relativity,
    shape,
    spin,
    target,
    unchecked,
)
from plumbrule_core.judgement.rules.base import Rule

RULES: tuple[Rule, ...] = (
    *one_determinant.RULES,
    *convergence.RULES,
    *unchecked.RULES,
    *failures.RULES,
    *reference.RULES,
    *spin.RULES,
    *amplitudes.RULES,
    *correlation.RULES,
    *active_space.RULES,
    *ladder.RULES,
    *shape.RULES,
    *origin.RULES,
    *basis.RULES,
    *relativity.RULES,
    *cost.RULES,
    *target.RULES,
    *meaning.RULES,
    *hazard.RULES,
)
"""Every rule, in the order in which findings of equal severity are shown."""
