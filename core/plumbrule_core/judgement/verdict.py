"""How far the number can be trusted: the worst finding that applies to the rung the answer stands on."""

from collections.abc import Iterable, Sequence

from plumbrule_core.documents.findings import SEVERITIES, Answer, Finding, Level, Severity, Verdict
from plumbrule_core.judgement.answer import LadderValue
from plumbrule_core.judgement.case import Case, SpeciesView
from plumbrule_core.judgement.wording import in_unit, listed
from plumbrule_core.rungs import RUNGS, stands_on_space

LEVELS: dict[Severity, Level] = {"note": "sound", "care": "take care", "stop": "do not rely on it"}


def applies(finding: Finding, rung: str) -> bool:
    """Whether a finding speaks of a rung, or of the whole answer."""
    return not finding.rungs or rung in finding.rungs


def stopped(findings: Iterable[Finding], rung: str) -> bool:
    """Whether a finding says that the number of this rung is not to be used."""
    return any(one.severity == "stop" and applies(one, rung) for one in findings)


def best_of(values: Sequence[LadderValue], findings: Sequence[Finding]) -> LadderValue | None:
    """The rung the answer stands on: the highest of the ladder that is not stopped.

    Functionals only where there is no wave function. Where all are stopped, the highest is still shown.
    """
    ranked = sorted(
        values, key=lambda v: (RUNGS[v.rung].kind == "wave function", RUNGS[v.rung].rank), reverse=True
    )
    kinds = {RUNGS[value.rung].kind for value in ranked}
    if "wave function" in kinds:
        ranked = [value for value in ranked if RUNGS[value.rung].kind == "wave function"]
    standing = [value for value in ranked if not stopped(findings, value.rung)]
    return next(iter(standing or ranked), None)


def ordered(findings: Iterable[Finding], rung: str = "") -> tuple[Finding, ...]:
    """The worst first, those that speak of the answer's rung before others; else the order of the rules."""
    return tuple(sorted(findings, key=lambda one: (-SEVERITIES.index(one.severity), not applies(one, rung))))


def worst(findings: Iterable[Finding]) -> Severity:
    """The worst severity; a note where there is none."""
    return max((one.severity for one in findings), key=SEVERITIES.index, default="note")


def overall(
    case: Case, best: LadderValue | None, answer: Answer | None, findings: Sequence[Finding]
) -> Verdict:
    """The verdict on the answer; findings are ordered, the worst first."""
    if best is None or answer is None:
        return _without_answer(case, findings)
    touching = [one for one in findings if applies(one, best.rung)]
    telling = [one for one in touching if one.severity != "note"]
    lost = _lost_rungs(case, best, findings)
    stepped = _stepped_down(best, lost, findings) if lost and not stopped(findings, best.rung) else ()
    severity = worst(touching)
    if stepped and severity == "note":
        severity = "care"
    reasons = tuple(dict.fromkeys([*(one.headline for one in telling), *stepped]))
    if severity == "note":
        return _calm(case, best, answer, findings)
    headline = reasons[0]
    return Verdict(level=LEVELS[severity], headline=_led(severity, headline), reasons=reasons or (headline,))


def _lost_rungs(case: Case, best: LadderValue, findings: Sequence[Finding]) -> tuple[str, ...]:
    """The rungs that are stopped and that the answer would rather stand on, the best of them last.

    Where it stands on an active space, these are all that stand on one determinant.
    """
    above = [n for n in case.wave_functions if _better(n, best.rung)]
    return tuple(name for name in above if stopped(findings, name))


def _better(rung: str, best: str) -> bool:
    moved = RUNGS[rung].single_reference and stands_on_space(best)
    return RUNGS[rung].rank > RUNGS[best].rank or (moved and rung != "HF")


def _stepped_down(best: LadderValue, lost: Sequence[str], findings: Sequence[Finding]) -> tuple[str, ...]:
    """Why the answer does not stand on the best of the lost rungs."""
    why = next(one.headline for one in findings if one.severity == "stop" and applies(one, lost[-1]))
    return (f"{why.rstrip('.')}, so the answer stands on {best.rung} and not on {lost[-1]}.",)


def _led(severity: Severity, headline: str) -> str:
    lead = {"care": "Take care", "stop": "Do not rely on it"}[severity]
    return f"{lead}: {headline[0].lower() if headline.split(' ')[0] in _PLAIN else headline[0]}{headline[1:]}"


_PLAIN = {"One", "The", "An", "A", "All"}
"""First words of headlines that lose their capital inside a sentence."""


