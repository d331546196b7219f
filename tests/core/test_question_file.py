"""Question files: everything that is wrong is said at once, and what is written runs again."""

import string
from pathlib import Path

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.questions import (
    BondQuestion,
    EnergyQuestion,
    IonisationQuestion,
    ReactionQuestion,
    SpinGapQuestion,
)
from plumbrule_core.documents.recipe import ActiveSpace, Corrections, GeometryLevel, Recipe
from plumbrule_core.documents.species import Atom, Species
from plumbrule_core.elements import ELEMENTS
from plumbrule_core.errors import Refused
from plumbrule_core.question_file import read_draft, read_question, write_question
from plumbrule_resources import demo_questions

GOOD = """
[question]
kind = "reaction"
within = 4.0
unit = "kJ/mol"
terms = { h = 2, h2 = -1 }

[species.h]
xyz = "H 0 0 0"

[species.h2]
xyz = '''
H 0 0 0
H 0 0 0.74
'''

[recipe]
basis = "cc-pVDZ"
rungs = ["HF", "MP2"]
"""


def write(folder: Path, text: str) -> Path:
    path = folder / "question.toml"
    path.write_text(text, encoding="utf-8")
    return path


def faults(folder: Path, text: str) -> dict[str, str]:
    return {fault.where: fault.says for fault in read_draft(write(folder, text)).faults}


def test_a_good_file_is_read_whole(tmp_path):
    brief = read_question(write(tmp_path, GOOD))
    assert brief.question == ReactionQuestion(within=4.0, terms={"h": 2.0, "h2": -1.0})
    assert [one.name for one in brief.species] == ["h", "h2"]
    assert brief.recipe == Recipe(basis=("cc-pVDZ",), rungs=("HF", "MP2"))


def test_a_multiplicity_that_nobody_states_is_the_proposed_ground_state(tmp_path):
    hydrogen, molecule = read_question(write(tmp_path, GOOD)).species
    assert (hydrogen.multiplicity, molecule.multiplicity) == (2, 1)


def test_the_proposal_fits_the_charge_of_the_table(tmp_path):
    text = GOOD.replace("[recipe]", "[species.cation]\nxyz = 'O 0 0 0'\ncharge = 1\n\n[recipe]")
    # O is 2p4 3P, O+ is 2p3 4S (NIST Atomic Spectra Database, from memory).
    assert read_question(write(tmp_path, text)).by_name["cation"].multiplicity == 4
    neutral = text.replace("charge = 1\n", "")
    assert read_question(write(tmp_path, neutral)).by_name["cation"].multiplicity == 3


def test_a_geometry_is_looked_for_beside_the_file_and_keeps_what_it_states(tmp_path):
    (tmp_path / "ion.xyz").write_text("1\ncharge=1 multiplicity=4\nO 0 0 0\n")
    text = GOOD.replace("[recipe]", "[species.ion]\ngeometry = 'ion.xyz'\n\n[recipe]")
    ion = read_question(write(tmp_path, text)).by_name["ion"]
    assert (ion.charge, ion.multiplicity, ion.origin) == (1, 4, "read from ion.xyz")
    over = text.replace("geometry = 'ion.xyz'", "geometry = 'ion.xyz'\nmultiplicity = 2")
    assert read_question(write(tmp_path, over)).by_name["ion"].multiplicity == 2


def test_smiles_is_built_into_a_molecule(tmp_path):
    text = GOOD.replace("[recipe]", "[species.water]\nsmiles = 'O'\n\n[recipe]")
    assert read_question(write(tmp_path, text)).by_name["water"].formula == "H2O"


def test_all_faults_are_said_at_once_each_with_its_key(tmp_path):
    text = """
surplus = 1
[question]
kind = "reaction"
within = -4.0
unit = "kJ"
terms = { h = 2, h2 = -1 }
[species.h]
xyz = "H 0 0 zero"
multiplicity = "two"
[species.h2]
geometry = "nowhere.xyz"
[species.both]
xyz = "H 0 0 0"
smiles = "[H]"
[species.spin]
xyz = "H 0 0 0"
multiplicity = 1
[recipe]
basis = ["a", "b", "c"]
core = "half"
colour = "blue"
[recipe.corrections]
zero_point = "perhaps"
"""
    found = faults(tmp_path, text)
    assert set(found) >= {
        "surplus",
        "question.within",
        "question.unit",
        "species.h.multiplicity",
        "species.h2.geometry",
        "species.both",
        "species.spin.multiplicity",
        "recipe.basis",
        "recipe.core",
        "recipe.colour",
    }
    assert any(where.startswith("recipe.corrections.zero_point") for where in found)
    assert "no such file" in found["species.h2.geometry"]
    assert "exactly one of geometry, xyz and smiles" in found["species.both"]
    with pytest.raises(Refused) as refused:
        read_question(tmp_path / "question.toml")
    assert {fault.where for fault in refused.value.faults} == set(found)


