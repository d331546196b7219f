"""Questions: balance, cuts, fragments, sentences; the kinds that are not built say so."""

import json

import pytest
from pydantic import TypeAdapter, ValidationError

from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.edits import edited
from plumbrule_core.documents.findings import Edit
from plumbrule_core.documents.questions import Question
from plumbrule_core.documents.recipe import Recipe
from plumbrule_core.documents.species import Atom, Species
from plumbrule_core.errors import Refused

ASK = TypeAdapter(Question)


def species(name, *rows, charge=0, multiplicity=1):
    atoms = tuple(Atom(symbol=s, x=x, y=y, z=z) for s, x, y, z in rows)
    return Species(name=name, atoms=atoms, charge=charge, multiplicity=multiplicity)


H2 = species("dihydrogen", ("H", 0, 0, 0), ("H", 0, 0, 0.741))
O2 = species("dioxygen", ("O", 0, 0, 0), ("O", 0, 0, 1.2075), multiplicity=3)
WATER = species("water", ("O", 0, 0, 0.1178), ("H", 0, 0.7555, -0.4712), ("H", 0, -0.7555, -0.4712))
HOOH = species(
    "peroxide",
    ("O", 0, 0.7275, -0.06),
    ("O", 0, -0.7275, -0.06),
    ("H", 0.79, 0.89, 0.48),
    ("H", -0.79, -0.89, 0.48),
)
MANY = {one.name: one for one in (H2, O2, WATER, HOOH)}


def ask(**data):
    return ASK.validate_json(json.dumps({"within": 4.0, **data}))


def says(question):
    return [fault.says for fault in question.faults(MANY)]


def test_a_balanced_reaction_has_no_fault_and_says_itself():
    question = ask(kind="reaction", terms={"water": 2, "dihydrogen": -2, "dioxygen": -1})
    assert question.faults(MANY) == ()
    text = "".join(clause.text for clause in question.sentence(MANY))
    assert text == "The reaction energy of 2 H2 + O2 to 2 H2O, within 4 kJ/mol"
    assert [part.coefficient for part in question.parts(MANY)] == [2, -2, -1]


def test_isomers_are_told_apart_by_name():
    planar, bent = H2.model_copy(update={"name": "planar"}), H2.model_copy(update={"name": "bent"})
    sentence = ask(kind="reaction", terms={"bent": 1, "planar": -1}).sentence(
        {"planar": planar, "bent": bent}
    )
    assert "of planar to bent" in "".join(clause.text for clause in sentence)


def test_atoms_out_of_balance_are_named_with_their_number():
    assert says(ask(kind="reaction", terms={"water": 1, "dihydrogen": -1})) == [
        "the reaction does not balance: on the side of the products 1 O too many"
    ]


def test_charge_out_of_balance_is_a_fault():
    ion = {**MANY, "ion": species("ion", ("H", 0, 0, 0), ("H", 0, 0, 1.05), charge=1, multiplicity=2)}
    question = ask(kind="reaction", terms={"ion": 1, "dihydrogen": -1})
    assert ["charge does not balance" in fault.says for fault in question.faults(ion)] == [True]


def test_a_species_that_does_not_exist_is_named_with_those_that_do():
    (fault,) = ask(kind="reaction", terms={"methane": 1}).faults(MANY)
    assert fault.where == "question.terms.methane"
    assert "there is dihydrogen, dioxygen, peroxide, water" in fault.says


def test_cutting_the_middle_of_peroxide_leaves_two_hydroxyl_doublets():
    parts = ask(kind="bond", species="peroxide", cut=[1, 2]).parts(MANY)
    assert [(p.coefficient, p.species.formula, p.species.multiplicity) for p in parts] == [
        (1.0, "HO", 2),
        (1.0, "HO", 2),
        (-1.0, "H2O2", 1),
    ]


def test_a_cut_of_atoms_that_are_not_bonded_is_refused_with_their_distance():
    (said,) = says(ask(kind="bond", species="water", cut=[2, 3]))
    assert "not bonded: they are 1.51 angstrom apart" in said


def test_the_molecule_of_a_single_atom_pair_splits_into_ground_state_atoms():
    parts = ask(kind="bond", species="dioxygen", cut=[1, 2]).parts(MANY)
    assert [p.species.multiplicity for p in parts] == [3, 3, 3]


