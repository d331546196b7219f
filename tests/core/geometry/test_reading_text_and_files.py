"""XYZ, atom lines, and what holds for every format: names, origins, encodings, sizes, refusals."""

import pytest

from plumbrule_core.documents.species import lowest_multiplicity
from plumbrule_core.errors import PlumbruleError, Unreadable
from plumbrule_core.geometry import read_file, read_text, write

WATER = "O 0 0 0.117\nH 0 0.757 -0.469\nH 0 -0.757 -0.469\n"


def refusal(text: str) -> list[str]:
    with pytest.raises(Unreadable) as caught:
        read_text(text)
    return str(caught.value).split("\n")


def test_a_comment_line_gives_charge_and_multiplicity(tmp_path):
    file = tmp_path / "cation.xyz"
    file.write_text("3\ncharge=+1 multiplicity=2 ionised water\n" + WATER)
    (species,) = read_file(file)
    assert (species.name, species.charge, species.multiplicity) == ("cation", 1, 2)
    assert species.origin == "read from cation.xyz"
    assert species.atoms[0].z == 0.117


@pytest.mark.parametrize(
    ("said", "charge"), [("+1", 1), ("1+", 1), ("-1", -1), ("1-", -1), ('"2"', 2), ("1.0", 1)]
)
def test_a_charge_may_be_written_as_people_write_it(said, charge):
    (species,) = read_text(f"1\nenergy=-1.5 charge={said}, multiplicity=1\nZn 0 0 0\n")
    assert species.charge == charge


def test_a_key_that_only_ends_in_charge_is_not_the_charge():
    (species,) = read_text("1\ntotal_charge=3 charge=1\nNa 0 0 0\n")
    assert species.charge == 1


def test_frames_follow_one_another_and_get_names_of_their_own(tmp_path):
    file = tmp_path / "path.xyz"
    file.write_text("2\nstart\nH 0 0 0\nH 0 0 0.74\n\n2\n\nH 0 0 0\nH 0 0 1.5\n2\n\nH 0 0 0\nH 0 0 2.5\n\n\n")
    assert [species.name for species in read_file(file)] == ["start", "path 1", "path 2"]
    assert [species.atoms[1].z for species in read_file(file)] == [0.74, 1.5, 2.5]


def test_columns_named_in_the_comment_are_found():
    text = '2\nProperties=id:I:1:forces:R:3:pos:R:3:species:S:1 Lattice="9 0 0 0 9 0 0 0 9"\n'
    text += "1 9 9 9 0 0 0 H\n2 9 9 9 0 0 0.74 H\n"
    (species,) = read_text(text)
    assert species.atoms[1].z == 0.74
    assert species.origin == "pasted as XYZ, its periodic cell left out"


@pytest.mark.parametrize(
    "text",
    [
        WATER,
        WATER.replace("O", "8").replace("H", "1"),
        WATER.replace(" ", ", "),
        WATER.replace(" ", "\t").replace("\n", "\r\n"),
        "# from a paper\n\n" + WATER.replace("O", "O1").replace("H", "h2") + "\n",
        WATER.replace("0.117", "1.17D-01"),
        "3\n\n" + WATER,
        "\ufeff" + WATER,
    ],
)
def test_pasted_atoms_are_read_however_they_are_set_out(text):
    (species,) = read_text(text)
    assert species.formula == "H2O"
    assert species.atoms[0].z == 0.117
    assert species.multiplicity == 1


def test_pasted_atoms_may_state_their_charge_on_a_line_of_its_own():
    (species,) = read_text("charge=1 multiplicity=2\n" + WATER, "water cation")
    assert (species.name, species.charge, species.multiplicity) == ("water cation", 1, 2)


def test_heavy_hydrogen_is_read_as_hydrogen_and_said():
    (species,) = read_text("O 0 0 0.117\nD 0 0.757 -0.469\nH 0 -0.757 -0.469\n")
    assert species.formula == "H2O"
    assert species.origin == "pasted as atom lines, D read as H"


def test_without_a_stated_multiplicity_the_ground_state_is_proposed_or_what_the_caller_asks_for():
    oxygen = "O 0 0 0\nO 0 0 1.2\n"
    assert read_text(oxygen)[0].multiplicity == 3
    lowest = read_text(oxygen, propose=lambda atoms, q: lowest_multiplicity([a.symbol for a in atoms], q))
    assert lowest[0].multiplicity == 1


def test_every_faulty_line_is_named_with_what_would_be_right():
    said = refusal("4\ncharge=two\nO 0 0 0.1\nQq 0 0 1\nH 0 zero 1\nH 0 0\n")
    assert said == [
        "line 2: charge=two is not a whole number; charge=1 is",
        "line 4: 'Qq' is not an element; a symbol such as C or an atomic number such as 6 is (atom 2 of 4)",
        "line 5: 'zero' is not a number; a coordinate in angstrom such as 0.117 is (atom 3 of 4)",
        "line 6: 'H 0 0' is not a whole atom; it needs a symbol and three coordinates (atom 4 of 4)",
    ]


