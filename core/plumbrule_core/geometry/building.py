"""Three-dimensional structures from connections alone, through RDKit and a force field."""

from collections.abc import Iterator
from contextlib import contextmanager
from typing import Any

from plumbrule_core.documents.species import Atom
from plumbrule_core.elements import ELEMENTS
from plumbrule_core.errors import Unreadable
from plumbrule_core.geometry.draft import Draft, check_size, in_range, symbol_of

SEED = 20250
"""The same connections give the same structure, every time."""
DECIMALS = 8
"""Coordinates are rounded to these, in angstrom."""
LONGEST_BUILD = 30
"""Seconds after which placing the atoms is given up."""
MOST_BUILT = 200
"""Atoms; a chain of 180 takes five seconds, beyond 300 placing them begins to fail (measured)."""
FORCE_FIELD_STEPS = 2000
PIECE_GAP = 3.0
"""Angstrom between unbonded pieces before the force field moves them; about a van der Waals contact."""
PROBLEMS = {
    "AtomValenceException": "has more bonds than it can have",
    "AtomKekulizeException": "is marked aromatic outside a ring",
    "KekulizeException": "stands in an aromatic ring to which no alternating bonds can be given",
}


@contextmanager
def library_refusals(where: str) -> Iterator[None]:
    """Keeps RDKit quiet, and turns whatever it or we refuse into Unreadable with `where` in front."""
    from rdkit import Chem, rdBase

    with rdBase.BlockLogs():
        try:
            yield
        except Unreadable as error:
            raise Unreadable(f"{where}: {error}") from None
        except (RuntimeError, Chem.MolSanitizeException):
            raise Unreadable(f"{where}: its bonds and marks contradict one another") from None


def sanitised(molecule: Any) -> Any:
    """The RDKit molecule checked for sense; raises Unreadable naming the atoms at fault."""
    from rdkit import Chem

    problems = Chem.DetectChemistryProblems(molecule)
    if problems:
        raise Unreadable("; ".join(dict.fromkeys(_problem(molecule, problem) for problem in problems)))
    Chem.SanitizeMol(molecule)
    return molecule


def build(molecule: Any, title: str = "") -> Draft:
    """A draft with hydrogens and coordinates for a sane RDKit molecule.

    Raises Unreadable where no structure can be found. Placed by distance geometry with a
    fixed seed, then relaxed with MMFF94, or UFF where that lacks parameters.
    """
    from rdkit import Chem

    check_elements(molecule)
    full = Chem.AddHs(molecule)
    _check_buildable(full.GetNumAtoms())
    placed = _side_by_side([_placed(piece) for piece in Chem.GetMolFrags(full, asMols=True)])
    relaxed = _relax(placed)
    notes = ("force field, not optimised" if relaxed else "placed by distances alone, not optimised",)
    return Draft(
        atoms=atoms_of(placed),
        charge=Chem.GetFormalCharge(placed),
        multiplicity=multiplicity_of(placed),
        title=title,
        notes=notes,
    )


def atoms_of(molecule: Any) -> tuple[Atom, ...]:
    """The atoms of an RDKit molecule in angstrom; raises Unreadable if one is too far out."""
    positions = molecule.GetConformer().GetPositions()
    try:
        return tuple(
            Atom(symbol=atom.GetSymbol(), x=x, y=y, z=z)
            for atom, place in zip(molecule.GetAtoms(), positions, strict=True)
            for x, y, z in [[in_range(round(float(value), DECIMALS)) for value in place]]
        )
    except ValueError as error:
        raise Unreadable(str(error)) from None


def multiplicity_of(molecule: Any) -> int | None:
    """High spin of the radical electrons; None (not stated) for a lone atom or where there are none."""
    radicals = sum(atom.GetNumRadicalElectrons() for atom in molecule.GetAtoms())
    return radicals + 1 if radicals and molecule.GetNumAtoms() > 1 else None


def isotopes_left_out(molecule: Any) -> tuple[str, ...]:
    """The note that an RDKit molecule had isotopes, where it had."""
    marked = any(atom.GetIsotope() for atom in molecule.GetAtoms())
    return ("its isotopes read as the common ones",) if marked else ()


def check_elements(molecule: Any) -> None:
    """Raise Unreadable where an atom of an RDKit molecule is no element up to radon."""
    wrong = []
    for number, atom in enumerate(molecule.GetAtoms(), start=1):
        if atom.GetSymbol() not in ELEMENTS or atom.GetAtomicNum() == 0:
            try:
                symbol_of(atom.GetSymbol())
            except ValueError as error:
                wrong.append(f"atom {number}: {error}")
    if wrong:
        raise Unreadable("; ".join(wrong))


def _check_buildable(atoms: int) -> None:
    check_size(atoms)
    if atoms > MOST_BUILT:
        raise Unreadable(
            f"{atoms} atoms are too many to build from connections alone (at most {MOST_BUILT}); "
            "give a file with coordinates instead"
        )


def _problem(molecule: Any, problem: Any) -> str:
    says = PROBLEMS.get(problem.GetType(), "cannot be as it is drawn")
    index = problem.GetAtomIdx() if hasattr(problem, "GetAtomIdx") else problem.GetAtomIndices()[0]
    return f"atom {index + 1} ({molecule.GetAtomWithIdx(index).GetSymbol()}) {says}"


def _placed(piece: Any) -> Any:
    from rdkit.Chem import rdDistGeom

    choices: Any = rdDistGeom.ETKDGv3()
    choices.randomSeed = SEED
    choices.timeout = LONGEST_BUILD
    for random_start in (False, True):
        choices.useRandomCoords = random_start
        try:
            if rdDistGeom.EmbedMolecule(piece, choices) == 0:
                return piece
        except RuntimeError:
            continue
    raise Unreadable(
        "no three-dimensional structure could be built from it; give a file with coordinates instead"
    )


def _side_by_side(pieces: list[Any]) -> Any:
    from rdkit import Chem
    from rdkit.Geometry import Point3D

    whole, edge = pieces[0], 0.0
    for number, piece in enumerate(pieces):
        spread = piece.GetConformer().GetPositions()[:, 0]
        shift = edge - spread.min()
        edge += spread.max() - spread.min() + PIECE_GAP
        whole = Chem.CombineMols(whole, piece, Point3D(float(shift), 0.0, 0.0)) if number else whole
        if number == 0:
            edge += spread.min()
    Chem.SanitizeMol(whole)
    return whole


def _relax(molecule: Any) -> bool:
    from rdkit.Chem import rdForceFieldHelpers as fields

    if molecule.GetNumAtoms() == 1:
        return True
    if fields.MMFFHasAllMoleculeParams(molecule):
        return fields.MMFFOptimizeMolecule(molecule, maxIters=FORCE_FIELD_STEPS) >= 0
    if fields.UFFHasAllMoleculeParams(molecule):
        return fields.UFFOptimizeMolecule(molecule, maxIters=FORCE_FIELD_STEPS) >= 0
    return False
