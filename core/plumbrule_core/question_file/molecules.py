"""One `[species.NAME]` table: where the atoms come from, charge and multiplicity."""

import json
from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import Annotated, Any

from pydantic import Field, ValidationError

from plumbrule_core import geometry
from plumbrule_core.documents.base import Document
from plumbrule_core.documents.faults import Fault, faults_of
from plumbrule_core.documents.ground_states import ground_multiplicity
from plumbrule_core.documents.species import Atom, Species
from plumbrule_core.errors import Refused, Unreadable
from plumbrule_core.geometry import atom_lines, xyz

SOURCES = ("geometry", "xyz", "smiles")


class SpeciesTable(Document):
    """The keys of a species: exactly one of `geometry` (a file), `xyz` (atom lines), `smiles`."""

    geometry: Annotated[str, Field(min_length=1, max_length=1000)] | None = None
    xyz: Annotated[str, Field(min_length=1)] | None = None
    smiles: Annotated[str, Field(min_length=1, max_length=1000)] | None = None
    charge: int | None = None
    multiplicity: int | None = None
    origin: Annotated[str, Field(max_length=1000)] | None = None


def read_species(name: str, data: Any, folder: Path) -> Species:
    """The species of one table; raises Refused with all that is wrong with it."""
    where = f"species.{name}"
    table = _validated(data, where)
    source = next(key for key in SOURCES if getattr(table, key) is not None)
    try:
        read = _molecules(table, name, folder)
    except Unreadable as error:
        lines = str(error).split("\n")
        raise Refused(tuple(Fault(where=f"{where}.{source}", says=line) for line in lines)) from None
    if len(read) != 1:
        says = f"holds {len(read)} molecules; a species is one, so give each a file of its own"
        raise _refused(f"{where}.{source}", says)
    return _named(read[0], name, table)


def _validated(data: Any, where: str) -> SpeciesTable:
    if not isinstance(data, dict):
        raise _refused(where, "must be a table")
    faults = _source_faults(data, where)
    try:
        table = SpeciesTable.model_validate_json(json.dumps(data))
    except ValidationError as error:
        raise Refused((*faults, *faults_of(error, where))) from None
    if faults:
        raise Refused(faults)
    return table


def _source_faults(data: Mapping[str, Any], where: str) -> tuple[Fault, ...]:
    given = [key for key in SOURCES if key in data]
    if len(given) == 1:
        return ()
    there = f"there is {' and '.join(given)}" if given else "there is none of them"
    return (Fault(where=where, says=f"give exactly one of geometry, xyz and smiles; {there}"),)


def _molecules(table: SpeciesTable, name: str, folder: Path) -> tuple[Species, ...]:
    """What the source holds; where it states no multiplicity, the proposal fits the charge of the table."""

    def propose(atoms: Sequence[Atom], charge: int) -> int:
        return ground_multiplicity(atoms, charge if table.charge is None else table.charge)

    if table.geometry is not None:
        return geometry.read_file(folder / table.geometry, propose)
    if table.smiles is not None:
        return (geometry.from_smiles(table.smiles, name),)
    lines = table.xyz or ""
    if not (xyz.recognises(lines) or atom_lines.recognises(lines)):
        raise Unreadable(
            "holds no atom line; a line is an element and three places in angstrom: O 0.0 0.0 0.117"
        )
    return geometry.read_text(lines, name, propose)


def _named(read: Species, name: str, table: SpeciesTable) -> Species:
    charge = read.charge if table.charge is None else table.charge
    multiplicity = read.multiplicity if table.multiplicity is None else table.multiplicity
    data = {
        **read.to_data(),
        "name": name,
        "charge": charge,
        "multiplicity": multiplicity,
        "origin": _origin(read, table),
    }
    try:
        return Species.from_data(data)
    except ValidationError as error:
        raise Refused(faults_of(error, f"species.{name}")) from None


def _origin(read: Species, table: SpeciesTable) -> str:
    if table.origin is not None:
        return table.origin
    return "given in the question file" if table.xyz is not None else read.origin


def _refused(where: str, says: str) -> Refused:
    return Refused((Fault(where=where, says=says),))
