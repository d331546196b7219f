"""Species: electrons, formula, spin parity, content."""

import pytest
from hypothesis import given
from hypothesis import strategies as st
from pydantic import ValidationError

from plumbrule_core.documents.bonding import bonds, pieces
from plumbrule_core.documents.ground_states import ground_multiplicity
from plumbrule_core.documents.species import Atom, Species, lowest_multiplicity, spin_words
from plumbrule_core.elements import ELEMENTS

WATER = (
    Atom(symbol="O", x=0, y=0, z=0.1178),
    Atom(symbol="H", x=0, y=0.7555, z=-0.4712),
    Atom(symbol="H", x=0, y=-0.7555, z=-0.4712),
)

atoms = st.lists(
    st.builds(
        Atom,
        symbol=st.sampled_from(sorted(ELEMENTS)),
        x=st.floats(-50, 50),
        y=st.floats(-50, 50),
        z=st.floats(-50, 50),
    ),
    min_size=1,
    max_size=12,
).map(tuple)


def test_water_has_ten_electrons_and_its_formula_in_hill_order():
    water = Species(name="water", atoms=WATER)
    assert water.electrons == 10
    assert water.formula == "H2O"
    assert Species(name="hydroxide", atoms=WATER[:2], charge=-1).formula == "HO⁻"


def test_a_charge_in_a_formula_cannot_be_taken_for_a_number_of_atoms():
    assert Species(name="x", atoms=WATER, charge=20).formula == "H2O²⁰⁺"
    assert Species(name="x", atoms=WATER, charge=-2).formula == "H2O²⁻"


def test_an_assumed_multiplicity_is_said_and_changes_no_content():
    one = Species(name="CH2", atoms=WATER, multiplicity=3, assumed_multiplicity=3)
    assert "multiplicity of CH2 was not given, so triplet was assumed" in one.assumption
    assert one.content == Species(name="CH2", atoms=WATER, multiplicity=3).content
    assert not one.model_copy(update={"multiplicity": 1}).assumption


def test_a_multiplicity_of_the_wrong_parity_is_refused_with_those_that_fit():
    (fault,) = Species(name="water", atoms=WATER, multiplicity=2).faults()
    assert fault.where == "species.water.multiplicity"
    assert "10 electrons" in fault.says
    assert "odd (1, 3, 5)" in fault.says


def test_more_unpaired_electrons_than_electrons_are_refused():
    (fault,) = Species(name="atom", atoms=(Atom(symbol="H", x=0, y=0, z=0),), multiplicity=4).faults()
    assert "3 unpaired electrons" in fault.says


def test_an_unknown_element_is_refused_by_name():
    with pytest.raises(ValidationError, match="'Xx' is not an element"):
        Atom(symbol="Xx", x=0, y=0, z=0)


def test_a_coordinate_that_is_not_finite_is_refused():
    with pytest.raises(ValidationError):
        Atom(symbol="H", x=float("nan"), y=0, z=0)


def test_the_name_does_not_change_the_content_but_the_spin_does():
    one = Species(name="a", atoms=WATER)
    assert one.content == Species(name="b", atoms=WATER, origin="elsewhere").content
    assert one.content != Species(name="a", atoms=WATER, multiplicity=3).content


@given(atoms, st.integers(-3, 3))
def test_the_lowest_multiplicity_and_the_proposed_one_always_fit(made, charge):
    symbols = [atom.symbol for atom in made]
    if sum(ELEMENTS[s].number for s in symbols) <= charge:
        return
    for multiplicity in (lowest_multiplicity(symbols, charge), ground_multiplicity(made, charge)):
        species = Species(name="x", atoms=made, charge=charge, multiplicity=multiplicity)
        assert not species.faults()


@given(atoms)
def test_a_species_survives_json_unchanged(made):
    one = Species(name="x", atoms=made)
    again = Species.from_json(one.to_json())
    assert again == one
    assert again.digest == one.digest


@given(atoms)
def test_the_pieces_hold_every_atom_once(made):
    found = pieces(len(made), bonds(made))
    assert sorted(place for piece in found for place in piece) == list(range(len(made)))


def test_water_is_one_piece_with_two_bonds():
    assert bonds(WATER) == ((0, 1), (0, 2))


@pytest.mark.parametrize(
    ("symbol", "multiplicity"),
    # Ground terms of the atoms, NIST Atomic Spectra Database (from memory)
    [("H", 2), ("C", 3), ("N", 4), ("O", 3), ("F", 2), ("Ne", 1), ("Cr", 7), ("Fe", 5), ("Ni", 3)],
)
def test_ground_states_of_atoms_are_those_of_the_tables(symbol, multiplicity):
    assert ground_multiplicity((Atom(symbol=symbol, x=0, y=0, z=0),), 0) == multiplicity


@pytest.mark.parametrize(
    ("symbol", "charge", "multiplicity"), [("O", 1, 4), ("F", -1, 1), ("Na", 1, 1), ("C", -1, 4)]
)
def test_ions_of_atoms_get_the_ground_state_of_their_electron_count(symbol, charge, multiplicity):
    # Ground terms O+ 4S, F- 1S, Na+ 1S, C- 4S: NIST Atomic Spectra Database and affinity tables (from memory)
    assert ground_multiplicity((Atom(symbol=symbol, x=0, y=0, z=0),), charge) == multiplicity


def test_the_multiplicity_is_said_in_words():
    assert spin_words(3) == "triplet, 2 unpaired electrons"
    assert spin_words(1) == "singlet, no unpaired electron"
    assert spin_words(2) == "doublet, 1 unpaired electron"