def test_a_spin_gap_needs_two_spins_of_the_same_atoms():
    same = ask(kind="spin gap", low="dioxygen", high="dioxygen")
    assert "are both triplets" in says(same)[0]
    other = ask(kind="spin gap", low="water", high="dioxygen")
    assert "do not hold the same atoms" in says(other)[0]


def test_an_ionisation_needs_two_charges():
    question = ask(**{"kind": "ionisation", "from": "water", "to": "water"})
    assert "same charge" in says(question)[0]


def test_an_energy_question_of_several_species_must_say_which():
    assert "say which of the 4" in says(ask(kind="energy"))[0]
    assert ask(kind="energy", species="water").faults(MANY) == ()


@pytest.mark.parametrize(
    "data",
    [
        {"kind": "barrier", "from": "a", "over": "b"},
        {"kind": "binding", "complex": "a", "fragments": [[1], [2]]},
        {
            "kind": "curve",
            "species": "a",
            "along": {"distance": [1, 2]},
            "from": 0.9,
            "to": 3.0,
            "points": 15,
        },
        {"kind": "survey", "files": "molecules/*.xyz"},
    ],
)
def test_kinds_that_are_not_built_parse_and_say_so(data):
    assert "not built yet" in ask(**data).faults(MANY)[0].says


def test_an_accuracy_of_nothing_is_refused():
    with pytest.raises(ValidationError):
        ask(kind="energy", within=0)


def test_two_species_of_one_name_are_refused():
    brief = Brief(question=ask(kind="energy", species="water"), species=(WATER, WATER))
    assert "names must differ" in brief.faults()[0].says


def test_a_brief_survives_json_unchanged():
    question = ask(kind="reaction", terms={"water": 2, "dihydrogen": -2, "dioxygen": -1})
    brief = Brief(
        title="x",
        question=question,
        species=tuple(MANY.values()),
        recipe=Recipe(basis=("cc-pVDZ", "cc-pVTZ")),
    )
    assert Brief.from_json(brief.to_json()) == brief


def test_one_basis_may_be_given_as_plain_text():
    assert Recipe.from_data({"basis": "cc-pVDZ"}).basis == ("cc-pVDZ",)
    assert Recipe.from_data({"basis": ["cc-pVDZ", "cc-pVTZ"]}).basis == ("cc-pVDZ", "cc-pVTZ")


def test_an_edit_changes_what_its_path_names_and_nothing_else():
    brief = Brief(question=ask(kind="energy", species="dioxygen"), species=(WATER, O2))
    after = edited(
        brief, [Edit(path="species.dioxygen.multiplicity", value=1), Edit(path="question.within", value=2.0)]
    )
    assert after.by_name["dioxygen"].multiplicity == 1
    assert after.question.within == 2.0
    assert after.by_name["water"] == WATER
    assert after.recipe == brief.recipe


def test_an_edit_that_makes_no_valid_brief_is_refused_with_the_key():
    brief = Brief(species=(WATER,))
    with pytest.raises(Refused, match=r"recipe\.core: must be 'frozen' or 'all'"):
        edited(brief, [Edit(path="recipe.core", value="half")])
    with pytest.raises(Refused, match="no species named 'methane'"):
        edited(brief, [Edit(path="species.methane.charge", value=1)])


def test_a_fragment_is_named_by_the_numbers_of_its_atoms():
    asked = ask(kind="bond", species="peroxide", cut=[1, 2])
    names = [part.species.name for part in asked.parts(MANY)]
    assert names == ["peroxide, atoms 1 and 3", "peroxide, atoms 2 and 4", "peroxide"]
    # Methanol with its hydroxyl last: C and three H in a row, then O and H.
    methanol = species(
        "methanol",
        *(("C", 0, 0, 0), ("H", 1.03, 0, -0.36), ("H", -0.51, 0.89, -0.36), ("H", -0.51, -0.89, -0.36)),
        *(("O", 0, 0, 1.42), ("H", 0.9, 0, 1.74)),
    )
    parts = ask(kind="bond", species="methanol", cut=[1, 5]).parts({"methanol": methanol})
    assert [part.species.name for part in parts[:2]] == ["methanol, atoms 1-4", "methanol, atoms 5 and 6"]


def test_two_fragments_alike_are_one_species_at_one_place():
    pair = Species(name="f2", atoms=(Atom(symbol="F", x=1, y=2, z=3), Atom(symbol="F", x=1, y=2, z=4.41)))
    asked = ask(kind="bond", species="f2", cut=[1, 2])
    first, second, _ = asked.parts({"f2": pair})
    assert first == second
    assert first.species.name == "f2, atom 1"