def test_every_faulty_line_of_a_geometry_is_a_fault_of_its_own(tmp_path):
    text = GOOD.replace("H 0 0 0\nH 0 0 0.74", "Hx 0 0 0\nH 0 0 0.74\nH 0 0 far")
    says = [
        fault.says for fault in read_draft(write(tmp_path, text)).faults if fault.where == "species.h2.xyz"
    ]
    assert len(says) == 2
    assert "Hx" in says[0]
    assert "far" in says[1]


def test_atom_lines_are_not_taken_for_smiles(tmp_path):
    assert "species.h.xyz" in faults(tmp_path, GOOD.replace('"H 0 0 0"', '"CCO"'))


def test_a_syntax_fault_names_its_line(tmp_path):
    (where,) = faults(tmp_path, "[question]\nkind = \n")
    assert "line 2" in where


@pytest.mark.parametrize(
    ("change", "key"),
    [
        (("h2 = -1 }", "h2 = -2 }"), "question.terms"),
        (("h2 = -1 }", "hydrogen = -1 }"), "question.terms.hydrogen"),
        (('kind = "reaction"', 'kind = "magic"'), "question.kind"),
        (('kind = "reaction"\n', ""), "question.kind"),
        (("within = 4.0\n", ""), "question.within"),
        (("within = 4.0", "within = nan"), "question.within"),
        (("within = 4.0", "within = 2024-01-01"), "question.within"),
        (("within = 4.0", f"within = 0x{'f' * 40}"), "question.within"),
        (("[recipe]", "[recipes]"), "recipes"),
        (("[recipe]", "[[recipe]]"), "recipe"),
        (("[species.h]", "[species.h]\nmass = 1"), "species.h.mass"),
        (("[species.h]", "[species.h]\ncharge = 9"), "species.h.charge"),
        (("[species.h]", "[species.h]\nmultiplicity = 3"), "species.h.multiplicity"),
    ],
)
def test_an_impossible_value_is_refused_at_its_key(tmp_path, change, key):
    assert change[0] in GOOD
    assert key in faults(tmp_path, GOOD.replace(*change))


def test_a_species_that_could_not_be_read_is_not_called_missing_too(tmp_path):
    assert set(faults(tmp_path, GOOD.replace('"H 0 0 0"', '"H 0 0 zero"'))) == {"species.h.xyz"}


@pytest.mark.parametrize("kind", ["barrier", "binding", "curve", "survey"])
def test_a_kind_that_is_not_built_yet_says_so(tmp_path, kind):
    asked = {
        "barrier": 'within = 4.0\nfrom = "h"\nover = "h2"',
        "binding": 'within = 4.0\ncomplex = "h2"\nfragments = [[1], [2]]',
        "curve": 'within = 4.0\nspecies = "h2"\nalong = { distance = [1, 2] }\nvalues = [0.5, 1.0]',
        "survey": 'files = "*.xyz"',
    }[kind]
    text = f'[question]\nkind = "{kind}"\n{asked}\n' + GOOD[GOOD.index("[species.h]") :]
    found = faults(tmp_path, text)
    assert set(found) == {"question.kind"}
    assert found["question.kind"].endswith("is understood, but not built yet in this version")


def test_files_that_are_no_text_or_no_file_are_refused_in_words(tmp_path):
    path = tmp_path / "question.toml"
    path.write_bytes(b"\xff\xfe\x00[question]")
    assert "UTF-8" in str(read_draft(path).faults[0])
    assert "no such file" in str(read_draft(tmp_path / "none.toml").faults[0])
    assert read_draft(tmp_path).faults
    path.write_text("a = " + "[" * 20000)
    assert "too deeply" in str(read_draft(path).faults[0])


def test_the_demo_questions_can_all_be_read():
    assert demo_questions()
    for path in demo_questions():
        assert read_question(path).question is not None


numbers = st.floats(-50, 50, allow_nan=False).map(lambda value: value + 0.0)
symbols = st.sampled_from([s for s, element in ELEMENTS.items() if element.number <= 18])
atoms = st.builds(Atom, symbol=symbols, x=numbers, y=numbers, z=numbers)
names = st.text(st.characters(exclude_categories=("Cs",)), min_size=1, max_size=20)
origins = st.text(st.characters(exclude_categories=("Cs",)), min_size=1, max_size=30)


@st.composite
def species(draw, name):
    placed = draw(st.lists(atoms, min_size=1, max_size=4))
    charge = draw(st.integers(0, 1))
    electrons = sum(ELEMENTS[atom.symbol].number for atom in placed) - charge
    multiplicity = 1 + electrons % 2
    return Species(
        name=name, atoms=tuple(placed), charge=charge, multiplicity=multiplicity, origin=draw(origins)
    )