def test_ten_faults_are_named_and_the_rest_counted():
    said = refusal("C 0 0 0\n" + "Qq 0 0 1\n" * 14)
    assert len(said) == 11
    assert said[0].startswith("line 2: ")
    assert said[-1] == "and 4 more faults"


@pytest.mark.parametrize("label", ["X", "Bq", "Gh", "ghost-O", "@O", "0", "Du"])
def test_ghost_atoms_are_refused_plainly(label):
    (said,) = refusal(f"O 0 0 0\n{label} 0 0 1\n")
    assert said.startswith(f"line 2: '{label}' is a ghost or dummy atom")


@pytest.mark.parametrize(
    ("text", "says"),
    [
        ("3\n\nO 0 0 0\nH 0 0 1\n", "line 1: 3 atoms are announced, but the file ends after 2 lines of them"),
        ("1\n\nO 0 0 0\nH 0 0 1\n", "line 4: the number of atoms should stand here, not 'H 0 0 1'"),
        ("2\ncharge=99\nO 0 0 0\nH 0 0 1\n", "line 2: charge=99 cannot be; it lies between -20 and 20"),
        ("0\n\n", "line 1: the number of atoms should stand here, not '0'"),
        ("O 0 0 inf\n", "line 1: inf is not a coordinate; they lie between -10000 and 10000 angstrom"),
        ("O 0 0 1e9\n", "line 1: 1e+09 is not a coordinate"),
        ("U 0 0 0\n", "line 1: 'U' is heavier than radon"),
        ("92 0 0 0\n", "line 1: atomic number 92 is not known; 1 (H) to 86 (Rn) are"),
        ("O 0 0 0\nenergy=3\n", "line 2: 'energy=3' is not a whole atom"),
        ("O 0 0 0\nH 0 0 =1\n", "line 2: '=1' is not a number"),
        ("# O 0 0 0\n", "holds no atoms"),
        ("  \n \n", "is empty"),
    ],
)
def test_a_wrong_text_is_refused_with_the_line_and_the_reason(text, says):
    assert refusal(text)[0].startswith(says)


@pytest.mark.parametrize("text", ["501\n\n" + "H 0 0 1\n" * 501, "H 0 0 1\n" * 501])
def test_a_molecule_that_is_too_large_is_refused_by_its_size(text):
    assert "501 atoms are more than a species may have (500)" in refusal(text)[0]


def test_a_file_that_is_not_there_or_is_no_text_is_refused_by_name(tmp_path):
    (tmp_path / "folder.xyz").mkdir()
    (tmp_path / "picture.xyz").write_bytes(b"\x89PNG\0\0")
    for name, reason in [
        ("none.xyz", "there is no such file"),
        ("folder.xyz", "is a folder"),
        ("picture.xyz", "is not a text file"),
    ]:
        with pytest.raises(Unreadable, match=f"^{name}: {reason}"):
            read_file(tmp_path / name)


def test_every_line_of_a_refusal_names_the_file(tmp_path):
    file = tmp_path / "bad.xyz"
    file.write_text("2\n\nQq 0 0 0\nH 0 0\n")
    with pytest.raises(Unreadable) as caught:
        read_file(file)
    assert [line.split(":")[:2] for line in str(caught.value).split("\n")] == [
        ["bad.xyz", " line 3"],
        ["bad.xyz", " line 4"],
    ]


def test_a_huge_file_is_refused_before_it_is_read(tmp_path):
    file = tmp_path / "huge.xyz"
    with file.open("wb") as handle:
        handle.truncate(21_000_000)
    with pytest.raises(Unreadable, match="has 21 MB; at most 20 MB are read"):
        read_file(file)


@pytest.mark.parametrize("encoding", ["utf-8", "utf-8-sig", "utf-16", "latin-1"])
def test_encodings_change_at_most_a_title(tmp_path, encoding):
    file = tmp_path / "two.xyz"
    file.write_bytes(("1\nhélium\nHe 0 0 0\n" * 2).encode(encoding))
    assert [species.name for species in read_file(file)] == ["hélium 1", "hélium 2"]


def test_content_decides_where_the_suffix_is_wrong_or_unknown(tmp_path):
    for name in ("lines.xyz", "lines.txt", "lines.mol"):
        (tmp_path / name).write_text(WATER)
        assert read_file(tmp_path / name)[0].formula == "H2O"


def test_a_known_suffix_is_never_taken_for_smiles(tmp_path):
    (tmp_path / "short.xyz").write_text("CCO\n")
    with pytest.raises(
        Unreadable, match=r"short\.xyz: line 1: the number of atoms should stand here, not 'CCO'"
    ):
        read_file(tmp_path / "short.xyz")


def test_an_unknown_suffix_cannot_be_written():
    (water,) = read_text(WATER)
    with pytest.raises(PlumbruleError, match=r"'\.pdb' is not a format that can be written; \.xyz, \.mol"):
        write(water, ".pdb")


def test_every_format_file_is_in_the_one_list():
    from pathlib import Path

    from plumbrule_core.geometry import reading

    folder = Path(reading.__file__).parent
    formats = {file.stem for file in folder.glob("*.py") if "\ndef recognises(" in file.read_text()}
    assert formats == {known.__name__.rpartition(".")[2] for known in reading.FORMATS}
