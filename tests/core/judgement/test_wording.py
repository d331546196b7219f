"""Findings speak the question's unit, agree with each other and say what the number means."""

import re
from collections.abc import Callable
from typing import Any

import pytest

from plumbrule_core.documents.findings import Finding, Judgement
from plumbrule_core.judgement import judge
from plumbrule_core.judgement.rules import RULES
from plumbrule_core.judgement.rules.base import run
from plumbrule_core.judgement.rules.example import Example, Molecule, case_of
from plumbrule_core.judgement.wording import rough, rough_range
from plumbrule_core.units import ENERGY_UNITS, EnergyUnit

Recorded = Callable[..., Judgement]
ENERGY = re.compile(rf"\d ({'|'.join(map(re.escape, ENERGY_UNITS))})\b")


def by_code(found: Judgement) -> dict[str, Finding]:
    return {one.code: one for one in found.findings}


@pytest.mark.parametrize(
    ("unit", "said"),
    [
        ("kJ/mol", "60 to 400 kJ/mol"),
        ("kcal/mol", "14 to 100 kcal/mol"),
        ("eV", "0.6 to 4 eV"),
        ("cm-1", "5000 to 30000 cm-1"),
        ("hartree", "0.02 to 0.15 hartree"),
    ],
)
def test_a_rule_of_thumb_is_said_in_every_unit_with_no_more_digits_than_it_has(
    unit: EnergyUnit, said: str
) -> None:
    # 1 kcal/mol is 4.184 kJ/mol; 1 hartree is 2625.5 kJ/mol, 27.2114 eV and 219474.63 cm-1 (CODATA 2022)
    assert rough_range(60, 400, unit) == said
    assert rough(10, "kJ/mol") == "10 kJ/mol"


@pytest.mark.parametrize("unit", ENERGY_UNITS)
def test_every_energy_in_a_finding_is_in_the_unit_of_the_question(unit: EnergyUnit) -> None:
    for rule in RULES:
        for one in rule.loud:
            case = case_of(Example(**{**fields(one), "question": {**one.question, "unit": unit}}))
            for found in run([rule], (rule.stage,), case):
                said = {match for match in ENERGY.findall(f"{found.headline} {found.consequence}")}
                shown = {one.unit for one in found.evidence} & set(ENERGY_UNITS)
                assert said | shown <= {unit} | allowed(found), (rule.code, said, shown)


def fields(one: Example) -> dict[str, Any]:
    return {name: getattr(one, name) for name in one.__dataclass_fields__}


def allowed(found: Finding) -> set[str]:
    """Orbital gaps are given in eV whatever the question."""
    return {"eV"} if found.code == "gap-small" else set()


def test_two_electrons_are_exact_with_ccsd_and_only_hf_and_mp2_are_warned_of(recorded: Recorded) -> None:
    found = recorded(h2="H2 at 3.0 A")
    assert found.verdict.headline == (
        "Sound: with two electrons, CCSD is exact in this basis, and CCSD(T) is the same; HF and MP2 are not "
        "to be used."
    )
    assert found.species[0].verdict.headline == found.verdict.headline
    for one in found.findings:
        assert one.severity == "note" or set(one.rungs) == {"HF", "MP2"}, one.code


def test_hydrogen_at_three_angstrom_has_a_broken_bond(recorded: Recorded) -> None:
    # r_e of H2 is 0.741 angstrom (Huber and Herzberg 1979): 3 angstrom is 4.0 times that
    said = by_code(recorded(h2="H2 at 3.0 A"))["bond-parted"]
    assert "H1-H2 in h2 is stretched to 4.0 times its normal length" in said.headline
    assert "CCSD is exact all the same" in said.consequence