recipes = st.builds(
    Recipe,
    basis=st.sampled_from([("cc-pVDZ",), ("cc-pVDZ", "cc-pVTZ")]),
    core=st.sampled_from(["frozen", "all"]),
    reference=st.sampled_from(["auto", "RHF", "UHF", "ROHF"]),
    rungs=st.lists(st.sampled_from(["HF", "MP2", "CCSD(T)"]), min_size=1, max_size=3).map(tuple),
    density_fitting=st.sampled_from(["auto", "yes", "no"]),
    active_space=st.none() | st.builds(ActiveSpace, choice=st.just("propose"), grow=st.booleans()),
    geometry=st.none() | st.builds(GeometryLevel, vibrations=st.booleans()),
    corrections=st.builds(Corrections, zero_point=st.sampled_from(["auto", True, False])),
)


@st.composite
def briefs(draw):
    name = draw(names)
    one = draw(species(name))
    within = draw(st.floats(1e-6, 1e6))
    title = draw(st.text(st.characters(exclude_categories=("Cs",)), max_size=30))
    other = one.model_copy(update={"name": name + "x", "multiplicity": one.multiplicity + 2})
    kinds = [
        EnergyQuestion(within=within, species=name),
        ReactionQuestion(within=within, terms={name: -1.5, name + "x": 1.5}),
        SpinGapQuestion(within=within, low=name, high=name + "x"),
    ]
    return Brief(
        title=title, question=draw(st.sampled_from(kinds)), species=(one, other), recipe=draw(recipes)
    )


@settings(max_examples=150, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(brief=briefs())
def test_what_is_written_reads_back_equal_to_the_last_digit(tmp_path, brief):
    draft = read_draft(write(tmp_path, write_question(brief)))
    if draft.faults:
        # Random spin states may not fit their electrons; nothing else may be wrong.
        assert {fault.where for fault in draft.faults} <= {fault.where for fault in brief.faults()}
    else:
        assert draft.brief() == brief


def test_questions_with_awkward_keys_read_back_equal(tmp_path):
    ion = Species(name="n2 +", atoms=(Atom(symbol="N", x=0, y=0, z=0),), charge=1, multiplicity=3, origin="a")
    atom = ion.model_copy(update={"name": 'quo"te\n', "charge": 0, "multiplicity": 4})
    pair = Species(
        name="n2",
        atoms=(Atom(symbol="N", x=0, y=0, z=0), Atom(symbol="N", x=1e-7, y=0, z=1.1)),
        origin="b",
    )
    for question in (
        IonisationQuestion(within=0.1, unit="eV", start=atom.name, to=ion.name),
        BondQuestion(within=4.0, species="n2", cut=(1, 2), fragment_multiplicities=(4, 4)),
        BondQuestion(within=4.0, species="n2", cut=(2, 1)),
    ):
        brief = Brief(question=question, species=(ion, atom, pair), recipe=Recipe())
        assert read_question(write(tmp_path, write_question(brief))) == brief


mangled = st.lists(
    st.tuples(st.integers(0, len(GOOD)), st.integers(0, 8), st.text(string.printable + "é\0", max_size=4)),
    min_size=1,
    max_size=3,
)


@settings(max_examples=400, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(changes=mangled)
def test_no_mangled_file_raises_anything_but_faults(tmp_path, changes):
    text = GOOD
    for place, cut, put in changes:
        text = text[:place] + put + text[place + cut :]
    draft = read_draft(write(tmp_path, text))
    assert all(fault.says for fault in draft.faults)
    assert draft.faults or draft.brief().question is not None


awkward = st.recursive(
    st.none().map(lambda _: True) | st.integers() | st.floats() | st.text(string.printable, max_size=5),
    lambda inner: st.lists(inner, max_size=3),
    max_leaves=5,
)


def toml_value(value: object) -> str:
    import json

    if isinstance(value, list):
        return "[" + ", ".join(toml_value(one) for one in value) + "]"
    if isinstance(value, float):
        return str(value)
    return json.dumps(value).replace("\x7f", "\\u007f")


KEYS = ("kind", "within", "unit", "terms", "xyz", "basis", "rungs")


@settings(max_examples=300, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(key=st.sampled_from(KEYS), value=awkward)
def test_a_value_of_any_kind_at_any_key_is_read_or_refused_in_words(tmp_path, key, value):
    lines = GOOD.replace("'''\nH 0 0 0\nH 0 0 0.74\n'''", "'H 0 0 0\\nH 0 0 0.74'").split("\n")
    changed = [f"{key} = {toml_value(value)}" if line.startswith(f"{key} =") else line for line in lines]
    draft = read_draft(write(tmp_path, "\n".join(changed)))
    assert all(fault.says and fault.where for fault in draft.faults)
