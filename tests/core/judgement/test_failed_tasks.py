"""A rung that failed is named, and nothing is awaited that cannot come."""

from plumbrule_core.documents.findings import Finding, Judgement
from plumbrule_core.judgement import judge
from plumbrule_core.judgement.case import Case
from plumbrule_core.judgement.rules.example import Example, Molecule, case_of

LADDER = {"HF": -108.95, "MP2": -109.25, "CCSD": -109.263, "CCSD(T)": -109.275}
ATOM = {"HF": -54.39, "MP2": -54.46, "CCSD": -54.478, "CCSD(T)": -54.4785}
BOND = {"kind": "bond", "species": "n2", "fragments": ["n", "n"], "unit": "kcal/mol", "within": 500.0}


def nitrogen() -> Case:
    atom = Molecule(xyz="N 0 0 0", multiplicity=4, energies=ATOM)
    return case_of(Example(molecules={"n2": Molecule(energies=LADDER), "n": atom}, question=BOND))


def failing(lost: dict[tuple[str, str], str], open_tasks: tuple[tuple[str, str], ...] = ()) -> Judgement:
    case = nitrogen()
    named = {task.id: (task.spec.species.name, task.spec.rung) for task in case.plan.tasks}
    gone = {*lost, *open_tasks}
    results = {key: one for key, one in case.results.items() if named[key] not in gone}
    failed = {key: lost[name] for key, name in named.items() if name in lost}
    return judge(case.brief, case.plan, results, failed)


def told(found: Judgement) -> list[Finding]:
    return [one for one in found.findings if one.code == "task-failed"]


def test_the_answer_stands_on_the_best_complete_rung_and_the_failed_one_is_named() -> None:
    found = failing({("n2", "CCSD(T)"): "memory ran out"})
    assert found.answer is not None
    assert found.answer.rung == "CCSD"
    assert found.verdict.level == "take care"
    assert found.verdict.headline == "Take care: CCSD(T) of n2 failed, so the answer stands on CCSD."
    assert "memory ran out" in told(found)[0].consequence
    assert {one.name: one.verdict.level for one in found.species} == {"n2": "take care", "n": "sound"}


def test_what_was_not_run_because_of_a_failure_is_told_with_it_and_not_apart() -> None:
    found = failing({("n", "CCSD"): "memory ran out", ("n", "CCSD(T)"): "not run because CCSD failed"})
    (one,) = told(found)
    assert one.headline == "CCSD of n failed, so the answer stands on MP2."
    assert one.consequence.endswith("What needs it was not run: CCSD(T).")


def test_a_failure_below_the_answer_is_a_note() -> None:
    found = failing({("n2", "MP2"): "memory ran out"})
    assert found.verdict.level == "sound"
    assert [one.severity for one in told(found)] == ["note"]


def test_where_hartree_fock_failed_the_verdict_says_that_there_is_no_answer() -> None:
    found = failing(
        {("n2", rung): "the atoms lie on each other" if rung == "HF" else "not run" for rung in LADDER}
    )
    assert found.answer is None
    assert found.verdict.level == "unknown"
    assert found.verdict.headline == "HF of n2 failed, so there is no answer."
    assert found.species[-1].verdict.headline == "HF of n2 failed, so there is no answer."


def test_while_others_still_run_the_sentence_says_so_far() -> None:
    found = failing({("n2", "CCSD(T)"): "memory ran out"}, (("n2", "CCSD"),))
    assert told(found)[0].headline == "CCSD(T) of n2 failed, so the answer stands on MP2 so far."


def test_a_task_that_has_a_result_after_all_has_not_failed() -> None:
    case = nitrogen()
    found = judge(case.brief, case.plan, case.results, dict.fromkeys(case.results, "an earlier run failed"))
    assert found.verdict.level == "sound"
    assert told(found) == []
