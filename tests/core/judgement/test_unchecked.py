"""An energy whose readings were lost is never called sound."""

from collections.abc import Callable, Mapping

import pytest

from plumbrule_core.documents.findings import Judgement
from plumbrule_core.documents.results import Result
from plumbrule_core.judgement import judge
from plumbrule_core.judgement.rules.example import Example, Molecule, case_of


def judged_with(example: Example, change: Callable[[Result], Mapping[str, object]]) -> Judgement:
    case = case_of(example)
    changed = {key: one.model_copy(update=dict(change(one))) for key, one in case.results.items()}
    return judge(case.brief, case.plan, changed)


def without(*names: str) -> Callable[[Result], Mapping[str, object]]:
    return lambda one: {"readings": tuple(r for r in one.readings if r.name not in names)}


def test_a_molecule_with_all_readings_missing_is_not_sound(recorded_example: Callable[..., Example]) -> None:
    found = judged_with(recorded_example(one="water"), lambda one: {"readings": ()})
    assert found.verdict.level == "take care"
    assert found.verdict.headline == "Take care: HF, MP2, CCSD and CCSD(T) of one could not be checked."
    assert found.species[0].verdict.level == "take care"


@pytest.mark.parametrize(
    "lost", ["stable", "stable_external", "mp2_largest_t2", "T1", "largest_t2", "triples"]
)
def test_each_reading_that_a_rung_must_have_is_missed(
    lost: str, recorded_example: Callable[..., Example]
) -> None:
    found = judged_with(recorded_example(one="water"), without(lost))
    said = next(one for one in found.findings if one.code == "unchecked")
    assert any(lost in str(one.value) for one in said.evidence)


def test_a_lost_reading_of_mp2_does_not_touch_an_answer_of_ccsd_t(
    recorded_example: Callable[..., Example],
) -> None:
    assert judged_with(recorded_example(one="water"), without("mp2_largest_t2")).verdict.level == "sound"


def test_a_result_that_says_it_is_unchecked_is_not_sound(recorded_example: Callable[..., Example]) -> None:
    found = judged_with(recorded_example(one="water"), lambda one: {"unchecked": one.rung == "CCSD(T)"})
    assert found.verdict.level == "take care"


@pytest.mark.parametrize("name", ["water", "OH", "O2 triplet", "N", "H2 at 2.2 A"])
def test_nothing_is_missed_where_everything_was_measured(
    name: str, recorded_example: Callable[..., Example]
) -> None:
    found = judged_with(recorded_example(one=name), lambda one: {})
    assert "unchecked" not in {one.code for one in found.findings}


def test_an_atom_with_one_electron_has_no_pairs_to_read() -> None:
    atom = Molecule(
        xyz="H 0 0 0",
        multiplicity=2,
        energies={"HF": -0.5, "MP2": -0.5, "CCSD": -0.5, "CCSD(T)": -0.5},
        readings={"stable": True},
    )
    found = judged_with(Example(molecules={"h": atom}), lambda one: {})
    assert found.verdict.level == "sound"


def test_helium_without_empty_orbitals_has_no_pairs_to_read() -> None:
    read = {"stable": True, "stable_external": True}
    helium = Molecule(xyz="He 0 0 0", energies={"HF": -2.8, "CCSD": -2.8}, readings=read)
    found = judged_with(
        Example(molecules={"he": helium}, recipe={"rungs": ["HF", "CCSD"]}), lambda one: {"correlation": 0.0}
    )
    assert found.verdict.level == "sound"
