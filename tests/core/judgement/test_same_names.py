"""Two species of one name, or of nearly one name, never share their energies."""

from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.findings import Judgement
from plumbrule_core.documents.plan import Machine
from plumbrule_core.documents.results import Result
from plumbrule_core.judgement import judge
from plumbrule_core.judgement.rules.example import Example, Molecule, case_of
from plumbrule_core.planning import make_plan
from plumbrule_core.units import from_hartree

LONG = "carbon monoxide at the distance of the microwave spectrum, second attempt of March"[:80]
CO = Molecule(xyz="C 0 0 0; O 0 0 1.128")
ENERGIES = {"CO": -113.0, "C": -37.7, "O": -74.8}


def cut(name: str, *others: Molecule, names: tuple[str, ...] = ()) -> Brief:
    species = [CO.species(name), *(one.species(n) for one, n in zip(others, names, strict=True))]
    return Brief.from_data(
        {
            "question": {"kind": "bond", "species": name, "cut": [1, 2], "within": 4.0},
            "species": [one.to_data() for one in species],
            "recipe": {"basis": ["cc-pVTZ"], "rungs": ["HF"]},
        }
    )


def answered(brief: Brief) -> Judgement:
    plan = make_plan(brief, Machine(cores=1, memory_mb=4000.0, disk_mb=1e5))
    assert not plan.faults
    results = {
        task.id: Result(
            task=task.id,
            species=task.spec.species.name,
            rung="HF",
            basis="cc-pVTZ",
            level=task.spec.settings.level,
            energy=ENERGIES[task.spec.species.formula],
            seconds=1.0,
            memory_mb=1.0,
            reference="RHF",
        )
        for task in plan.tasks
    }
    return judge(brief, plan, results)


def test_a_cut_of_a_molecule_with_a_long_name_leaves_two_fragments_with_their_own_energies() -> None:
    found = answered(cut(LONG))
    assert found.answer is not None
    assert abs(found.answer.value - from_hartree(113.0 - 37.7 - 74.8, "kJ/mol")) < 1e-6
    names = [one.name for one in found.species]
    assert len(set(names)) == len(names) == 3
    assert all(len(name) <= 80 for name in names)
    assert [name[-8:] for name in names[:2]] == [", atom 1", ", atom 2"]


def test_a_species_that_has_the_name_of_a_fragment_keeps_its_own_energy_and_the_fragment_its_note() -> None:
    oxygen = Molecule(xyz="O 0 0 0", multiplicity=1)
    brief = cut("co", oxygen, names=("co, atom 2",))
    found = answered(brief)
    assert found.answer is not None
    assert abs(found.answer.value - from_hartree(113.0 - 37.7 - 74.8, "kJ/mol")) < 1e-6
    notes = make_plan(brief, Machine(cores=1, memory_mb=4000.0, disk_mb=1e5)).notes
    assert any("co, atom 2 (O) is taken as triplet" in note for note in notes)


def test_two_species_of_one_name_have_two_views() -> None:
    case = case_of(Example(molecules={"n2": Molecule()}))
    singlet, triplet = Molecule().species("n2"), Molecule(multiplicity=3).species("n2")
    assert case.view(singlet).species.multiplicity == 1
    assert case.view(triplet).species.multiplicity == 3


def test_a_fragment_of_many_atoms_is_told_from_the_other_by_its_first_atom() -> None:
    chain = Molecule(xyz="; ".join(f"C {1.4 * i} 0 0" for i in range(60))).species("c" * 80)
    brief = Brief.from_data(
        {
            "question": {"kind": "bond", "species": chain.name, "cut": [30, 31], "within": 4.0},
            "species": [chain.to_data()],
        }
    )
    assert brief.question is not None
    first, second, _ = (part.species.name for part in brief.question.parts(brief.by_name))
    assert first.endswith(", atoms 1-30")
    assert second.endswith(", atoms 31-60")
