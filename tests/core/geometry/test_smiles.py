"""SMILES built in three dimensions."""

import pytest

from plumbrule_core.documents.bonding import bonds, distance, pieces
from plumbrule_core.errors import Unreadable
from plumbrule_core.geometry import from_smiles, read_file, read_text


@pytest.mark.parametrize(
    ("smiles", "formula", "multiplicity"),
    [
        ("O", "H2O", 1),
        ("CCO", "C2H6O", 1),
        ("[OH-]", "HO⁻", 1),
        ("[NH4+]", "H4N⁺", 1),
        ("[OH]", "HO", 2),
        ("C[CH2]", "C2H5", 2),
        ("[CH2]", "CH2", 3),
        ("O=O", "O2", 3),
        ("[H][H]", "H2", 1),
        ("[C-]#[O+]", "CO", 1),
        # lone atoms have their spectroscopic ground states (NIST Atomic Spectra Database)
        ("[He]", "He", 1),
        ("[O]", "O", 3),
        ("[C]", "C", 3),
        ("[N]", "N", 4),
        ("[Fe]", "Fe", 5),
    ],
)
def test_a_smiles_string_gives_formula_charge_and_multiplicity(smiles, formula, multiplicity):
    species = from_smiles(smiles)
    assert species.formula == formula
    assert species.multiplicity == multiplicity
    assert species.faults() == ()


def test_the_origin_says_how_far_the_geometry_can_be_trusted():
    assert from_smiles("O", "water").origin == "built from SMILES O, force field, not optimised"
    assert from_smiles("[2H]O").origin.endswith(
        "its isotopes read as the common ones, force field, not optimised"
    )


def test_the_same_string_gives_the_same_geometry_every_time():
    assert from_smiles("CC(C)Cc1ccccc1").atoms == from_smiles("CC(C)Cc1ccccc1").atoms


def test_bond_lengths_are_those_of_real_molecules_as_well_as_a_force_field_can():
    # experimental r(CC) of ethane, ethylene, acetylene and benzene in angstrom (NIST CCCBDB,
    # from memory)
    for smiles, length in [("CC", 1.535), ("C=C", 1.339), ("C#C", 1.203), ("c1ccccc1", 1.397)]:
        atoms = from_smiles(smiles).atoms
        assert distance(atoms[0], atoms[1]) == pytest.approx(length, abs=0.03)


def test_pieces_that_no_bond_joins_stand_side_by_side_and_stay_apart():
    species = from_smiles("O.O.CO")
    assert len(pieces(len(species.atoms), bonds(species.atoms))) == 3
    assert len(bonds(species.atoms)) == 2 + 2 + 5


def test_several_lines_give_several_species_with_their_titles(tmp_path):
    file = tmp_path / "some.smi"
    file.write_text("O water\n\nCO methyl alcohol\n")
    assert [species.name for species in read_file(file)] == ["water", "methyl alcohol"]


@pytest.mark.parametrize(
    ("smiles", "reason"),
    [
        ("H2O", "'H2O' is neither a SMILES string"),
        ("C(", "'C\\(' is neither a SMILES string"),
        ("C(C)(C)(C)(C)C", r"atom 1 \(C\) has more bonds than it can have"),
        ("c1cccc1", "stands in an aromatic ring"),
        ("*C", "'\\*' is a ghost or dummy atom"),
        ("[U]", "'U' is heavier than radon"),
        ("C" * 300, "902 atoms are more than a species may have"),
        ("C" * 100, "302 atoms are too many to build from connections alone"),
        ("C" * 3000, "3000 characters is too long"),
        ("C(" * 990, "is neither"),
        ("Cé", "is neither"),
        ("", "is neither"),
    ],
)
def test_a_wrong_smiles_string_is_refused_with_the_reason(smiles, reason):
    with pytest.raises(Unreadable, match=reason):
        from_smiles(smiles)


def test_every_faulty_line_of_pasted_strings_is_named():
    with pytest.raises(Unreadable) as caught:
        read_text("O\nH2O\nCCO\nc1cccc1\n")
    assert [line.split(":")[0] for line in str(caught.value).split("\n")] == ["line 2", "line 4"]
