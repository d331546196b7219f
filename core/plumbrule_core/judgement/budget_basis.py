"""The line of the basis set: from the statistics of its class, or from two sets where their gap says more."""

from plumbrule_core.basis_sets import Basis
from plumbrule_core.documents.findings import BudgetLine
from plumbrule_core.documents.questions import BondQuestion
from plumbrule_core.judgement.answer import LadderValue
from plumbrule_core.judgement.budget_tables import CLASSES, TABLES, in_unit, size_factor
from plumbrule_core.judgement.case import Case
from plumbrule_core.rungs import RUNGS
from plumbrule_core.units import from_hartree

_TABLE = TABLES["basis_set"]
CORRELATION_CONSISTENT = "cc-p"


def basis_line(case: Case, best: LadderValue, kind: str) -> BudgetLine | None:
    """The larger of twice the class's rms and the difference that two sets of this run show."""
    used = tuple(basis for basis in case.bases if basis.name in best.at)
    if not used:
        return None
    rms, row, doubts = _rms(used, kind, best.extrapolated)
    factor = size_factor(case, kind)
    expected = in_unit(2 * rms * factor, case.unit)
    seen = _internal(case, best)
    measured = seen is not None and seen > expected
    how = (
        f"the limit lies {seen:.3g} {case.unit} from the larger set, more than the {expected:.3g} of "
        "comparable cases"
        if measured
        else f"twice the rms error of CCSD(T) in {row} for {kind} energies{_unlike(best.rung)}"
    )
    settles = _settles_faster(best.rung)
    return BudgetLine(
        cause="basis set",
        size=seen if measured and seen is not None else expected,
        unit=case.unit,
        how="; ".join([how, *doubts]),
        source="this run" if measured else _source(best.rung),
        shift=None if best.extrapolated or settles else _shift(case, used[-1], kind, factor),
    )


def _settles_faster(rung: str) -> bool:
    """Hartree-Fock and functionals, whose energies come to their limit exponentially."""
    return rung == "HF" or RUNGS[rung].kind != "wave function"


def _unlike(rung: str) -> str:
    return f", more than {rung} needs, which settles faster with the basis" if _settles_faster(rung) else ""


def _source(rung: str) -> str:
    return f"{_TABLE['source']}; {_TABLE['mean_field']}" if _settles_faster(rung) else str(_TABLE["source"])


def _internal(case: Case, best: LadderValue) -> float | None:
    if not best.extrapolated:
        return None
    return from_hartree(abs(best.hartree - [*best.at.values()][-1]), case.unit)


def _rms(used: tuple[Basis, ...], kind: str, extrapolated: bool) -> tuple[float, str, tuple[str, ...]]:
    place, largest = CLASSES.index(kind), used[-1]
    factor, doubts = _widened(largest)
    levels = _TABLE["levels"]
    if extrapolated:
        key = "-".join(str(basis.zeta) for basis in used)
        if key in levels:
            return factor * levels[key][place][1], f"the X^-3 limit from {key}", doubts
        five = _TABLE["five"]
        return factor * five["factor"] * levels["3-4"][place][1], "half that of the limit from 3-4", doubts
    return _single(largest, place, factor, doubts)


def _single(
    largest: Basis, place: int, factor: float, doubts: tuple[str, ...]
) -> tuple[float, str, tuple[str, ...]]:
    levels, zeta = _TABLE["levels"], largest.zeta
    if str(zeta) in levels:
        return factor * levels[str(zeta)][place][1], f"{largest.name} (cardinal number {zeta})", doubts
    nearest, rule = ("2", _TABLE["single_zeta"]) if zeta < 2 else ("4", _TABLE["five"])
    return factor * rule["factor"] * levels[nearest][place][1], f"{largest.name}", (*doubts, rule["source"])


def _widened(largest: Basis) -> tuple[float, tuple[str, ...]]:
    factor, doubts = 1.0, ()
    if CORRELATION_CONSISTENT not in largest.name:
        return _TABLE["other_family"]["factor"], (_TABLE["other_family"]["source"],)
    if not largest.diffuse:
        return _TABLE["no_diffuse"]["factor"], (_TABLE["no_diffuse"]["source"],)
    return factor, doubts


def _shift(case: Case, largest: Basis, kind: str, factor: float) -> float | None:
    """The mean error of one set, signed where theory fixes the sign: bonds come out too small."""
    breaking = kind == "atomisation" or isinstance(case.question, BondQuestion)
    sign = 1.0 if breaking else {"ionisation": 1.0, "attachment": -1.0}.get(kind)
    levels = _TABLE["levels"]
    if sign is None or str(largest.zeta) not in levels:
        return None
    if breaking and not _breaks(case):
        sign = -sign
    return sign * in_unit(factor * levels[str(largest.zeta)][CLASSES.index(kind)][0], case.unit)


def _breaks(case: Case) -> bool:
    """Whether the pieces are the products, so that the number is a positive bond or atomisation energy."""
    smallest = min(case.parts, key=lambda part: len(part.species.atoms))
    return smallest.coefficient > 0