def test_a_molecule_beside_one_of_two_electrons_is_not_described_in_its_name() -> None:
    energies = {"HF": -1.13, "MP2": -1.15, "CCSD": -1.17, "CCSD(T)": -1.17}
    both = Example(
        molecules={
            "h2": Molecule(xyz="H 0 0 0; H 0 0 0.741", energies=energies),
            "n2": Molecule(energies={"HF": -108.9, "MP2": -109.2, "CCSD": -109.26, "CCSD(T)": -109.27}),
            "n2h2": Molecule(
                xyz="N 0 0.62 0; N 0 -0.62 0; H 0.98 0.95 0; H -0.98 -0.95 0",
                energies={"HF": -109.98, "MP2": -110.34, "CCSD": -110.36, "CCSD(T)": -110.38},
            ),
        },
        question={"kind": "reaction", "terms": {"h2": -1, "n2": -1, "n2h2": 1}, "within": 500.0},
    )
    case = case_of(both)
    headline = judge(case.brief, case.plan, case.results).verdict.headline
    assert headline.startswith("Sound: one determinant describes n2 and n2h2, and CCSD(T) is exact for h2")


def test_correlated_numbers_on_a_solution_followed_far_down_are_to_be_taken_with_care(
    recorded: Recorded,
) -> None:
    said = by_code(recorded(n2="N2 at 2.0 A"))["hf-followed"]
    assert said.severity == "care"
    assert set(said.rungs) == {"MP2", "CCSD", "CCSD(T)"}
    assert "362 kJ/mol below" in said.headline
    assert "can be far off" in said.consequence
    assert by_code(recorded(n2="N2 at 1.5 A"))["hf-followed"].severity == "note"


def read(**readings: float) -> dict[str, Finding]:
    case = case_of(Example(molecules={"n2": Molecule(readings=readings)}))
    return by_code(judge(case.brief, case.plan, case.results))


def test_d2_does_not_stand_alone_beside_a_large_amplitude() -> None:
    said = read(D2=0.28, largest_t2=0.26)
    assert said["d2-large"].severity == said["t2-large"].severity == "care"
    assert "the largest doubles amplitude is 0.26" in said["d2-large"].consequence
    beside = read(D2=0.28, largest_t2=0.14)["d2-large"]
    assert beside.severity == "note"
    assert "no diagnostic of another kind agrees" in beside.consequence
    assert "No other diagnostic agrees" in read(D2=0.28, largest_t2=0.05)["d2-large"].consequence


def test_t1_and_d1_name_each_other() -> None:
    said = read(T1=0.03, D1=0.06)
    assert "D1 is 0.06" in said["t1-large"].consequence
    assert "T1 is 0.03" in said["d1-large"].consequence


def loud(code: str) -> list[Finding]:
    rule = next(one for one in RULES if one.code == code)
    return [found for one in rule.loud for found in rule.judge(case_of(one))]


def test_zero_point_energy_is_weighed_by_the_kind_of_question() -> None:
    bond, gap, adiabatic, vertical = (one.consequence for one in loud("electronic-energy"))
    assert "5 to 40 kJ/mol" in bond
    assert "below 10 kJ/mol" in gap
    assert "below 10 kJ/mol" in adiabatic
    assert "maximum of a measured band" in vertical


def test_a_negative_gap_names_the_state_that_is_lower() -> None:
    sure, unsure = loud("spin-gap-negative")
    assert "singlet, named as the low state, is the higher one" in sure.headline
    assert "triplet lies 90 kJ/mol below singlet" in sure.consequence
    assert "not settled" in unsure.consequence


def test_the_core_that_stays_is_named_with_its_reason() -> None:
    beryllium, silver = loud("core-not-frozen")
    assert "nothing of Be" in beryllium.headline
    assert "close to the valence" in beryllium.consequence
    assert "core potential replaces the inner core of Ag" in silver.consequence


def test_a_total_energy_does_not_use_the_accuracy_asked_for(recorded: Recorded) -> None:
    said = by_code(recorded(n2="N2 at 1.1 A"))["total-energy"]
    assert "the accuracy asked for (4 kJ/mol) is not used" in said.consequence
