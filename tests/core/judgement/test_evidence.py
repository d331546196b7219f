"""The families of evidence: graded by their limits, and no reading decides alone."""

import pytest

from plumbrule_core.judgement import judge
from plumbrule_core.judgement.evidence import grades
from plumbrule_core.judgement.rules.example import Example, Molecule, case_of, measured

GRADED = [
    ({"largest_t2": 0.09}, "doubles", 0),
    ({"largest_t2": 0.11}, "doubles", 1),
    ({"largest_t2": 0.21}, "doubles", 2),
    ({"largest_t2": 0.31}, "doubles", 3),
    ({"mp2_largest_t2": 0.31}, "doubles", 3),
    ({"mp2_largest_t2": 0.31, "largest_t2": 0.05}, "doubles", 0),
    ({"D2": 0.19}, "doubles", 1),
    ({"T1": 0.019}, "singles", 0),
    ({"T1": 0.021}, "singles", 1),
    ({"T1": 0.045, "D1": 0.12}, "singles", 2),
    ({"T1": 0.045, "D1": 0.06}, "singles", 1),
    ({"T1": 0.11, "D1": 0.06}, "singles", 3),
    ({"share_of_triples": 0.06}, "triples", 1),
    ({"share_of_triples": 0.09}, "triples", 2),
    ({"share_of_triples": 0.13}, "triples", 3),
    ({"M": 0.09}, "occupations", 0),
    ({"M": 0.11}, "occupations", 1),
    ({"M": 0.16}, "occupations", 2),
    ({"instability_depth": 0.007, "uhf_fractional": 1.0}, "reference", 0),
    ({"instability_depth": 0.01, "uhf_fractional": 0.4}, "reference", 1),
    ({"instability_depth": 0.01, "uhf_fractional": 0.6}, "reference", 2),
    ({"instability_depth": 0.01, "uhf_fractional": 0.95}, "reference", 3),
    ({"instability_depth": 0.16, "uhf_fractional": 0.6}, "reference", 3),
    ({"c0_squared": 0.91}, "configuration", 0),
    ({"c0_squared": 0.89}, "configuration", 1),
    ({"c0_squared": 0.30}, "configuration", 1),
    ({"s2_excess": 0.2}, "spin", 1),
    ({"s2_excess": 0.6}, "spin", 2),
]


@pytest.mark.parametrize(("readings", "family", "grade"), GRADED)
def test_each_family_is_graded_by_its_limits(readings: dict[str, float], family: str, grade: int) -> None:
    case = case_of(measured(**readings))
    assert {one.family: one.grade for one in grades(case, case.views[0])}[family] == grade


@pytest.mark.parametrize(("symbol", "multiplicity", "t1", "raised"), [
    ("N", 1, 0.03, True),
    ("N", 3, 0.03, False),
    ("N", 3, 0.05, True),
    ("Cr", 1, 0.03, False),
    ("Cr", 1, 0.06, True),
])  # fmt: skip
def test_the_limit_of_t1_depends_on_spin_and_metal(
    symbol: str, multiplicity: int, t1: float, raised: bool
) -> None:
    one = Molecule(xyz=f"{symbol} 0 0 0; N 0 0 1.6", multiplicity=multiplicity, readings={"T1": t1})
    case = case_of(Example(molecules={"molecule": one}))
    assert any(grade.grade for grade in grades(case, case.views[0])) is raised


@pytest.mark.parametrize(
    "readings", [{"T1": 0.5}, {"D1": 0.9}, {"D2": 0.9}, {"M": 0.9}, {"share_of_triples": 0.5}]
)
def test_no_reading_stops_an_answer_alone(readings: dict[str, float]) -> None:
    case = case_of(measured(**readings))
    found = judge(case.brief, case.plan, case.results)
    assert all(one.severity != "stop" for one in found.findings)


def test_two_families_of_which_one_is_broken_stop_it() -> None:
    for readings in (
        {"largest_t2": 0.31, "M": 0.11},
        {"T1": 0.11, "D1": 0.06, "largest_t2": 0.11},
        {"share_of_triples": 0.13, "D2": 0.19},
        {"instability_depth": 0.01, "uhf_fractional": 0.95, "D2": 0.19},
    ):
        case = case_of(measured(**readings))
        assert judge(case.brief, case.plan, case.results).verdict.level == "do not rely on it", readings
