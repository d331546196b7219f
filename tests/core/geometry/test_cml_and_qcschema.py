"""CML and QCSchema molecules."""

import json

import pytest

from plumbrule_core.errors import Unreadable
from plumbrule_core.geometry import read_file, read_text, write

CML = """<?xml version="1.0"?>
<cml xmlns="http://www.xml-cml.org/schema">
 <molecule id="m1" title="hydroxide" formalCharge="-1" spinMultiplicity="1">
  <atomArray>
   <atom id="a1" elementType="O" x3="0" y3="0" z3="0"/>
   <atom id="a2" elementType="H" x3="0" y3="0" z3="0.964"/>
  </atomArray>
  <bondArray><bond atomRefs2="a1 a2" order="1"/></bondArray>
 </molecule>
</cml>"""
QCSCHEMA = {
    "schema_name": "qcschema_molecule",
    "schema_version": 2,
    "name": "dihydrogen",
    "symbols": ["H", "H"],
    "geometry": [0, 0, 0, 0, 0, 1.4],
    "molecular_charge": 1.0,
    "molecular_multiplicity": 2,
}
BILLION_LAUGHS = (
    '<!DOCTYPE m [<!ENTITY a "lol">'
    + "".join(f'<!ENTITY {new} "{f"&{old};" * 10}">' for old, new in zip("abcdefgh", "bcdefghi", strict=True))
    + "]><molecule><atomArray><atom elementType='&i;' x3='0' y3='0' z3='0'/></atomArray></molecule>"
)


def refusal(text: str) -> list[str]:
    with pytest.raises(Unreadable) as caught:
        read_text(text)
    return str(caught.value).split("\n")


def test_a_cml_molecule_is_read_with_charge_and_multiplicity(tmp_path):
    (tmp_path / "oh.cml").write_text(CML)
    (species,) = read_file(tmp_path / "oh.cml")
    assert (species.name, species.formula, species.multiplicity) == ("oh", "HO⁻", 1)
    assert species.atoms[1].z == 0.964
    assert read_text(CML)[0].name == "hydroxide"


def test_charges_of_cml_atoms_add_up_where_the_molecule_states_none():
    text = CML.replace(' formalCharge="-1"', "").replace(
        'elementType="O"', 'elementType="O" formalCharge="-1"'
    )
    assert read_text(text)[0].charge == -1


@pytest.mark.parametrize(
    "text",
    [
        BILLION_LAUGHS,
        '<!DOCTYPE m SYSTEM "file:///etc/passwd"><molecule/>',
        '<!DOCTYPE m [<!ENTITY x SYSTEM "file:///etc/passwd">]><molecule>&x;</molecule>',
        '<?xml version="1.0"?><!DOCTYPE m><molecule/>',
    ],
)
def test_a_cml_file_that_declares_entities_or_a_document_type_is_refused(text):
    assert refusal(text) == [
        "declares a document type or entities, which are not read for safety; remove them"
    ]


def test_every_faulty_cml_atom_is_named():
    text = CML.replace('z3="0"', "").replace('elementType="H"', 'elementType="Du"').replace('"-1"', '"many"')
    said = refusal(text)
    assert said[0] == "atom a1: has no z3"
    assert said[1].startswith("atom a2: 'Du' is a ghost or dummy atom")
    assert said[2] == "molecule m1: formalCharge='many' must be -20 to 20"


def test_a_flat_cml_drawing_is_refused_with_what_to_do():
    text = CML.replace("x3", "x2").replace("y3", "y2").replace('z3="0"', "").replace('z3="0.964"', "")
    assert "it is a flat drawing (x2, y2), so save it with 3-D coordinates" in refusal(text)[0]


def test_cml_that_is_not_xml_is_refused_with_its_line():
    assert refusal(CML.replace("</atomArray>", ""))[0].startswith("line 9: is not XML at column")
    assert refusal("<svg/>") == ["holds no atoms; a CML file has a molecule with an atomArray of atoms"]


def test_cml_nested_very_deep_does_no_harm():
    assert refusal("<a>" * 100_000 + "</a>" * 100_000)[0].startswith(("holds no atoms", "line 1: is not XML"))


def test_a_qcschema_molecule_is_in_bohr(tmp_path):
    (tmp_path / "h2.json").write_text(json.dumps(QCSCHEMA))
    (species,) = read_file(tmp_path / "h2.json")
    assert (species.name, species.charge, species.multiplicity) == ("h2", 1, 2)
    # 1.4 bohr, CODATA 2022
    assert species.atoms[1].z == pytest.approx(0.7408480947616, abs=1e-9)


def test_a_molecule_inside_a_larger_record_is_found_and_rows_of_three_are_read():
    record = {"driver": "energy", "molecule": {**QCSCHEMA, "geometry": [[0, 0, 0], [0, 0, 1.4]]}}
    assert read_text(json.dumps(record))[0].name == "dihydrogen"


def test_our_qcschema_is_what_the_published_schema_asks_for():
    # MolSSI QCSchema `qcschema_molecule` version 2 requires schema_name, schema_version, symbols, geometry
    (species,) = read_text(json.dumps(QCSCHEMA))
    record = json.loads(write(species, ".json"))
    assert record["schema_name"] == "qcschema_molecule"
    assert record["schema_version"] == 2
    assert record["geometry"] == pytest.approx(QCSCHEMA["geometry"], abs=1e-9)
    assert record["symbols"] == ["H", "H"]


@pytest.mark.parametrize(
    ("changes", "says"),
    [
        ({"symbols": ["H", "Qq"]}, "symbols, atom 2: 'Qq' is not an element"),
        ({"symbols": []}, "symbols: must be a list of element symbols"),
        ({"geometry": [0, 0, 0]}, "geometry: has 3 numbers, but 2 atoms need 6"),
        ({"geometry": [0, 0, 0, 0, 0, "far"]}, "geometry, number 6 (atom 2): 'far' is not a number"),
        ({"geometry": [0, 0, 0, 0, 0, 1e9]}, "geometry, number 6 (atom 2): lies absurdly far out"),
        ({"geometry": "near"}, "geometry: must be a list of coordinates in bohr"),
        ({"molecular_charge": 0.5}, "molecular_charge: 0.5 cannot be; it must be a whole number"),
        ({"molecular_multiplicity": 0}, "molecular_multiplicity: 0 cannot be"),
        ({"real": [True, False]}, "real: marks ghost atoms"),
        ({"symbols": ["H"] * 501}, "501 atoms are more than a species may have"),
    ],
)
def test_a_faulty_qcschema_key_is_named(changes, says):
    assert refusal(json.dumps(QCSCHEMA | changes))[0].startswith(says)


@pytest.mark.parametrize(
    "text",
    [
        '{"symbols": [',
        "{}",
        '{"molecule": 3}',
        "{" + '"a":{' * 100_000,
        '{"symbols":["H"],"geometry":[0,0,' + "9" * 5000 + "]}",
    ],
)
def test_json_that_is_no_molecule_is_refused(text):
    assert refusal(text)


def test_numbers_that_are_not_finite_are_refused():
    text = json.dumps(QCSCHEMA).replace("1.4", "NaN")
    assert "not a coordinate" in refusal(text)[0]
    assert refusal(json.dumps(QCSCHEMA).replace("1.4", "Infinity"))
