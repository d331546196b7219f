"""One `[species.NAME]` table: where the atoms come from, charge and multiplicity."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Annotated, Any

from pydantic import Field, ValidationError

from plumbrule_core import geometry
from plumbrule_core.documents.base import Document
from plumbrule_core.documents.faults import Fault, faults_of
from plumbrule_core.documents.ground_states import ground_multiplicity
from plumbrule_core.documents.species import Atom, Species
from plumbrule_core.errors import Unreadable
from plumbrule_core.geometry import atom_lines, xyz
from plumbrule_core.geometry.reading import Propose
from plumbrule_core.question_file.tables import read_table

SOURCES = ("geometry", "xyz", "smiles")


class SpeciesTable(Document):
    """The keys of a species: exactly one of `geometry` (a file), `xyz` (atom lines), `smiles`."""

    geometry: Annotated[str, Field(min_length=1, max_length=1000)] | None = None
    xyz: Annotated[str, Field(min_length=1)] | None = None
    smiles: Annotated[str, Field(min_length=1, max_length=1000)] | None = None
    charge: int | None = None
    multiplicity: int | None = None
    origin: Annotated[str, Field(max_length=1000)] | None = None


@dataclass(frozen=True, slots=True)
class ReadSpecies:
    """A species, or None where it could not be read, with all that is wrong with its table."""

    species: Species | None = None
    faults: tuple[Fault, ...] = ()


def read_species(name: str, data: Any, folder: Path) -> ReadSpecies:
    """The species of one table; every source is read, so that no fault hides another."""
    where = f"species.{name}"
    if not isinstance(data, dict):
        return ReadSpecies(faults=(Fault(where=where, says="must be a table"),))
    read = read_table(SpeciesTable, data, where)
    faults = [*_source_faults(data, where), *read.faults]
    table = read.value or SpeciesTable()
    found = []
    for source in SOURCES:
        if getattr(table, source) is not None:
            try:
                found.append(_molecule(source, table, name, folder))
            except Unreadable as error:
                faults += [Fault(where=f"{where}.{source}", says=line) for line in str(error).split("\n")]
    if len(found) != 1 or read.spoilt:
        return ReadSpecies(faults=tuple(faults))
    try:
        species = _named(found[0], name, table)
    except ValidationError as error:
        return ReadSpecies(faults=(*faults, *faults_of(error, where)))
    return ReadSpecies(species, (*faults, *species.faults()))


def _source_faults(data: Mapping[str, Any], where: str) -> tuple[Fault, ...]:
    given = [key for key in SOURCES if key in data]
    if len(given) == 1:
        return ()
    there = f"there is {' and '.join(given)}" if given else "there is none of them"
    return (Fault(where=where, says=f"give exactly one of geometry, xyz and smiles; {there}"),)


def _molecule(source: str, table: SpeciesTable, name: str, folder: Path) -> Species:
    """What the source holds; where nobody states a multiplicity, the proposal is marked as assumed."""
    assumed = []

    def propose(atoms: Sequence[Atom], charge: int) -> int:
        assumed.append(True)
        return ground_multiplicity(atoms, charge if table.charge is None else table.charge)

    read = _molecules(source, table, name, folder, propose)
    if len(read) != 1:
        raise Unreadable(f"holds {len(read)} molecules; a species is one, so give each a file of its own")
    given = table.multiplicity is not None or (source != "smiles" and not assumed)
    taken = None if given else read[0].multiplicity
    return read[0].model_copy(update={"assumed_multiplicity": taken})


def _molecules(
    source: str, table: SpeciesTable, name: str, folder: Path, propose: Propose
) -> tuple[Species, ...]:
    if source == "geometry":
        return geometry.read_file(folder / (table.geometry or ""), propose)
    if source == "smiles":
        return (geometry.from_smiles(table.smiles or "", name),)
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
    return Species.from_data(data)


def _origin(read: Species, table: SpeciesTable) -> str:
    if table.origin is not None:
        return table.origin
    return "given in the question file" if table.xyz is not None else read.origin
