"""Writing a molfile (V2000): bonds by distance, bond orders by RDKit where it finds consistent ones."""

from collections.abc import Iterator, Sequence
from typing import Any

from plumbrule_core.documents.bonding import Bond, bonds, distance
from plumbrule_core.documents.species import Species
from plumbrule_core.elements import ELEMENTS
from plumbrule_core.errors import PlumbruleError
from plumbrule_core.geometry.shape import CLASH_DISTANCE
from plumbrule_core.geometry.stated import comment_for, one_line
from plumbrule_core.geometry.valence import neighbours, spare_valences

LARGEST = 9999.9999
"""Angstrom; the format gives a coordinate ten characters, four of them decimals."""
MOST_TO_ORDER = 100
"""Atoms; the search for bond orders grows fast with size."""
ORDER_STEPS = 1000
LARGEST_MARK = 15
"""The format's largest charge on one atom."""
MARKS_PER_LINE = 8
NO_BONDS = 15
"""The format's mark for an atom with a valence of zero."""


def write(species: Species) -> str:
    """One record, coordinates in angstrom to four decimals; raises PlumbruleError where they do not fit."""
    if any(abs(value) > LARGEST for a in species.atoms for value in (a.x, a.y, a.z)):
        raise PlumbruleError(f"{species.name} has coordinates beyond 9999 angstrom; write it as .xyz instead")
    links = _links(species)
    orders, charges = _orders(species, links) or ([1] * len(links), _spread_charge(species))
    valences = [0] * len(species.atoms)
    for (i, j), order in zip(links, orders, strict=True):
        valences[i] += order
        valences[j] += order
    lines = [
        one_line(species.name)[:80],
        " " * 20 + "3D",
        comment_for(species.charge, species.multiplicity, ""),
        f"{len(species.atoms):3d}{len(links):3d}  0  0  0  0  0  0  0  0999 V2000",
        *(
            f"{a.x:10.4f}{a.y:10.4f}{a.z:10.4f} {a.symbol:<3} 0  0  0  0  0{mark:3d}  0  0  0  0  0  0"
            for a, mark in zip(species.atoms, map(_valence_mark, valences), strict=True)
        ),
        *(f"{i + 1:3d}{j + 1:3d}{order:3d}  0" for (i, j), order in zip(links, orders, strict=True)),
        *_marks("M  CHG", charges),
        *_marks("M  RAD", _radicals(species)),
        "M  END",
        "",
    ]
    return "\n".join(lines)


def _links(species: Species) -> tuple[Bond, ...]:
    """The bonds, but none between atoms that stand in one place, which no reader can take."""
    atoms = species.atoms
    return tuple((i, j) for i, j in bonds(atoms) if distance(atoms[i], atoms[j]) > CLASH_DISTANCE)


def _valence_mark(total: int) -> int:
    """The total valence, so that no reader adds hydrogens; left open where the format has no room for it."""
    return total if 0 < total < NO_BONDS else (NO_BONDS if total == 0 else 0)


def _orders(species: Species, links: Sequence[Bond]) -> tuple[list[int], list[int]] | None:
    """Bond orders and charges of the atoms for an ordinary closed-shell molecule; None for anything else."""
    ordinary = not any(ELEMENTS[a.symbol].is_transition_metal for a in species.atoms)
    if not links or species.multiplicity != 1 or len(species.atoms) > MOST_TO_ORDER or not ordinary:
        return None
    molecule = _ordered(species, links)
    if molecule is None:
        return None
    charges = [atom.GetFormalCharge() for atom in molecule.GetAtoms()]
    found = [int(molecule.GetBondBetweenAtoms(i, j).GetBondTypeAsDouble()) for i, j in links]
    return (found, charges) if sum(charges) == species.charge else None


def _ordered(species: Species, links: Sequence[Bond]) -> Any | None:
    from rdkit import Chem, rdBase
    from rdkit.Chem import rdDetermineBonds

    molecule = Chem.RWMol()
    for atom in species.atoms:
        molecule.AddAtom(Chem.Atom(atom.symbol))
    for i, j in links:
        molecule.AddBond(i, j, Chem.BondType.SINGLE)
    with rdBase.BlockLogs():
        try:
            rdDetermineBonds.DetermineBondOrders(
                molecule, charge=species.charge, embedChiral=False, maxIterations=ORDER_STEPS
            )
            Chem.Kekulize(molecule, clearAromaticFlags=True)
        except (RuntimeError, ValueError):
            return None
    return molecule


def _spread_charge(species: Species) -> list[int]:
    left, charges = species.charge, []
    for _ in species.atoms:
        part = max(-LARGEST_MARK, min(LARGEST_MARK, left))
        charges.append(part)
        left -= part
    return charges


def _radicals(species: Species) -> list[int]:
    """A mark of one unpaired electron (2) on the atoms that lack most bonds; none with too few atoms."""
    if species.unpaired > len(species.atoms):
        return [0] * len(species.atoms)
    spare = spare_valences(species.atoms, neighbours(len(species.atoms), bonds(species.atoms)))
    chosen = sorted(range(len(spare)), key=lambda at: -spare[at])[: species.unpaired]
    return [2 if at in chosen else 0 for at in range(len(spare))]


def _marks(head: str, values: Sequence[int]) -> Iterator[str]:
    marked = [(number, value) for number, value in enumerate(values, start=1) if value]
    for at in range(0, len(marked), MARKS_PER_LINE):
        row = marked[at : at + MARKS_PER_LINE]
        yield f"{head}{len(row):3d}" + "".join(f" {number:3d} {value:3d}" for number, value in row)
