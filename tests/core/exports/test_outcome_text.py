"""The text that the command prints: one verdict in a sentence or two."""

from dataclasses import replace

from plumbrule_core.documents.findings import Answer, Verdict
from plumbrule_core.documents.questions import EnergyQuestion, ReactionQuestion
from plumbrule_core.headless.tables import outcome_text


def verdict_line(record, verdict):
    said = record.judgement.model_copy(update={"verdict": verdict})
    text = outcome_text(record.__class__(**{**vars_of(record), "judgement": said}))
    return " ".join(
        text[text.index("verdict:") :].split("\nstop:")[0].split("\ncare:")[0].split("\nnote:")[0].split()
    )


def vars_of(record):
    return {name: getattr(record, name) for name in record.__dataclass_fields__}


def test_the_verdict_is_its_headline_and_not_all_reasons_joined(record):
    verdict = Verdict(
        level="take care",
        headline="Take care: T1 of h2 is 0.031, above 0.02.",
        reasons=("T1 of h2 is 0.031, above 0.02.", "A second reason."),
    )
    assert verdict_line(record, verdict) == "verdict: take care: T1 of h2 is 0.031, above 0.02."


def test_a_verdict_that_does_not_know_says_so_before_its_headline(record):
    found = verdict_line(record, Verdict(level="unknown", headline="Nothing is known yet."))
    assert found == "verdict: unknown: Nothing is known yet."


def answer_line(record, question):
    answer = Answer(value=48.6, unit="kcal/mol", rung="CCSD(T)", basis="6-31G*", **question["answer"])
    verdict = Verdict(level="sound", headline="Sound.")
    judgement = record.judgement.model_copy(update={"answer": answer, "verdict": verdict})
    brief = record.brief.model_copy(update={"question": question["asked"]})
    text = outcome_text(replace(record, brief=brief, judgement=judgement))
    return next(line for line in text.splitlines() if line.startswith("answer:"))


def test_a_total_energy_is_printed_without_an_accuracy_that_it_does_not_use(record):
    asked = EnergyQuestion(species="h", within=4.0, unit="kcal/mol")
    assert answer_line(record, {"asked": asked, "answer": {}}) == "answer: 48.60 kcal/mol (CCSD(T), 6-31G*)"


def test_a_bar_that_is_too_wide_is_said_beside_the_answer(record):
    asked = ReactionQuestion(terms=record.brief.question.terms, within=1.0, unit="kcal/mol")
    line = answer_line(record, {"asked": asked, "answer": {"uncertainty": 33.0, "meets_target": False}})
    assert line == "answer: 49 ± 33 kcal/mol (CCSD(T), 6-31G*; not within 1 kcal/mol)"
