"""A reference that is broken by itself is enough for the rungs that cannot repair it.

Systems: `recorded_readings.json`. What is right: H2 at 3 angstrom is nearly two atoms (2 x -0.4993 hartree in
cc-pVDZ), while restricted Hartree-Fock dissociates it into H+ and H- by half (A. Szabo and N. S. Ostlund,
Modern Quantum Chemistry, section 3.8.7); N2 at 2.0 angstrom: Chan, Kallay and Gauss, J. Chem. Phys. 121, 6110
(2004); LiF at 5 angstrom is where its ionic and its neutral curve meet or lie close.
"""

from collections.abc import Callable
from dataclasses import replace

import pytest

from plumbrule_core.documents.findings import Judgement
from plumbrule_core.judgement import judge
from plumbrule_core.judgement.rules.example import Example, Molecule, case_of

Made = Callable[..., Example]
ATOM = Molecule(
    xyz="H 0 0 0", multiplicity=2, energies=dict.fromkeys(("HF", "MP2", "CISD", "CCSD"), -0.49928)
)


def judged(one: Example, unconverged: str = "") -> Judgement:
    case = case_of(one)
    results = {
        key: result.model_copy(update={"converged": False}) if result.rung == unconverged else result
        for key, result in case.results.items()
    }
    return judge(case.brief, case.plan, results)


def cut_down(one: Example, rungs: list[str], *lost: str, **energies: float) -> Example:
    (name, first), *others = one.molecules.items()
    kept = {key: value for key, value in first.readings.items() if key not in lost}
    known = {**first.energies, **energies}
    molecule = replace(first, readings=kept, energies={rung: known[rung] for rung in rungs})
    return replace(
        one, molecules={name: molecule, **dict(others)}, recipe={"basis": ["cc-pVDZ"], "rungs": rungs}
    )


LATER = ("T1", "D1", "D2", "largest_t1", "largest_t2", "triples", "share_of_triples")


def test_nitrogen_at_two_angstrom_with_cisd_alone_is_not_to_be_relied_on(recorded_example: Made) -> None:
    one = recorded_example(one="N2 at 2.0 A")
    few = cut_down(one, ["HF", "CISD"], *LATER, "M", "mp2_largest_t2", CISD=-108.9)
    assert judged(few).verdict.level == "do not rely on it"


def hydrogen(made: Made, rungs: list[str], *lost: str) -> Judgement:
    one = made({"kind": "bond", "species": "h2", "fragments": ["h", "h"]}, h2="H2 at 3.0 A", h="N")
    atom = replace(ATOM, energies={rung: ATOM.energies[rung] for rung in rungs})
    ladder = cut_down(one, rungs, *lost, CISD=-0.99955)
    return judged(replace(ladder, molecules={**ladder.molecules, "h": atom}))


@pytest.mark.parametrize("rungs", [["HF"], ["HF", "MP2"]])
def test_two_electrons_are_broken_below_the_rungs_that_are_exact(
    rungs: list[str], recorded_example: Made
) -> None:
    found = hydrogen(recorded_example, rungs, *LATER)
    assert found.verdict.level == "do not rely on it"
    assert found.answer is not None
    assert found.answer.uncertainty is None


@pytest.mark.parametrize("top", ["CCSD", "CISD"])
def test_ccsd_and_cisd_of_two_electrons_are_exact_and_have_no_line_for_the_method(
    top: str, recorded_example: Made
) -> None:
    found = hydrogen(recorded_example, ["HF", top])
    assert found.answer is not None
    assert found.answer.rung == top
    assert found.verdict.level != "do not rely on it"
    assert "beyond the top rung" not in {line.cause for line in found.budget}
    assert not any(top in one.rungs for one in found.findings if one.code in ("one-determinant", "diradical"))


def test_lithium_fluoride_whose_ccsd_is_lost_does_not_fall_back_on_mp2(recorded_example: Made) -> None:
    one = recorded_example(one="LiF at 5.0 A")
    found = judged(cut_down(one, ["HF", "MP2", "CCSD"]), unconverged="CCSD")
    assert found.verdict.level == "do not rely on it"


def test_an_unconverged_ccsd_is_a_second_witness_against_a_broken_reference(recorded_example: Made) -> None:
    found = judged(cut_down(recorded_example(one="LiF at 5.0 A"), ["HF", "CCSD"]), unconverged="CCSD")
    said = next(one for one in found.findings if one.code == "one-determinant")
    assert "coupled cluster did not converge" in said.consequence
