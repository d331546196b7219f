"""One shared test of every rule: quiet where it must be, loud where it must be, and useful when loud."""

import re
from importlib import import_module
from itertools import chain
from pathlib import Path

import pytest

import plumbrule_core.judgement.rules as rules_package
from plumbrule_core.documents.edits import edited
from plumbrule_core.documents.findings import SEVERITIES, Finding
from plumbrule_core.judgement import check
from plumbrule_core.judgement.rules import RULES
from plumbrule_core.judgement.rules.base import Rule, run
from plumbrule_core.judgement.rules.example import MACHINE, Example, case_of
from plumbrule_core.rungs import RUNGS

QUIET = [(rule, one) for rule in RULES for one in rule.quiet]
LOUD = [(rule, one) for rule in RULES for one in rule.loud]
LOUD_EARLY = [(rule, one) for rule, one in LOUD if rule.stage in ("before", "always")]


def named(pair: object) -> str | None:
    return pair.code if isinstance(pair, Rule) else None


@pytest.mark.parametrize(("rule", "case"), QUIET, ids=named)
def test_a_rule_is_quiet_where_nothing_is_wrong(rule: Rule, case: Example) -> None:
    assert list(rule.judge(case_of(case))) == []


@pytest.mark.parametrize(("rule", "case"), LOUD, ids=named)
def test_a_rule_speaks_under_its_own_code_and_no_louder_than_it_says(rule: Rule, case: Example) -> None:
    found = list(rule.judge(case_of(case)))
    assert found
    assert {one.code for one in found} == {rule.code}
    assert all(SEVERITIES.index(one.severity) <= SEVERITIES.index(rule.severity) for one in found)


@pytest.mark.parametrize(("rule", "case"), LOUD, ids=named)
def test_every_remedy_leads_to_a_brief_that_is_valid_and_to_rungs_that_are_built(
    rule: Rule, case: Example
) -> None:
    seen = case_of(case)
    for remedy in chain.from_iterable(one.remedies for one in rule.judge(seen)):
        if not remedy.edits:
            assert not remedy.then_run, "advice cannot be run"
            continue
        after = edited(seen.brief, remedy.edits)
        assert after != seen.brief
        assert set(after.recipe.rungs) <= set(RUNGS)


@pytest.mark.parametrize(("rule", "case"), LOUD, ids=named)
def test_sentences_are_whole_sure_and_name_the_species(rule: Rule, case: Example) -> None:
    for one in rule.judge(case_of(case)):
        for sentence in (one.headline, one.consequence):
            assert sentence.endswith("."), sentence
            assert not re.search(r"\b(may|might|possibly|perhaps)\b", sentence), sentence
        if one.species:
            assert one.species in one.headline or one.code in SPECIES_IN_EVIDENCE, one.headline


SPECIES_IN_EVIDENCE = {
    "basis-missing",
    "bond-negative",
    "fragments-not-relaxed",
    "forecast-time",
    "total-energy",
}


def test_codes_are_unique_and_every_rule_has_both_kinds_of_case_and_a_source() -> None:
    assert len({rule.code for rule in RULES}) == len(RULES)
    assert all(rule.quiet and rule.loud and rule.source and rule.reads for rule in RULES)


def _explode(case: object) -> tuple[Finding, ...]:
    raise ZeroDivisionError("on purpose")


def test_a_broken_rule_becomes_a_finding_and_hides_no_other() -> None:
    t1 = next(rule for rule in RULES if rule.code == "t1-large")
    broken = Rule(
        code="broken",
        severity="note",
        stage="after",
        reads=("nothing",),
        source="a test",
        judge=_explode,
        quiet=(),
        loud=(),
    )
    found = run((broken, t1), ("after",), case_of(t1.loud[0]))
    assert [one.code for one in found] == ["rule-broken", "t1-large"]
    assert "on purpose" in str(found[0].evidence[0].value)


@pytest.mark.parametrize(("rule", "case"), LOUD_EARLY, ids=named)
def test_rules_for_before_the_run_speak_without_any_result(rule: Rule, case: Example) -> None:
    seen = case_of(case)
    assert rule.code in {one.code for one in check(seen.brief, seen.plan, MACHINE)}


def test_no_file_of_rules_is_forgotten_in_the_one_list() -> None:
    folder = Path(rules_package.__file__).parent
    for path in folder.glob("*.py"):
        module = import_module(f"{rules_package.__name__}.{path.stem}") if path.stem != "__init__" else None
        own = getattr(module, "RULES", ())
        assert set(map(id, own)) <= set(map(id, RULES)), path.name
        assert own or path.stem in ("__init__", "base", "example", "remedies"), path.name
