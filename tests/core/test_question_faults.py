"""Faults of a question file: none hides another, and each is said at its key in plain words."""

from pathlib import Path

import pytest

from plumbrule_core.documents.faults import Fault
from plumbrule_core.documents.plan import Machine
from plumbrule_core.planning import make_plan
from plumbrule_core.question_file import Draft, read_draft, write_question

SPECIES = """
[species.h]
xyz = "H 0 0 0"

[species.h2]
xyz = '''
H 0 0 0
H 0 0 0.74
'''
"""
REACTION = '[question]\nkind = "reaction"\nwithin = 4.0\nterms = { h = 2, h2 = -1 }\n'


def draft(folder: Path, text: str) -> Draft:
    path = folder / "question.toml"
    path.write_text(text, encoding="utf-8")
    return read_draft(path)


def faults(folder: Path, text: str) -> dict[str, str]:
    return {fault.where: fault.says for fault in draft(folder, text).faults}


@pytest.mark.parametrize(
    ("asked", "keys"),
    [
        ('kind = "energy"\nwithin = -3\nspecies = "nope"', {"within", "species"}),
        ('kind = "Reaction"\nwithin = "four"\nunit = "kJ"\nterms = { h = 1 }', {"kind", "within", "unit"}),
        ('kind = "magic"\nwithin = "four"\nunit = "kJ"', {"kind", "within", "unit"}),
        ('kind = "ionization"\nwithin = 1\nfrom = "h"\nto = "nope"', {"kind", "to"}),
        (
            'kind = "reaction"\nwithin = 1\nterms = { h = 0, nope = 1, h2 = "x" }',
            {"terms.h", "terms.nope", "terms.h2"},
        ),
        (
            'kind = "reaction"\nwithin = 0\nwide = 1\nterms = { h = 0, h2 = 1 }',
            {"terms.h", "within", "wide", "terms"},
        ),
        ('kind = "spin gap"\nwithin = 1\nlow = "nope"\nhigh = 3', {"low", "high"}),
        ('kind = "bond"\nwithin = 2024-01-01\nspecies = "h2"\ncut = [1, 1]', {"within", "cut"}),
        ('kind = "bond"\nwithin = 1\nspecies = "h2"\ncut = [1, 9]\nfragments = ["h"]', {"cut", "fragments"}),
    ],
)
def test_no_fault_of_a_question_hides_another(tmp_path, asked, keys):
    found = faults(tmp_path, f"[question]\n{asked}\n{SPECIES}")
    if "fragments" in keys:
        # What a cut leaves cannot be judged beside fragments that are wrong.
        keys = {"fragments"}
    # "Reaction" is judged as a reaction, which does not balance either.
    allowed = {f"question.{key}" for key in keys} | {"question.terms"}
    assert {f"question.{key}" for key in keys} <= set(found) <= allowed


@pytest.mark.parametrize("cut", ["[0, 9]", "[9, 0]"])
def test_a_cut_names_every_atom_that_is_not_there(tmp_path, cut):
    asked = f'[question]\nkind = "bond"\nwithin = 1\nspecies = "h2"\ncut = {cut}\n'
    found = faults(tmp_path, asked + SPECIES)
    assert set(found) == {"question.cut"}
    assert "no atom 0" in found["question.cut"]
    assert "no atom 9" in found["question.cut"]
    assert found["question.cut"].endswith("h2 has atoms 1 to 2")


def test_entries_of_lists_are_counted_from_one_at_the_key_of_the_list(tmp_path):
    asked = '[question]\nkind = "bond"\nwithin = 1\nspecies = "h2"\ncut = [1, "b"]\n'
    assert faults(tmp_path, asked + SPECIES) == {"question.cut": "entry 2 must be a whole number"}


def test_an_unknown_kind_is_answered_with_the_nearest_and_with_all_that_are_built(tmp_path):
    says = faults(tmp_path, f'[question]\nkind = "ionization"\nwithin = 1\n{SPECIES}')["question.kind"]
    assert says.startswith(
        "there is no kind 'ionization'; did you mean ionisation? there is energy, reaction"
    )


def test_no_source_of_a_species_hides_the_faults_of_another(tmp_path):
    lines = "'''\nH 0 0 a\nQ 0 0 0\nH 0 0 b\n'''"
    text = SPECIES.replace('xyz = "H 0 0 0"', f"smiles = 'x'\nmass = 1\nxyz = {lines}")
    found = [str(fault) for fault in draft(tmp_path, REACTION + text).faults]
    assert sum(one.startswith("species.h.xyz: ") for one in found) == 3
    for start in ("species.h: give exactly one", "species.h.mass: ", "species.h.smiles: "):
        assert sum(one.startswith(start) for one in found) == 1
    assert len(found) == 6


