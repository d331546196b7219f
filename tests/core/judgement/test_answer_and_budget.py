"""The answer rung by rung, and its bar split into causes."""

import math
import time
from collections.abc import Callable, Mapping
from dataclasses import replace
from typing import Any

import pytest

from plumbrule_core.documents.findings import BudgetLine, Judgement
from plumbrule_core.errors import UnlikeRecipes
from plumbrule_core.judgement import check, judge
from plumbrule_core.judgement.answer import ladder
from plumbrule_core.judgement.budget_physics import strain
from plumbrule_core.judgement.budget_tables import TABLES, column, energy_class
from plumbrule_core.judgement.extrapolation import correlation_limit, hartree_fock_limit
from plumbrule_core.judgement.rules.example import MACHINE, Example, Molecule, case_of
from plumbrule_core.units import from_hartree

LADDER = {"HF": -108.95, "MP2": -109.25, "CCSD": -109.263, "CCSD(T)": -109.275}
ATOM = {"HF": -54.39, "MP2": -54.46, "CCSD": -54.478, "CCSD(T)": -54.4785}
BOND = {"kind": "bond", "species": "n2", "fragments": ["n", "n"], "unit": "kcal/mol"}


def nitrogen(basis: list[str], **question: Any) -> Example:
    return Example(
        molecules={
            "n2": Molecule(energies=LADDER),
            "n": Molecule(xyz="N 0 0 0", multiplicity=4, energies=ATOM),
        },
        question={**BOND, **question},
        recipe={"basis": basis},
    )


def judged(one: Example) -> Judgement:
    case = case_of(one)
    return judge(case.brief, case.plan, case.results)


def lines(found: Judgement) -> Mapping[str, BudgetLine]:
    return {line.cause: line for line in found.budget}


def test_a_bond_is_the_atoms_minus_the_molecule_in_the_users_unit() -> None:
    answer = judged(nitrogen(["cc-pVTZ"])).answer
    assert answer is not None
    assert answer.rung == "CCSD(T)"
    assert answer.value == pytest.approx((2 * -54.4785 + 109.275) * 627.5094740631, rel=1e-9)


def test_every_rung_is_compared_with_the_best() -> None:
    compared = {one.rung: one for one in judged(nitrogen(["cc-pVTZ"])).comparison}
    assert list(compared) == ["HF", "MP2", "CCSD", "CCSD(T)"]
    assert compared["CCSD(T)"].from_best == 0
    assert compared["CCSD"].from_best == pytest.approx(compared["CCSD"].value - compared["CCSD(T)"].value)


def test_a_pair_extrapolates_hartree_fock_and_correlation_apart() -> None:
    case = case_of(nitrogen(["cc-pVTZ", "cc-pVQZ"]))
    shifted = {
        key: result.model_copy(update={"energy": result.energy - 0.1 * (result.rung != "HF") - 0.02})
        if result.basis == "cc-pVQZ"
        else result
        for key, result in case.results.items()
    }
    value = {one.rung: one for one in ladder(replace(case, results=shifted))}["CCSD(T)"]
    hf = [2 * ATOM["HF"] - LADDER["HF"] - extra * (2 - 1) for extra in (0.0, 0.02)]
    total = [2 * ATOM["CCSD(T)"] - LADDER["CCSD(T)"] - extra * (2 - 1) for extra in (0.0, 0.12)]
    limit = hartree_fock_limit(hf[0], hf[1], 3, 4) + correlation_limit(
        total[0] - hf[0], total[1] - hf[1], 3, 4
    )
    assert value.extrapolated
    assert value.hartree == pytest.approx(limit, abs=1e-12)
    assert value.basis == "cc-pVTZ to cc-pVQZ, extrapolated"


def test_energies_of_unlike_recipes_are_refused_and_the_difference_is_named() -> None:
    case = case_of(nitrogen(["cc-pVTZ"]))
    other = case_of(Example(molecules=nitrogen([]).molecules, question=BOND, recipe={"core": "all"}))
    level = next(iter(other.settings))
    mixed = {
        key: result.model_copy(update={"level": level}) if result.species == "n2" else result
        for key, result in case.results.items()
    }
    plan = case.plan.model_copy(update={"tasks": (*case.plan.tasks, *other.plan.tasks)})
    with pytest.raises(UnlikeRecipes, match="core is frozen in one and all in the other"):
        ladder(replace(case, plan=plan, results=mixed))
    found = judge(case.brief, plan, mixed)
    assert found.answer is None
    assert found.verdict.level == "do not rely on it"
    assert [one.code for one in found.findings if one.severity == "stop"] == ["unlike-recipes"]


def test_the_bar_is_the_lines_in_quadrature() -> None:
    found = judged(nitrogen(["aug-cc-pVTZ"]))
    assert found.answer is not None
    assert found.answer.uncertainty == pytest.approx(math.hypot(*(line.size for line in found.budget)))


