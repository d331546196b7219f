"""Measures of shape: silent on ordinary molecules, loud on the cases that need a look before a run."""

import math

import pytest

from plumbrule_core.documents.species import Atom, Species
from plumbrule_core.geometry import from_smiles, read_text
from plumbrule_core.geometry.shape import (
    clashes,
    in_bohr_as_angstrom,
    looks_like_bohr,
    stretched_bonds,
    twisted_double_bonds,
)
from plumbrule_core.units import ANGSTROM_PER_BOHR

ORDINARY = [
    "O",
    "OO",
    "O=O",
    "N#N",
    "[C-]#[O+]",
    "FF",
    "[H][H]",
    "C=C",
    "C#C",
    "C=C=C",
    "C=CC=C",
    "C#CC#C",
    "c1ccccc1",
    "c1ccc2ccccc2c1",
    "c1ccc(cc1)c1ccccc1",
    "C1=CC=C1",
    "C1CC1",
    "C1CCC1",
    "CC(=O)NC",
    "CC(=O)[O-]",
    "C[NH3+]",
    "O=S=O",
    "CS(C)(=O)=O",
    "OS(O)(=O)=O",
    "OP(O)(O)=O",
    "[O-][N+](=O)[O-]",
    "[O-][N+](=O)[N+](=O)[O-]",
    "[O-][O+]=O",
    "O=C=O",
    "N#CC#N",
    "C/N=N/C",
    "c1ccccc1/N=N/c1ccccc1",
    "C[CH2]",
    "CO[O]",
    "[CH2]C=C",
    "FB(F)F",
    "FS(F)(F)(F)(F)F",
    "O.O",
    "O.[OH-]",
    "[Na+].[Cl-]",
    "Clc1ccccc1Cl",
    "OC(=O)C=C",
]


def stretched_to(factor: float, species: Species) -> Species:
    """All coordinates times a factor."""
    atoms = tuple(
        Atom(symbol=a.symbol, x=a.x * factor, y=a.y * factor, z=a.z * factor) for a in species.atoms
    )
    return Species(name="scaled", atoms=atoms, charge=species.charge, multiplicity=species.multiplicity)


def diatomic(first: str, second: str, length: float) -> Species:
    return read_text(f"{first} 0 0 0\n{second} 0 0 {length}\n")[0]


def ethylene(twist: float, length: float = 1.339) -> Species:
    """Ethylene with one end turned; r(CH) 1.086 angstrom, HCC 121.2 degrees (NIST CCCBDB, from memory)."""
    rows = [f"C 0 0 {-length / 2}", f"C 0 0 {length / 2}"]
    out, along = 1.086 * math.sin(math.radians(121.2)), -1.086 * math.cos(math.radians(121.2))
    for side in (1, -1):
        rows.append(f"H {side * out} 0 {-length / 2 - along}")
        turn = math.radians(twist)
        rows.append(f"H {side * out * math.cos(turn)} {side * out * math.sin(turn)} {length / 2 + along}")
    return read_text("\n".join(rows))[0]


@pytest.mark.parametrize("smiles", ORDINARY)
def test_nothing_is_said_about_an_ordinary_molecule(smiles):
    species = from_smiles(smiles)
    assert clashes(species) == ()
    assert stretched_bonds(species) == ()
    assert twisted_double_bonds(species) == ()
    assert not looks_like_bohr(species)


@pytest.mark.parametrize("smiles", [s for s in ORDINARY if s != "[Na+].[Cl-]"])
def test_numbers_in_bohr_taken_for_angstrom_are_seen_and_put_right(smiles):
    species = from_smiles(smiles)
    wrong = stretched_to(1 / ANGSTROM_PER_BOHR, species)
    assert looks_like_bohr(wrong)
    mended = in_bohr_as_angstrom(wrong)
    assert mended.origin.endswith("taken as bohr, converted to angstrom")
    assert not looks_like_bohr(mended)
    assert mended.atoms[0].x == pytest.approx(species.atoms[0].x, abs=1e-12)


def test_a_lone_atom_and_far_apart_pieces_do_not_look_like_bohr():
    assert not looks_like_bohr(from_smiles("[He]"))
    assert not looks_like_bohr(diatomic("He", "He", 2.97))