def test_a_wrong_multiplicity_does_not_hide_a_bad_atom_line(tmp_path):
    text = SPECIES.replace('"H 0 0 0"', '"H 0 0 zero"\nmultiplicity = "two"')
    assert set(faults(tmp_path, REACTION + text)) == {"species.h.xyz", "species.h.multiplicity"}


def test_an_unknown_key_of_a_species_does_not_hide_a_reaction_that_does_not_balance(tmp_path):
    text = REACTION.replace("h = 2", "h = 3") + SPECIES.replace("[species.h]", "[species.h]\nmass = 1")
    assert set(faults(tmp_path, text)) == {"species.h.mass", "question.terms"}


def test_what_is_right_in_a_faulty_recipe_is_kept_to_be_judged(tmp_path):
    recipe = '[recipe]\nbasis = ["nonsense", 3]\nrungs = ["HF", "MP3"]\ncolour = 1\ncore = "half"\n'
    read = draft(tmp_path, REACTION + SPECIES + recipe)
    assert {fault.where for fault in read.faults} == {"recipe.basis", "recipe.colour", "recipe.core"}
    assert read.recipe is not None
    assert (read.recipe.basis, read.recipe.rungs) == (("nonsense",), ("HF", "MP3"))


def test_lists_and_choices_are_refused_in_words(tmp_path):
    recipe = '[recipe]\nbasis = 3\nrungs = []\n[recipe.corrections]\nzero_point = "x"\n'
    assert faults(tmp_path, REACTION + SPECIES + recipe) == {
        "recipe.basis": "must be text in quotes, or a list of two to extrapolate",
        "recipe.rungs": "needs at least 1 entry",
        "recipe.corrections.zero_point": "must be 'auto', true or false",
    }


def test_an_energy_without_any_species_asks_for_one(tmp_path):
    found = faults(tmp_path, '[question]\nkind = "energy"\nwithin = 1')
    assert found == {"species": "there is none yet; add one as [species.water]"}


BENT = "xyz = '''\nC 0 0 0.1\nH 0 0.86 -0.6\nH 0 -0.86 -0.6\n'''"


def test_a_spin_gap_of_an_assumed_multiplicity_says_what_was_assumed(tmp_path):
    asked = '[question]\nkind = "spin gap"\nwithin = 4.0\nlow = "s"\nhigh = "t"\n'
    text = f"{asked}[species.s]\n{BENT}\n[species.t]\n{BENT}\nmultiplicity = 3\n"
    assert draft(tmp_path, text).faults == (
        Fault(
            where="question.high",
            says="s and t are both triplets; a spin gap needs two spin states; the multiplicity of s "
            "was not given, so triplet was assumed (multiplicity = 3)",
        ),
    )
    assert not faults(tmp_path, text.replace("[species.t]", "multiplicity = 1\n[species.t]"))


def test_only_a_multiplicity_that_nobody_gave_is_marked_as_assumed(tmp_path):
    (tmp_path / "stated.xyz").write_text("1\ncharge=1 multiplicity=4\nO 0 0 0\n")
    text = (
        REACTION
        + SPECIES
        + "multiplicity = 1\n[species.o]\ngeometry = 'stated.xyz'\n[species.w]\nsmiles = 'O'\n"
    )
    marked = {one.name: one.assumed_multiplicity for one in draft(tmp_path, text).species}
    assert marked == {"h": 2, "h2": None, "o": None, "w": 1}


def test_an_assumed_multiplicity_stands_in_the_notes_of_the_plan(tmp_path):
    asked = '[question]\nkind = "energy"\nwithin = 4.0\n'
    machine = Machine(cores=1, memory_mb=4000.0, disk_mb=1e5)
    notes = make_plan(draft(tmp_path, f"{asked}[species.s]\n{BENT}\n").brief(), machine).notes
    assert any("assumed: s triplet" in note for note in notes)
    stated = make_plan(draft(tmp_path, f"{asked}[species.s]\n{BENT}\nmultiplicity = 3\n").brief(), machine)
    assert not any("assumed" in note for note in stated.notes)


def test_what_was_assumed_is_written_as_such(tmp_path):
    text = write_question(
        draft(tmp_path, f"[question]\nkind = 'energy'\nwithin = 4.0\n[species.s]\n{BENT}\n").brief()
    )
    assert "multiplicity = 3  # not given; assumed\n" in text
    assert draft(tmp_path, text).species[0].multiplicity == 3