def test_the_basis_line_is_twice_the_rms_of_its_class_and_shows_the_bias_as_a_shift() -> None:
    # FIELD table: atomisation at aug-TZ 5.71 mean, 6.32 rms; at QZ 2.05, 2.30 kcal/mol
    triple, quadruple = (lines(judged(nitrogen([b])))["basis set"] for b in ("aug-cc-pVTZ", "aug-cc-pVQZ"))
    assert (triple.size, triple.shift) == (pytest.approx(2 * 6.32), pytest.approx(5.71))
    assert (quadruple.size, quadruple.shift) == (pytest.approx(2 * 2.30), pytest.approx(2.05))


def test_two_sets_that_disagree_more_than_the_statistics_widen_the_bar() -> None:
    calm = lines(judged(nitrogen(["aug-cc-pVTZ", "aug-cc-pVQZ"])))["basis set"]
    assert calm.size == pytest.approx(2 * 0.42)  # FIELD table: X^-3 (TQ), atomisation, rms 0.42
    case = case_of(nitrogen(["aug-cc-pVTZ", "aug-cc-pVQZ"]))
    apart = {
        key: result.model_copy(update={"energy": result.energy - 0.05})
        if result.basis == "aug-cc-pVQZ" and result.species == "n2" and result.rung != "HF"
        else result
        for key, result in case.results.items()
    }
    wide = lines(judge(case.brief, case.plan, apart))["basis set"]
    assert wide.size > 5 * calm.size
    assert wide.source == "this run"


@pytest.mark.parametrize(("basis", "factor"), [("def2-QZVPP", 1.3), ("cc-pVQZ", 1.2)])
def test_sets_outside_the_table_are_widened_and_say_so(basis: str, factor: float) -> None:
    line = lines(judged(nitrogen([basis])))["basis set"]
    assert line.size == pytest.approx(factor * 2 * 2.30)
    assert "estimate" in line.how


def test_beyond_triples_is_a_tenth_of_them_but_not_under_the_floor() -> None:
    line = lines(judged(nitrogen(["aug-cc-pVTZ"])))["beyond the top rung"]
    triples = (2 * (ATOM["CCSD(T)"] - ATOM["CCSD"]) - (LADDER["CCSD(T)"] - LADDER["CCSD"])) * 627.5094740631
    assert line.size == pytest.approx(0.1 * abs(triples))
    small = Example(
        molecules={
            "n2": Molecule(energies={**LADDER, "CCSD(T)": LADDER["CCSD"] - 0.0011}),
            "n": Molecule(xyz="N 0 0 0", multiplicity=4, energies=ATOM),
        },
        question=BOND,
    )
    assert lines(judged(small))["beyond the top rung"].size == pytest.approx(0.2)


def test_below_triples_the_statistics_of_what_is_left_out_are_used() -> None:
    one = nitrogen(["aug-cc-pVTZ"])
    molecules = {
        name: replace(m, energies={k: v for k, v in m.energies.items() if k != "CCSD(T)"})
        for name, m in one.molecules.items()
    }
    found = judged(
        replace(one, molecules=molecules, recipe={"basis": ["aug-cc-pVTZ"], "rungs": ["HF", "MP2", "CCSD"]})
    )
    assert found.answer is not None
    assert found.answer.rung == "CCSD"
    assert lines(found)["beyond the top rung"].size == pytest.approx(
        2.5 * 6.0
    )  # FIELD: 6.0 atomisation, mean abs


@pytest.mark.parametrize(("angstrom", "kcal"), [(0.01, 0.04), (0.02, 0.14), (0.05, 0.9)])
def test_half_k_d_squared_is_that_of_the_table(angstrom: float, kcal: float) -> None:
    # FIELD section 3: 5 mdyn/A, off by 0.01 A 0.04, 0.02 A 0.14, 0.05 A 0.9 kcal/mol a bond
    unknown = case_of(Example(molecules={"n2": Molecule(origin="")})).views[0]
    per_bond = from_hartree(strain(unknown), "kcal/mol")
    assert per_bond * (angstrom / TABLES["geometry"]["displacements"]["unknown"]) ** 2 == pytest.approx(
        kcal, abs=0.006
    )


def test_spin_orbit_of_the_fragments_lowers_a_bond_energy_by_a_known_shift() -> None:
    # hydrogen peroxide to two OH, 69.6 cm-1 each: 0.40 kcal/mol (FIELD section 2)
    peroxide = "O 0 0.7264 -0.0555; O 0 -0.7264 -0.0555; H 0.8 0.88 0.444; H -0.8 -0.88 0.444"
    found = judged(
        Example(
            molecules={
                "peroxide": Molecule(xyz=peroxide, energies={"HF": -150.8}),
                "oh": Molecule(xyz="O 0 0 0; H 0 0 0.97", multiplicity=2, energies={"HF": -75.4}),
            },
            question={"kind": "bond", "species": "peroxide", "fragments": ["oh", "oh"], "unit": "kcal/mol"},
            recipe={"rungs": ["HF"]},
        )
    )
    assert lines(found)["spin-orbit coupling"].shift == pytest.approx(-0.40, abs=0.005)


