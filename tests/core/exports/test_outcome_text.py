"""The text that the command prints: one verdict in a sentence or two."""

from plumbrule_core.documents.findings import Verdict
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
