from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.edits import edited
from plumbrule_core.documents.questions import BondQuestion, ReactionQuestion
from plumbrule_core.documents.species import Species
from plumbrule_desktop.state import asking, changes


def test_a_species_comes_in_under_a_name_that_is_free(water: Species) -> None:
    brief = Brief()
    for _ in range(3):
        brief = edited(brief, changes.with_species(brief, (water,)))
    assert [one.name for one in brief.species] == ["water", "water 2", "water 3"]


def test_a_copy_stands_right_after_its_original(water: Species, hydrogen: Species) -> None:
    brief = Brief(species=(water, hydrogen))
    after = edited(brief, changes.duplicated(brief, "water"))
    assert [one.name for one in after.species] == ["water", "water 2", "dihydrogen"]
    assert after.species[1].atoms == water.atoms


def test_another_name_for_a_species_is_another_name_in_the_question_too(
    water: Species, hydrogen: Species
) -> None:
    reaction = ReactionQuestion(within=4.0, terms={"water": -1.0, "dihydrogen": 2.0})
    brief = Brief(species=(water, hydrogen), question=reaction)
    after = edited(brief, changes.renamed(brief, "water", "steam"))
    assert dict(after.question.terms) == {"steam": -1.0, "dihydrogen": 2.0}
    bond = Brief(species=(water,), question=BondQuestion(within=4.0, species="water", cut=(1, 2)))
    assert edited(bond, changes.renamed(bond, "water", "steam")).question.species == "steam"


def test_rungs_stand_in_the_order_of_the_ladder_whatever_the_order_of_choosing(water: Species) -> None:
    order = ("HF", "MP2", "CISD", "CCSD", "CCSD(T)")
    brief = Brief(species=(water,))
    brief = edited(brief, changes.with_rung(brief, order, "MP2", False))
    brief = edited(brief, changes.with_rung(brief, order, "CISD", True))
    brief = edited(brief, changes.with_rung(brief, order, "MP2", True))
    assert brief.recipe.rungs == ("HF", "MP2", "CISD", "CCSD", "CCSD(T)")


def test_every_kind_that_can_be_answered_can_be_asked_of_one_molecule(hydrazine: Species) -> None:
    brief = Brief(species=(hydrazine,))
    for kind in asking.kinds():
        after = edited(brief, asking.asked(brief, kind))
        assert after.question is not None
        assert after.question.kind == kind
        if kind != "reaction":
            assert after.faults() == ()


def test_a_spin_gap_of_one_molecule_makes_the_other_spin_state(hydrazine: Species) -> None:
    brief = Brief(species=(hydrazine,))
    after = edited(brief, asking.asked(brief, "spin gap"))
    assert [one.multiplicity for one in after.species] == [1, 3]


def test_an_ionisation_of_one_molecule_makes_its_cation_with_a_spin_that_fits(water: Species) -> None:
    brief = Brief(species=(water,))
    after = edited(brief, asking.asked(brief, "ionisation"))
    cation = after.by_name[after.question.to]
    assert (cation.charge, cation.multiplicity, cation.faults()) == (1, 2, ())


def test_the_proposed_bond_is_between_the_heaviest_atoms(hydrazine: Species) -> None:
    brief = Brief(species=(hydrazine,))
    assert edited(brief, asking.asked(brief, "bond")).question.cut == (1, 2)


def test_another_kind_keeps_the_accuracy_that_was_asked_for(water: Species) -> None:
    brief = Brief(species=(water,))
    brief = edited(brief, asking.asked(brief, "energy"))
    brief = edited(brief, asking.set_question(brief, within=0.1, unit="eV"))
    after = edited(brief, asking.asked(brief, "ionisation"))
    assert (after.question.within, after.question.unit) == (0.1, "eV")


def test_a_bond_of_a_ring_is_not_offered_for_cutting() -> None:
    atoms = [("C", 0, 0.87, 0), ("C", 0.75, -0.43, 0), ("C", -0.75, -0.43, 0)]
    ring = Species.from_data(
        {"name": "ring", "atoms": [dict(zip(("symbol", "x", "y", "z"), a, strict=True)) for a in atoms]}
    )
    assert asking.cuttable(ring) == ()
