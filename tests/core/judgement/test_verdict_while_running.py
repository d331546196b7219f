"""The verdict while results come in, and when a rung is lost."""

import subprocess
import sys
from collections.abc import Callable
from dataclasses import replace

from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.findings import Finding, Judgement, Severity
from plumbrule_core.documents.plan import Plan
from plumbrule_core.documents.recipe import Recipe
from plumbrule_core.judgement import check, judge
from plumbrule_core.judgement.case import Case
from plumbrule_core.judgement.rules.example import MACHINE, Example, Molecule, case_of
from plumbrule_core.judgement.verdict import ordered

LADDER = {"HF": -108.95, "MP2": -109.25, "CCSD": -109.263, "CCSD(T)": -109.275}
ATOM = {"HF": -54.39, "MP2": -54.46, "CCSD": -54.478, "CCSD(T)": -54.4785}
BOND = {"kind": "bond", "species": "n2", "fragments": ["n", "n"], "unit": "kcal/mol", "within": 500.0}


def nitrogen() -> Case:
    atom = Molecule(xyz="N 0 0 0", multiplicity=4, energies=ATOM)
    return case_of(Example(molecules={"n2": Molecule(energies=LADDER), "n": atom}, question=BOND))


def kept(case: Case, *rungs: str) -> Judgement:
    some = {key: result for key, result in case.results.items() if result.rung in rungs}
    return judge(case.brief, case.plan, some)


def test_nothing_is_known_before_the_first_result() -> None:
    found = kept(nitrogen())
    assert found.verdict.level == "unknown"
    assert found.answer is None
    assert found.findings == ()
    assert {one.verdict.level for one in found.species} == {"unknown"}


def test_the_answer_climbs_with_the_rungs_and_is_not_called_sound_before_the_end() -> None:
    case = nitrogen()
    for rungs in (("HF", "MP2"), ("HF", "MP2", "CCSD")):
        found = kept(case, *rungs)
        assert found.answer is not None
        assert found.answer.rung == rungs[-1]
        assert found.verdict.level == "unknown"
        assert "no result yet" in found.verdict.headline
    assert kept(case, *LADDER).verdict.level == "sound"


def test_one_missing_species_leaves_a_rung_without_an_answer() -> None:
    case = nitrogen()
    half = {
        key: result
        for key, result in case.results.items()
        if (result.species, result.rung) != ("n", "CCSD(T)")
    }
    answer = judge(case.brief, case.plan, half).answer
    assert answer is not None
    assert answer.rung == "CCSD"


def test_an_unconverged_ccsd_takes_triples_with_it_and_mp2_stands_with_care() -> None:
    case = nitrogen()
    lost = {
        key: result.model_copy(update={"converged": False}) if result.rung == "CCSD" else result
        for key, result in case.results.items()
    }
    found = judge(case.brief, case.plan, lost)
    assert found.answer is not None
    assert found.answer.rung == "MP2"
    assert found.verdict.level == "take care"
    assert {one.rung for one in found.comparison if one.stopped} == {"CCSD", "CCSD(T)"}


def test_a_diradical_is_known_before_coupled_cluster_has_run(
    recorded_example: Callable[..., Example],
) -> None:
    one = recorded_example(one="ethylene at 90 degrees")
    case = case_of(one)
    early = {key: result for key, result in case.results.items() if result.rung in ("HF", "MP2")}
    trimmed = {
        key: result.model_copy(
            update={
                "readings": tuple(
                    r for r in result.readings if r.name not in ("largest_t2", "T1", "D1", "D2")
                )
            }
        )
        for key, result in early.items()
    }
    assert judge(case.brief, case.plan, trimmed).verdict.level in ("take care", "do not rely on it")


def test_findings_about_the_answers_rung_come_before_others_of_the_same_severity() -> None:
    def said(code: str, severity: Severity, *rungs: str) -> Finding:
        return Finding(code=code, severity=severity, headline=code, consequence="", rungs=rungs)

    found = (
        said("mp2", "care", "MP2"),
        said("note", "note"),
        said("top", "care", "CCSD(T)"),
        said("stop", "stop", "HF"),
    )
    assert [one.code for one in ordered(found, "CCSD(T)")] == ["stop", "top", "mp2", "note"]


def test_citations_hold_the_methods_the_limit_and_the_diagnostics_once() -> None:
    atom = Molecule(xyz="N 0 0 0", multiplicity=4, energies=ATOM)
    molecule = Molecule(energies=LADDER, readings={"T1": 0.012})
    one = Example(molecules={"n2": molecule, "n": atom}, question=BOND)
    case = case_of(replace(one, recipe={"basis": ["cc-pVTZ", "cc-pVQZ"]}))
    cited = judge(case.brief, case.plan, case.results).citations
    assert len(set(cited)) == len(cited)
    for word in ("Raghavachari", "Karton and Martin", "Helgaker", "Lee and Taylor"):
        assert sum(word in one for one in cited) == 1, word
    assert not any("practice" in one or "memory" in one for one in cited)


def functional_beside(rungs: list[str]) -> Judgement:
    molecule = Molecule(energies={**LADDER, "B3LYP": -109.5})
    atom = Molecule(xyz="N 0 0 0", multiplicity=4, energies={**ATOM, "B3LYP": -54.59})
    one = Example(molecules={"n2": molecule, "n": atom}, question=BOND)
    case = case_of(replace(one, recipe={"rungs": rungs, "basis": ["cc-pVTZ", "cc-pVQZ"]}))
    return judge(case.brief, case.plan, case.results)


def test_a_functional_is_compared_but_the_answer_stands_on_the_ladder() -> None:
    found = functional_beside([*LADDER, "B3LYP"])
    assert found.answer is not None
    assert found.answer.rung == "CCSD(T)"
    beside = {one.rung: one for one in found.comparison}["B3LYP"]
    assert beside.basis == "cc-pVQZ", "functionals are not extrapolated"
    assert "no-correlated-rung" not in {one.code for one in found.findings}


def test_a_functional_alone_asks_for_care_and_offers_the_ladder() -> None:
    found = functional_beside(["B3LYP"])
    assert found.answer is not None
    assert found.answer.rung == "B3LYP"
    assert found.verdict.level == "take care"
    alone = {one.code: one for one in found.findings}["no-correlated-rung"]
    assert "CCSD(T)" in alone.remedies[0].edits[0].value


def test_an_empty_or_faulty_brief_is_checked_and_judged_without_a_broken_rule() -> None:
    twice = [Molecule(xyz="O 0 0 0; H 0 0 0.96", charge=-1).species("a"), Molecule().species("a")]
    faulty = Brief(species=tuple(twice), recipe=Recipe(basis=("no such set",), rungs=("no such rung",)))
    for brief in (Brief(), faulty, Brief(species=(twice[0],))):
        found = check(brief, Plan(), MACHINE)
        assert "rule-broken" not in {one.code for one in found}
        assert judge(brief, Plan(), {}).verdict.level == "unknown"


def test_importing_judgement_loads_no_chemistry_library_and_no_window() -> None:
    code = "import sys, plumbrule_core.judgement; print(sorted({m.split('.')[0] for m in sys.modules}))"
    loaded = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True).stdout
    for name in ("pyscf", "rdkit", "scipy", "h5py", "PySide6"):
        assert f"'{name}'" not in loaded
