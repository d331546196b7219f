"""Molfile and SDF (V2000 and V3000): checked line by line here, then understood by RDKit.

The comment line may state `charge=0 multiplicity=3`, which says more than radical marks can. A flat drawing
is built in three dimensions; the origin says so.
"""

import re
from collections.abc import Sequence
from dataclasses import replace
from typing import Any

from plumbrule_core.errors import Unreadable
from plumbrule_core.geometry.building import (
    atoms_of,
    build,
    check_elements,
    isotopes_left_out,
    library_refusals,
    multiplicity_of,
    sanitised,
)
from plumbrule_core.geometry.draft import Draft, Faulty, isotope_notes
from plumbrule_core.geometry.molfile_checks import COUNTS_LINE, labels_of
from plumbrule_core.geometry.molfile_writing import write as write
from plumbrule_core.geometry.stated import one_line, stated

SUFFIXES = (".mol", ".sdf")
NAME = "molfile"
END_OF_RECORD = "$$$$"


def recognises(text: str) -> bool:
    """Whether a counts line or the end mark of a record is there."""
    return re.search(r"(?m)^[ \d]{6}.*V[23]000\s*$|^M  END\s*$", text) is not None


def read(text: str) -> tuple[Draft, ...]:
    """One species a record; raises Unreadable with every faulty line."""
    faults = Faulty()
    drafts: list[Draft] = []
    for start, lines in _records(text):
        known = len(faults.said)
        labels = labels_of(lines, start, faults)
        said = _stated(lines, start, faults)
        if len(faults.said) == known:
            drafts.append(_draft(lines, labels, said, start))
    faults.refuse()
    return tuple(drafts)


def _records(text: str) -> list[tuple[int, list[str]]]:
    """Each record with the number of its first line, its counts line in fourth place."""
    lines = text.split("\n")
    ends = [at for at, line in enumerate(lines) if line.startswith(END_OF_RECORD)] + [len(lines)]
    starts = [0, *(end + 1 for end in ends[:-1])]
    records = [(start, lines[start:end]) for start, end in zip(starts, ends, strict=True)]
    return [_aligned(start + 1, record) for start, record in records if any(line.strip() for line in record)]


def _aligned(start: int, lines: list[str]) -> tuple[int, list[str]]:
    """Blank lines lost or gained above the counts line in pasting are put right."""
    place = next((at for at, line in enumerate(lines) if re.search(r"V[23]000\s*$", line)), COUNTS_LINE)
    if place < COUNTS_LINE:
        return start - (COUNTS_LINE - place), [""] * (COUNTS_LINE - place) + lines
    spare = place - COUNTS_LINE
    if spare and not any(line.strip() for line in lines[:spare]):
        return start + spare, lines[spare:]
    return start, lines


def _stated(lines: Sequence[str], start: int, faults: Faulty) -> dict[str, int]:
    try:
        return stated(lines[2]) if len(lines) > 2 else {}
    except ValueError as error:
        faults.add(start + 2, str(error))
        return {}


def _draft(lines: list[str], labels: list[str], said: dict[str, int], start: int) -> Draft:
    from rdkit import Chem

    with library_refusals(f"line {start}: in the record that starts here"):
        molecule = Chem.MolFromMolBlock("\n".join(lines) + "\n", sanitize=False, removeHs=False)
        if molecule is None or molecule.GetNumAtoms() != len(labels):
            raise Unreadable("bonds or properties cannot be read")
        check_elements(molecule)
        draft = _understood(molecule, lines)
    isotopes = isotope_notes(labels) or isotopes_left_out(molecule)
    draft = replace(draft, title=one_line(lines[0]), notes=isotopes + draft.notes)
    return _with_statement(draft, said, start + 2)


def _understood(molecule: Any, lines: Sequence[str]) -> Draft:
    from rdkit import Chem

    multiplicity = _multiplicity(molecule, lines)
    molecule.UpdatePropertyCache(strict=False)
    implied = sum(atom.GetTotalNumHs() for atom in molecule.GetAtoms())
    if _is_drawing(molecule, lines[1], implied):
        built = build(sanitised(molecule))
        return replace(built, multiplicity=multiplicity, notes=("a flat drawing, built in 3-D", *built.notes))
    notes: tuple[str, ...] = ()
    if implied and molecule.GetNumAtoms() > 1 and not any(a.GetAtomicNum() == 1 for a in molecule.GetAtoms()):
        molecule = Chem.AddHs(sanitised(molecule), addCoords=True)
        notes = (f"{implied} hydrogens added that its valences imply",)
    return Draft(
        atoms=atoms_of(molecule),
        charge=Chem.GetFormalCharge(molecule),
        multiplicity=multiplicity,
        notes=notes,
    )


def _is_drawing(molecule: Any, header: str, implied: int) -> bool:
    """Whether every z is zero, and the file is marked 2D, or not marked and hydrogens are left out."""
    mark = header[20:22].upper()
    if mark == "3D" or bool((molecule.GetConformer().GetPositions()[:, 2] != 0).any()):
        return False
    return mark == "2D" or (implied > 0 and molecule.GetNumAtoms() > 1)


def _multiplicity(molecule: Any, lines: Sequence[str]) -> int | None:
    """From radical marks, for RDKit gives paired and unpaired centres the same two electrons."""
    marks = [
        int(mark)
        for line in lines
        for mark in (
            re.findall(r"\s\d+\s+([123])(?=\s|$)", line[9:])
            if line.startswith("M  RAD")
            else re.findall(r"\sRAD=([123])\b", line)
            if line.startswith("M  V30")
            else []
        )
    ]
    if marks:
        return 1 + sum(mark - 1 for mark in marks)
    return multiplicity_of(molecule)


def _with_statement(draft: Draft, said: dict[str, int], line: int) -> Draft:
    charge = said.get("charge", draft.charge)
    if draft.charge and charge != draft.charge:
        raise Unreadable(
            f"line {line}: says charge={charge}, but the charges of its atoms add up to {draft.charge}"
        )
    multiplicity = said.get("multiplicity", draft.multiplicity)
    if draft.multiplicity and multiplicity != draft.multiplicity:
        raise Unreadable(
            f"line {line}: says multiplicity={multiplicity}, but its radical marks give {draft.multiplicity}"
        )
    return replace(draft, charge=charge, multiplicity=multiplicity)
