"""The answer in words: for the top of the Judge page and for pasting into a letter."""

from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.findings import Answer, Judgement
from plumbrule_core.units import convert
from plumbrule_desktop.state.amounts import energy, plain, unit_words

HAZARD = (
    "A calculation does not replace measurement. Before any decision where stability, decomposition or "
    "toxicity could hurt someone, follow local rules and ask a qualified person."
)


def question_sentence(brief: Brief) -> str:
    """`The bond energy of N1-N2 in nitrogen, within 4 kJ/mol`; empty while nothing is asked."""
    if brief.question is None:
        return ""
    return "".join(clause.text for clause in brief.question.sentence(brief.by_name))


def within(brief: Brief, answer: Answer) -> float | None:
    """The accuracy needed, in the answer's unit."""
    if brief.question is None:
        return None
    return convert(brief.question.within, brief.question.unit, answer.unit)


def can_be_relied_on(judgement: Judgement) -> bool:
    """Whether the number may be shown as one to use."""
    return judgement.verdict.level != "do not rely on it"


def target_words(brief: Brief, judgement: Judgement) -> str:
    """What the bar means against the accuracy needed."""
    answer = judgement.answer
    if answer is None:
        return ""
    if not can_be_relied_on(judgement):
        return "This number is not to be used, so no uncertainty is given."
    needed = within(brief, answer)
    if answer.uncertainty is None or needed is None:
        return "Its uncertainty is not known yet."
    asked = f"the {needed:g} {unit_words(answer.unit)} that you asked for"
    if answer.meets_target:
        return f"This is within {asked}."
    return f"This is wider than {asked}."


def answer_text(brief: Brief, judgement: Judgement | None) -> str:
    """Question, answer, verdict and reasons as plain text; says so where there is no answer."""
    lines = [question_sentence(brief)]
    if judgement is None or judgement.answer is None:
        return "\n".join([*lines, "No answer yet."])
    answer = judgement.answer
    good = can_be_relied_on(judgement)
    value = energy(answer.value, answer.unit, answer.uncertainty if good else None)
    lines.append(f"{answer.rung}/{answer.basis}: {value}" + ("" if good else " - DO NOT RELY ON THIS NUMBER"))
    lines.append(target_words(brief, judgement))
    lines.append(f"Verdict: {judgement.verdict.level}. {judgement.verdict.headline}".strip())
    lines.extend(f"- {reason}" for reason in judgement.verdict.reasons)
    lines.append(HAZARD)
    return plain("\n".join(line for line in lines if line))
