"""What is written is read back to the format's precision; what is damaged is read or refused in words."""

import contextlib

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from plumbrule_core.documents.species import Atom, Species
from plumbrule_core.elements import ELEMENTS
from plumbrule_core.errors import Unreadable
from plumbrule_core.geometry import read_file, read_text, write

HALF_OF_LAST_DIGIT = {".xyz": 5.01e-9, ".cml": 5.01e-9, ".mol": 5.01e-5, ".json": 1e-9}

places = st.floats(min_value=-9999.9, max_value=9999.9)
near = st.floats(min_value=-3, max_value=3)
atoms = st.builds(Atom, symbol=st.sampled_from(list(ELEMENTS)), x=near | places, y=near, z=near)
species_of = st.builds(
    Species,
    name=st.text(min_size=1, max_size=80),
    atoms=st.lists(atoms, min_size=1, max_size=8).map(tuple),
    charge=st.integers(-15, 15),
    multiplicity=st.integers(1, 40),
)
quick = settings(max_examples=60, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])


@pytest.mark.parametrize("suffix", list(HALF_OF_LAST_DIGIT))
@quick
@given(species=species_of)
def test_a_species_comes_back_as_it_was_written(suffix, species):
    (again,) = read_text(write(species, suffix))
    assert (again.charge, again.multiplicity) == (species.charge, species.multiplicity)
    assert [a.symbol for a in again.atoms] == [a.symbol for a in species.atoms]
    for ours, theirs in zip(species.atoms, again.atoms, strict=True):
        for axis in ("x", "y", "z"):
            assert abs(getattr(ours, axis) - getattr(theirs, axis)) <= HALF_OF_LAST_DIGIT[suffix]


@pytest.mark.parametrize("suffix", [".xyz", ".cml", ".json"])
@pytest.mark.parametrize("edge", [1e4, -1e4])
def test_the_farthest_coordinate_comes_back(suffix, edge):
    species = Species(name="far", atoms=(Atom(symbol="He", x=edge, y=0.0, z=-0.0),))
    assert read_text(write(species, suffix))[0].atoms[0].x == edge


@pytest.mark.parametrize("suffix", [".cml", ".json"])
@quick
@given(name=st.text(min_size=1, max_size=80))
def test_a_printable_name_comes_back_from_formats_with_a_title(suffix, name):
    species = Species(name=name, atoms=(Atom(symbol="He", x=0.0, y=0.0, z=0.0),))
    again = read_text(write(species, suffix))[0].name
    expected = " ".join("".join(c if c.isprintable() else " " for c in name).split())
    assert again == (expected or "He")


def samples() -> list[tuple[str, bytes]]:
    """One file of each format, V3000 and an SDF of two included."""
    from rdkit import Chem
    from rdkit.Chem import AllChem

    water = Species(
        name="water",
        atoms=tuple(
            Atom(symbol=s, x=0.0, y=y, z=z)
            for s, y, z in [("O", 0, 0.1), ("H", 0.7, -0.4), ("H", -0.7, -0.4)]
        ),
    )
    files = [(suffix, write(water, suffix)) for suffix in HALF_OF_LAST_DIGIT]
    molecule = Chem.AddHs(Chem.MolFromSmiles("C[O-]"))
    AllChem.EmbedMolecule(molecule, randomSeed=7)
    files.append((".mol", Chem.MolToMolBlock(molecule, forceV3000=True)))
    flat = Chem.MolFromSmiles("C[CH]C=O")
    AllChem.Compute2DCoords(flat)
    files.append((".sdf", (Chem.MolToMolBlock(flat) + "$$$$\n") * 2))
    files.append((".txt", "O 0 0 0.117\nH 0 0.757 -0.469\nH 0 -0.757 -0.469\n"))
    files.append((".smi", "CC(=O)[O-] acetate\n"))
    return [(suffix, text.encode()) for suffix, text in files]


def read_or_refused(path) -> None:
    """Reads, or is refused in words; any other exception is a fault of the reader."""
    try:
        found = read_file(path)
    except Unreadable as error:
        refused = str(error)
    else:
        assert all(isinstance(species, Species) for species in found)
        return
    assert refused.startswith(f"{path.name}: ")


@pytest.mark.parametrize(
    ("suffix", "data"), samples(), ids=lambda value: value if isinstance(value, str) else ""
)
def test_a_file_cut_short_anywhere_is_read_or_refused(tmp_path, suffix, data):
    path = tmp_path / f"cut{suffix}"
    for length in range(0, len(data), max(1, len(data) // 60)):
        path.write_bytes(data[:length])
        read_or_refused(path)


@pytest.mark.parametrize(
    ("suffix", "data"), samples(), ids=lambda value: value if isinstance(value, str) else ""
)
@quick
@given(flips=st.lists(st.tuples(st.integers(0, 10_000), st.integers(0, 255)), min_size=1, max_size=6))
def test_a_file_with_wrong_bytes_is_read_or_refused(tmp_path, suffix, data, flips):
    damaged = bytearray(data)
    for place, value in flips:
        damaged[place % len(damaged)] = value
    path = tmp_path / f"wrong{suffix}"
    path.write_bytes(bytes(damaged))
    read_or_refused(path)


@pytest.mark.timeout(20)
@pytest.mark.parametrize(
    "text",
    [
        "1" * 3_000_000 + "a 0 0 0",
        "1\n" + "a" * 3_000_000 + "\nHe 0 0 0",
        "1\ncharge=" + "1" * 3_000_000 + "\nHe 0 0 0",
        "He 0 0 " + "1" * 3_000_000,
        "C" * 3_000_000,
        "\n" * 3_000_000 + "V2000",
        "<" * 3_000_000,
        "[" * 3_000_000,
        '{"symbols":' + "[" * 3_000_000,
    ],
    ids=range(9),
)
def test_a_monstrous_line_is_dealt_with_at_once(text):
    with contextlib.suppress(Unreadable):
        assert read_text(text)


@quick
@given(text=st.text(max_size=200))
def test_any_pasted_text_is_read_or_refused(text):
    with contextlib.suppress(Unreadable):
        assert read_text(text)


@quick
@given(
    lines=st.lists(
        st.sampled_from(
            ["1", "2", "", "H 0 0 0", "charge=1", "M  END", "V2000", "{", "<a/>", "C 1 1", "$$$$", "9 9 9 9"]
        ),
        max_size=8,
    )
)
def test_any_shuffle_of_likely_lines_is_read_or_refused(lines):
    with contextlib.suppress(Unreadable):
        assert read_text("\n".join(lines))