@pytest.mark.parametrize(
    ("symbol", "levels", "lowering"),
    [
        ("C", {0: 0.0, 1: 16.417, 2: 43.414}, 29.6),  # NIST Atomic Spectra Database, 3P
        ("F", {1.5: 0.0, 0.5: 404.141}, 134.7),  # 2P
        ("Cl", {1.5: 0.0, 0.5: 882.352}, 294.1),
    ],
)
def test_first_order_spin_orbit_is_the_mean_of_the_levels(
    symbol: str, levels: dict[float, float], lowering: float
) -> None:
    mean = sum((2 * j + 1) * level for j, level in levels.items()) / sum(2 * j + 1 for j in levels)
    assert mean == pytest.approx(lowering, abs=0.06)
    assert TABLES["spin_orbit"]["atoms"][symbol] == pytest.approx(mean, abs=0.5)


def test_the_class_of_a_question_follows_its_species() -> None:
    assert energy_class(case_of(nitrogen(["cc-pVTZ"]))) == "atomisation"
    water = Molecule(xyz="O 0 0 0.1173; H 0 0.7572 -0.4692; H 0 -0.7572 -0.4692")
    ions = {
        "w": water,
        "c": replace(water, charge=1, multiplicity=2),
        "a": replace(water, charge=-1, multiplicity=2),
    }
    ask = {"kind": "ionisation", "from": "w"}
    assert energy_class(case_of(Example(molecules=ions, question={**ask, "to": "c"}))) == "ionisation"
    assert energy_class(case_of(Example(molecules=ions, question={**ask, "to": "a"}))) == "attachment"


def test_the_table_is_that_of_the_field_notes() -> None:
    rows = TABLES["basis_set"]["levels"]
    assert rows["2"][0] == [3.65, 6.25, 25.1]
    assert rows["3-4"][4] == [0.20, 0.26, 0.5]
    assert column("left_out", "CCSD", "open-shell") == 3.6
    assert TABLES["spin_orbit"]["atoms"]["Cl"] == 293.7


def test_a_total_energy_has_no_bar_and_says_why() -> None:
    found = judged(Example(molecules={"n2": Molecule(energies=LADDER)}))
    assert found.answer is not None
    assert found.answer.uncertainty is None
    assert found.answer.meets_target is None
    assert found.budget == ()
    assert "total-energy" in {one.code for one in found.findings}


def test_zero_point_energy_is_said_to_be_missing(recorded: Callable[..., Judgement]) -> None:
    said = {one.code: one for one in judged(nitrogen(["cc-pVTZ"])).findings}["electronic-energy"]
    assert "zero-point" in said.headline
    assert "lowers a bond energy, typically by 1.2 to 10 kcal/mol" in said.consequence


def test_a_bar_wider_than_the_need_is_said_in_the_headline_and_the_next_basis_is_offered() -> None:
    found = judged(nitrogen(["aug-cc-pVTZ"], within=1.0))
    assert found.answer is not None
    assert found.answer.meets_target is False
    wide = {one.code: one for one in found.findings}["bar-exceeds-target"]
    assert found.verdict.level == "sound"
    assert "is wider than you need" in found.verdict.headline
    assert wide.remedies[0].edits[0].value == ["aug-cc-pVTZ", "aug-cc-pVQZ"]
    assert wide.remedies[-1].edits[0].path == "question.within"
    assert wide.remedies[-1].edits[0].value >= found.answer.uncertainty


def test_a_bar_within_the_need_is_sound_and_the_headline_names_it() -> None:
    verdict = judged(nitrogen(["aug-cc-pVTZ", "aug-cc-pVQZ"], within=5.0)).verdict
    assert verdict.level == "sound"
    assert verdict.headline.startswith("Sound: one determinant describes every molecule, and the bar of ±")


def test_judging_and_checking_are_fast_for_sixty_atoms() -> None:
    chain = "; ".join(f"{'CN'[i % 2]} {1.4 * i} 0 {0.5 * (i % 2)}" for i in range(60))
    one = Example(
        molecules={"a": Molecule(xyz=chain, energies=LADDER), "b": Molecule(xyz=chain, energies=LADDER)}
    )
    case = case_of(replace(one, question={"kind": "reaction", "terms": {"a": 1.0, "b": -1.0}}))
    spent = []
    for act in (
        lambda: judge(case.brief, case.plan, case.results),
        lambda: check(case.brief, case.plan, MACHINE),
    ):
        start = time.perf_counter()
        act()
        spent.append(time.perf_counter() - start)
    assert max(spent) < 0.2
