"""Which size of the active space an answer is taken from, and how far the sizes lie apart."""

from collections.abc import Sequence
from itertools import pairwise

RULE = "the larger of the two neighbouring sizes whose energies differ least"


def settled(energies: Sequence[float]) -> int:
    """The place where the curve of the energy against the size is flattest (own rule).

    `energies` in hartree, from the smallest space to the largest. Of all steps from one size to the next the
    smallest is taken, and of its two ends the larger space; of equal steps the last. A single size is its own
    answer, and of two the larger is taken. Tailored energies are not variational, so the lowest of them is no
    better than another; that the answer stops moving is the sign that the space is large enough.
    """
    if not energies:
        raise ValueError("no size of the active space has an energy")
    steps = [abs(after - before) for before, after in pairwise(energies)]
    if not steps:
        return 0
    return max(place for place, step in enumerate(steps, start=1) if step <= min(steps))


def spread(energies: Sequence[float]) -> float:
    """The largest difference between two sizes, in hartree."""
    return max(energies) - min(energies)
