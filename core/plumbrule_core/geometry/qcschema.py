"""QCSchema molecules: JSON with symbols, a geometry in bohr, charge and multiplicity.

Schema: MolSSI QCSchema, `qcschema_molecule` version 2. A whole record that holds a `molecule` is read too.
"""

import json
from typing import Any

from plumbrule_core.documents.species import Atom, Species
from plumbrule_core.errors import Unreadable
from plumbrule_core.geometry.draft import Draft, Faulty, check_size, in_range, isotope_notes, symbol_of
from plumbrule_core.geometry.stated import one_line
from plumbrule_core.units import ANGSTROM_PER_BOHR

SUFFIXES = (".json",)
NAME = "QCSchema"
DECIMALS = 10
"""Coordinates are rounded here after conversion, far below any meaning, so that writing and reading agree."""


def recognises(text: str) -> bool:
    """Whether the text is a JSON object."""
    return text.lstrip().startswith("{")


def read(text: str) -> tuple[Draft, ...]:
    """One species; raises Unreadable with every faulty key."""
    molecule = _molecule(_parsed(text))
    faults = Faulty()
    symbols = _symbols(molecule.get("symbols"), faults)
    numbers = _numbers(molecule.get("geometry"), len(symbols), faults)
    charge = _whole(molecule, "molecular_charge", (-20, 20), faults)
    multiplicity = _whole(molecule, "molecular_multiplicity", (1, 40), faults)
    real = molecule.get("real")
    if isinstance(real, list) and not all(real):
        faults.add("real", "marks ghost atoms, which a species cannot hold; leave them out")
    faults.refuse()
    atoms = tuple(
        Atom(symbol=symbol, x=numbers[3 * at], y=numbers[3 * at + 1], z=numbers[3 * at + 2])
        for at, symbol in enumerate(symbols)
    )
    title = molecule.get("name")
    return (
        Draft(
            atoms=atoms,
            charge=charge,
            multiplicity=multiplicity,
            title=one_line(title) if isinstance(title, str) else "",
            notes=isotope_notes(molecule["symbols"]),
        ),
    )


def write(species: Species) -> str:
    """One molecule, its geometry in bohr."""
    record = {
        "schema_name": "qcschema_molecule",
        "schema_version": 2,
        "name": species.name,
        "symbols": [atom.symbol for atom in species.atoms],
        "geometry": [
            value / ANGSTROM_PER_BOHR for atom in species.atoms for value in (atom.x, atom.y, atom.z)
        ],
        "molecular_charge": species.charge,
        "molecular_multiplicity": species.multiplicity,
        "fix_com": True,
        "fix_orientation": True,
    }
    return json.dumps(record, indent=1, allow_nan=False) + "\n"


def _parsed(text: str) -> object:
    try:
        return json.loads(text)
    except json.JSONDecodeError as error:
        raise Unreadable(f"line {error.lineno}: is not JSON from here on ({error.msg})") from None
    except (ValueError, RecursionError):
        raise Unreadable(
            "is not JSON that can be read: a number is too long, or it is nested too deep"
        ) from None


def _molecule(data: object) -> dict[str, Any]:
    inner = data.get("molecule", data) if isinstance(data, dict) else None
    if not isinstance(inner, dict) or "symbols" not in inner:
        raise Unreadable("is not a QCSchema molecule; an object with symbols and geometry (in bohr) is")
    return inner


def _symbols(labels: object, faults: Faulty) -> list[str]:
    if not isinstance(labels, list) or not labels or not all(isinstance(label, str) for label in labels):
        faults.add("symbols", 'must be a list of element symbols such as ["O", "H", "H"]')
        return []
    check_size(len(labels))
    symbols: list[str] = []
    for number, label in enumerate(labels, start=1):
        try:
            symbols.append(symbol_of(label))
        except ValueError as error:
            faults.add(f"symbols, atom {number}", str(error))
    return symbols


def _numbers(geometry: object, atoms: int, faults: Faulty) -> list[float]:
    if not isinstance(geometry, list):
        faults.add("geometry", "must be a list of coordinates in bohr, three an atom")
        return []
    flat = [value for row in geometry for value in (row if isinstance(row, list) else [row])]
    if len(flat) != 3 * atoms and not faults.said:
        faults.add("geometry", f"has {len(flat)} numbers, but {atoms} atoms need {3 * atoms}")
    found: list[float] = []
    for at, value in enumerate(flat):
        try:
            found.append(_angstrom(value))
        except ValueError as error:
            faults.add(f"geometry, number {at + 1} (atom {at // 3 + 1})", str(error))
    return found


def _angstrom(value: object) -> float:
    if isinstance(value, bool) or not isinstance(value, int | float):
        raise ValueError(f"'{str(value)[:20]}' is not a number; a coordinate in bohr such as 0.221 is")
    if abs(value) > 1e6:
        raise ValueError("lies absurdly far out")
    return in_range(round(value * ANGSTROM_PER_BOHR, DECIMALS))


def _whole(molecule: dict[str, Any], key: str, between: tuple[int, int], faults: Faulty) -> int | None:
    value = molecule.get(key)
    if value is None:
        return None
    low, high = between
    number = isinstance(value, int | float) and not isinstance(value, bool)
    if not number or not low <= value <= high or value != int(value):
        faults.add(key, f"{str(value)[:20]} cannot be; it must be a whole number between {low} and {high}")
        return None
    return int(value)