# Huber and Herzberg 1979 (H2, HF), Bondybey and English 1983 (Cr2); angstrom, from memory
@pytest.mark.parametrize(
    ("first", "second", "length"), [("H", "H", 0.741), ("H", "F", 0.917), ("Cr", "Cr", 1.679)]
)
def test_the_shortest_bonds_known_are_no_clash(first, second, length):
    assert clashes(diatomic(first, second, length)) == ()


@pytest.mark.parametrize(
    ("first", "second", "length"), [("H", "H", 0.39), ("C", "C", 0.7), ("I", "H", 0.7), ("O", "O", 0)]
)
def test_atoms_that_lie_in_one_another_are_a_clash(first, second, length):
    (pair,) = clashes(diatomic(first, second, length))
    assert (pair.first, pair.second, pair.distance) == (0, 1, pytest.approx(length))


def test_stretched_nitrogen_is_measured_against_its_triple_bond():
    assert stretched_bonds(diatomic("N", "N", 1.0977)) == ()
    assert stretched_bonds(diatomic("N", "N", 1.45)) == ()
    (pair,) = stretched_bonds(diatomic("N", "N", 2.0))
    # triple-bond radius of N 0.54 angstrom, Pyykkö, Riedel and Patzschke 2005
    assert pair.share == pytest.approx(2.0 / 1.08, abs=0.01)
    assert stretched_bonds(diatomic("N", "N", 6.0)) == ()


@pytest.mark.parametrize(
    ("first", "second", "length"),
    [("F", "F", 2.0), ("H", "H", 1.1), ("H", "F", 1.7), ("Ni", "O", 2.8), ("C", "O", 1.8), ("Li", "H", 2.8)],
)
def test_a_stretched_diatomic_is_a_stretched_bond(first, second, length):
    assert [(p.first, p.second) for p in stretched_bonds(diatomic(first, second, length))] == [(0, 1)]


@pytest.mark.parametrize(
    ("smiles", "bond"), [("CC", (0, 1)), ("C=C", (0, 1)), ("OO", (0, 1)), ("CO", (0, 1)), ("C#N", (0, 1))]
)
@pytest.mark.parametrize("factor", [1.5, 1.9])
def test_one_bond_pulled_apart_is_the_one_that_is_named(smiles, bond, factor):
    species = from_smiles(smiles)
    moved = pulled(species, bond, factor)
    assert [(p.first, p.second) for p in stretched_bonds(moved)] == [bond]


def pulled(species: Species, bond: tuple[int, int], factor: float) -> Species:
    """The species with the part beyond one bond moved along it until the bond is `factor` times as long."""
    from plumbrule_core.documents.bonding import bonds, pieces

    links = [link for link in bonds(species.atoms) if link != bond]
    far = next(piece for piece in pieces(len(species.atoms), links) if bond[1] in piece)
    a, b = (species.atoms[at] for at in bond)
    shift = [(factor - 1) * (end - start) for start, end in ((a.x, b.x), (a.y, b.y), (a.z, b.z))]
    atoms = tuple(
        Atom(symbol=x.symbol, x=x.x + shift[0], y=x.y + shift[1], z=x.z + shift[2]) if at in far else x
        for at, x in enumerate(species.atoms)
    )
    return Species(name="pulled", atoms=atoms)


def test_an_opened_ring_is_a_stretched_bond():
    # trimethylene: cyclopropane with one C-C bond opened
    ring = from_smiles("C1CC1")
    carbons = [ring.atoms[at] for at in range(3)]
    assert stretched_bonds(ring) == ()
    text = "C -1.25 0 0\nC 0 0.85 0\nC 1.25 0 0\nH 0 1.5 0.88\nH 0 1.5 -0.88\n"
    text += "".join(f"H {side * 1.8} -0.3 {z}\n" for side in (1, -1) for z in (0.9, -0.9))
    assert len(carbons) == 3
    assert [(p.first, p.second) for p in stretched_bonds(read_text(text)[0])] == [(0, 2)]


