"""The line of the method: what the best rung leaves out."""

from collections.abc import Sequence

from plumbrule_core.documents.findings import BudgetLine
from plumbrule_core.judgement.answer import LadderValue
from plumbrule_core.judgement.budget_tables import TABLES, column, in_unit, size_factor
from plumbrule_core.judgement.case import Case
from plumbrule_core.rungs import RUNGS
from plumbrule_core.units import from_hartree

CAUSE = "beyond the top rung"
TWO_SIGMA_OF_MEAN = 2.5
"""Two standard deviations of a normal error, from its mean absolute value: 2 sqrt(pi / 2)."""

DOUBLES = {"CCSD(T)": "CCSD", "TCCSD(T)": "TCCSD"}
"""Rungs that end in perturbative triples, with the rung below them."""

_BEYOND = TABLES["beyond"]


def method_line(case: Case, best: LadderValue, values: Sequence[LadderValue], kind: str) -> BudgetLine | None:
    """CCSD(T): the larger of a floor and a share of (T); below it the statistics of what is left out."""
    if best.rung in _BEYOND["exact"] or _exact(case, best.rung):
        return None
    if best.rung in DOUBLES:
        return _beyond_triples(case, best, values)
    if best.rung in _BEYOND["floors"]:
        size = in_unit(_BEYOND["floors"][best.rung], case.unit)
        return BudgetLine(cause=CAUSE, size=size, unit=case.unit, how="a floor", source=_BEYOND["source"])
    return _left_out(case, best.rung, kind)


def _exact(case: Case, rung: str) -> bool:
    """CISD, CCSD and what is above are exact where no species has more than two correlated electrons."""
    return not any(view.inexact(rung) for view in case.views)


def _beyond_triples(case: Case, best: LadderValue, values: Sequence[LadderValue]) -> BudgetLine:
    wider = {"factor": 1.0, "source": _BEYOND["source"]}
    wider = wider if best.rung == "CCSD(T)" else _BEYOND["tailored"]
    floor = in_unit(wider["factor"] * _BEYOND["floor"], case.unit)
    doubles = next((value for value in values if value.rung == DOUBLES[best.rung]), None)
    if doubles is None:
        how = "the floor; the size of (T) is not known"
        return BudgetLine(cause=CAUSE, size=floor, unit=case.unit, how=how, source=wider["source"])
    triples = from_hartree(abs(best.hartree - doubles.hartree), case.unit)
    part = wider["factor"] * _BEYOND["share_of_triples"]
    share = part * triples
    how = (
        f"{100 * part:.0f} % of what (T) contributes ({triples:.3g} {case.unit})"
        if share > floor
        else f"the floor for {best.rung}"
    )
    return BudgetLine(cause=CAUSE, size=max(floor, share), unit=case.unit, how=how, source=wider["source"])


def _left_out(case: Case, rung: str, kind: str) -> BudgetLine:
    table = TABLES["left_out"]
    row = rung if rung in table else RUNGS[rung].kind
    if row not in table:
        row = "CCSD"
    factor = size_factor(case, kind)
    size = in_unit(TWO_SIGMA_OF_MEAN * factor * column("left_out", row, kind), case.unit)
    how = f"two standard deviations of what {rung} misses of CCSD(T) in {kind} energies"
    return BudgetLine(
        cause=CAUSE, size=size, unit=case.unit, how=how, source=table["guesses"].get(row, table["source"])
    )