def _calm(case: Case, best: LadderValue, answer: Answer, findings: Sequence[Finding]) -> Verdict:
    fine = _fine(case, best, findings)
    if case.pending:
        return Verdict(level="unknown", headline=f"So far nothing speaks against it; {_left(case)}.")
    if answer.uncertainty is None:
        return Verdict(level="sound", headline=f"Sound: {fine}.", reasons=(_capital(fine) + ".",))
    size = f"±{in_unit(answer.uncertainty, answer.unit)}"
    if answer.meets_target:
        held = f"{fine}, and the bar of {size} holds what is known to be left out"
    else:
        held = (
            f"{fine}. But the bar of {size} is wider than you need: more work is due before the number serves"
        )
    return Verdict(level="sound", headline=f"Sound: {held}.", reasons=(_capital(fine) + ".",))


def _fine(case: Case, best: LadderValue, findings: Sequence[Finding]) -> str:
    described = [view.name for view in case.views if view.inexact(best.rung)]
    if not described:
        return _exact(case.views, best.rung, [n for n in case.wave_functions if stopped(findings, n)])
    if not RUNGS[best.rung].single_reference:
        return f"nothing speaks against {best.rung}"
    if len(described) == len(case.views) > 1:
        return "one determinant describes every molecule"
    exact = listed(view.name for view in case.views if not view.inexact(best.rung))
    beside = f", and {best.rung} is exact for {exact}" if exact else ""
    return f"one determinant describes {listed(described)}{beside}"


def _exact(views: Sequence[SpeciesView], rung: str, lost: Sequence[str]) -> str:
    """Of one electron or two, where no third can be excited: CCSD(T) is CCSD, and that is exact."""
    many = "two" if max(view.correlated_electrons for view in views) == 2 else "one"
    kind = "" if all(view.species.electrons <= 2 for view in views) else "correlated "
    electrons = f"{many} {kind}electron{'s' if many == 'two' else ''}"
    what = f"CCSD is exact in this basis{', and CCSD(T) is the same' if rung == 'CCSD(T)' else ''}"
    if rung not in ("CCSD", "CCSD(T)"):
        what = f"{rung} is exact in this basis"
    unused = f"; {listed(lost)} {'are' if len(lost) > 1 else 'is'} not to be used" if lost else ""
    return f"with {electrons}, {what}{unused}"


def _capital(words: str) -> str:
    return words[0].upper() + words[1:]


def _left(case: Case) -> str:
    many = case.pending
    return f"{many} of {len(case.plan.tasks)} tasks {'has' if many == 1 else 'have'} no result yet"


def _without_answer(case: Case, findings: Sequence[Finding]) -> Verdict:
    hopeless = [one for one in findings if one.severity == "stop" and _covers(case, one)]
    if hopeless:
        reasons = tuple(dict.fromkeys(one.headline for one in hopeless))
        return Verdict(level="do not rely on it", headline=_led("stop", reasons[0]), reasons=reasons)
    if case.failed:
        reasons = tuple(one.headline for one in findings if one.code == "task-failed")
        return Verdict(level="unknown", headline=reasons[0], reasons=reasons)
    if not case.results:
        return Verdict(level="unknown", headline="Nothing is known yet.")
    return Verdict(level="unknown", headline=f"There is no answer yet; {_left(case)}.")


def _covers(case: Case, finding: Finding) -> bool:
    return not finding.rungs or set(case.wave_functions or case.rungs) <= set(finding.rungs)


def of_species(case: Case, view: SpeciesView, rung: str | None, findings: Sequence[Finding]) -> Verdict:
    """The verdict on one species: what is said of it, for the rung the answer stands on."""
    if not view.results:
        lost = next((f.headline for f in findings if (f.species, f.code) == (view.name, "task-failed")), None)
        return Verdict(level="unknown", headline=lost or "Nothing is known yet.")
    own = [one for one in findings if one.species == view.name and (rung is None or applies(one, rung))]
    severity = worst(own)
    reasons = tuple(dict.fromkeys(one.headline for one in own if one.severity != "note"))
    if severity != "note":
        return Verdict(level=LEVELS[severity], headline=_led(severity, reasons[0]), reasons=reasons)
    if any(
        task.id not in case.results and task.id not in case.failed
        for task in case.plan.tasks
        if task.spec.species.content == view.species.content
    ):
        return Verdict(level="unknown", headline="So far nothing speaks against it.")
    calm = f"One determinant describes {view.name}."
    if rung is not None and not RUNGS[rung].single_reference:
        calm = f"Nothing speaks against {rung} of {view.name}."
    if rung is not None and not view.inexact(rung):
        about = [one for one in findings if one.species == view.name]
        unused = [name for name in case.wave_functions if stopped(about, name)]
        calm = f"{_exact((view,), rung, unused)}."
        return Verdict(level="sound", headline=f"Sound: {calm}", reasons=(_capital(calm),))
    return Verdict(level="sound", headline=f"Sound: {calm[0].lower()}{calm[1:]}", reasons=(calm,))