CARBONYL = "Cr 0 0 0\n" + "".join(
    f"C {1.92 * x} {1.92 * y} {1.92 * z}\nO {3.07 * x} {3.07 * y} {3.07 * z}\n"
    for x, y, z in [(1, 0, 0), (-1, 0, 0), (0, 1, 0), (0, -1, 0), (0, 0, 1), (0, 0, -1)]
)
DIBORANE = (
    "B 0 0 0.885\nB 0 0 -0.885\nH 0 0.98 0\nH 0 -0.98 0\n"
    "H 1.04 0 1.45\nH -1.04 0 1.45\nH 1.04 0 -1.45\nH -1.04 0 -1.45\n"
)
SYMMETRIC_SADDLES = [
    "H 0 0 0\nH 0 0 0.93\nH 0 0 -0.93\n",
    "Cl 0 0 2.32\nC 0 0 0\nCl 0 0 -2.32\nH 1.07 0 0\nH -0.535 0.927 0\nH -0.535 -0.927 0\n",
]


@pytest.mark.parametrize("text", [CARBONYL, DIBORANE, *SYMMETRIC_SADDLES])
def test_carbonyls_bridges_and_saddle_points_have_no_stretched_bond(text):
    # Cr(CO)6, B2H6, H + H2 and Cl- + CH3Cl at about their published geometries, from memory
    assert stretched_bonds(read_text(text)[0]) == ()


def test_the_two_halves_of_a_nitric_oxide_dimer_are_held_by_a_stretched_bond():
    dimer = read_text("N 0 0 0\nN 0 0 2.24\nO 1.14 0 -0.16\nO 1.14 0 2.40\n")[0]
    assert [(p.first, p.second) for p in stretched_bonds(dimer)] == [(0, 1)]


def test_a_hydrogen_bond_is_no_stretched_bond():
    # water dimer of the S22 set, Jurecka, Sponer, Cerny and Hobza 2006
    dimer = read_text(
        "O -1.551007 -0.114520 0.0\nH -1.934259 0.762503 0.0\nH -0.599677 0.040712 0.0\n"
        "O 1.350625 0.111469 0.0\nH 1.680398 -0.373741 -0.758561\nH 1.680398 -0.373741 0.758561\n"
    )[0]
    assert stretched_bonds(dimer) == ()
    assert not looks_like_bohr(dimer)


@pytest.mark.parametrize("twist", [0, 10, 25, 180, 155])
def test_a_double_bond_twisted_by_less_than_thirty_degrees_is_left_alone(twist):
    assert twisted_double_bonds(ethylene(twist)) == ()


@pytest.mark.parametrize(("twist", "angle"), [(35, 35), (60, 60), (90, 90), (120, 60), (145, 35)])
def test_a_twisted_double_bond_is_named_with_its_angle(twist, angle):
    (found,) = twisted_double_bonds(ethylene(twist))
    assert (found.first, found.second) == (0, 1)
    assert found.angle == pytest.approx(angle, abs=0.01)


def test_twisted_ethylene_is_seen_after_its_bond_has_relaxed_to_a_single_one():
    # r(CC) 1.47 angstrom at 90 degrees (typical of published multireference optimisations, from memory)
    assert twisted_double_bonds(ethylene(90, length=1.47))[0].angle == pytest.approx(90, abs=0.01)


def test_a_twisted_nitrogen_double_bond_is_seen_and_an_untwisted_one_is_not():
    twisted = "N 0 0 -0.62\nN 0 0 0.62\nH 0.98 0 -0.95\nH 0 0.98 0.95\n"
    assert twisted_double_bonds(read_text(twisted)[0])[0].angle == pytest.approx(90, abs=0.01)
    assert twisted_double_bonds(read_text(twisted.replace("H 0 0.98", "H -0.98 0"))[0]) == ()


def test_rings_turned_about_a_single_bond_are_no_twisted_double_bond():
    biphenyl = from_smiles("Cc1ccccc1c1ccccc1C")
    assert twisted_double_bonds(biphenyl) == ()


def test_atoms_in_one_place_break_no_measure():
    heap = Species(
        name="heap", atoms=tuple(Atom(symbol=s, x=0.0, y=0.0, z=0.0) for s in ("C", "C", "H", "N"))
    )
    assert len(clashes(heap)) == 6
    assert stretched_bonds(heap) == ()
    assert twisted_double_bonds(heap) == ()
    assert not looks_like_bohr(heap)
