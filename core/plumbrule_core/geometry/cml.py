"""Chemical Markup Language: atoms with elementType, x3, y3, z3; formalCharge and spinMultiplicity.

Read with defusedxml: a document type or an entity is refused, so that no file can swell or reach outside.
"""

from typing import TYPE_CHECKING
from xml.sax.saxutils import quoteattr

from plumbrule_core.documents.species import Atom, Species
from plumbrule_core.errors import Unreadable
from plumbrule_core.geometry.draft import Draft, Faulty, atom_of, check_size, isotope_notes
from plumbrule_core.geometry.stated import one_line

if TYPE_CHECKING:
    from xml.etree.ElementTree import Element

SUFFIXES = (".cml",)
NAME = "CML"
POSITION = ("x3", "y3", "z3")


def recognises(text: str) -> bool:
    """Whether the text is marked up."""
    return text.lstrip().startswith("<")


def read(text: str) -> tuple[Draft, ...]:
    """Every molecule that has atoms of its own; raises Unreadable with every faulty atom."""
    root = _parsed(text)
    molecules = [(element, atoms) for element in root.iter() if (atoms := _own_atoms(element))]
    if not molecules:
        raise Unreadable("holds no atoms; a CML file has a molecule with an atomArray of atoms")
    faults = Faulty()
    drafts = tuple(_draft(molecule, atoms, faults) for molecule, atoms in molecules)
    faults.refuse()
    return drafts


def write(species: Species) -> str:
    """One molecule, coordinates in angstrom to eight decimals."""
    rows = [
        f'  <atom id="a{number}" elementType="{a.symbol}" x3="{a.x:.8f}" y3="{a.y:.8f}" z3="{a.z:.8f}"/>'
        for number, a in enumerate(species.atoms, start=1)
    ]
    head = (
        f'<molecule xmlns="http://www.xml-cml.org/schema" id="m1" title={quoteattr(one_line(species.name))} '
        f'formalCharge="{species.charge}" spinMultiplicity="{species.multiplicity}">'
    )
    return "\n".join(
        [
            '<?xml version="1.0" encoding="UTF-8"?>',
            head,
            " <atomArray>",
            *rows,
            " </atomArray>",
            "</molecule>",
            "",
        ]
    )


def _parsed(text: str) -> "Element":
    from xml.etree.ElementTree import ParseError

    from defusedxml import DefusedXmlException
    from defusedxml.ElementTree import fromstring

    try:
        return fromstring(text.encode("utf-8"), forbid_dtd=True)
    except ParseError as error:
        line, column = error.position
        raise Unreadable(
            f"line {line}: is not XML at column {column + 1} ({str(error).split(':')[0]})"
        ) from None
    except DefusedXmlException:
        raise Unreadable(
            "declares a document type or entities, which are not read for safety; remove them"
        ) from None
    except (ValueError, LookupError):
        raise Unreadable("declares an encoding that it does not have; save it as UTF-8") from None


def _tag(element: "Element") -> str:
    return element.tag.rpartition("}")[2] if isinstance(element.tag, str) else ""


def _own_atoms(molecule: "Element") -> list["Element"]:
    if _tag(molecule) != "molecule":
        return []
    arrays = [child for child in molecule if _tag(child) == "atomArray"]
    return [atom for array in arrays for atom in array if _tag(atom) == "atom"]


def _draft(molecule: "Element", elements: list["Element"], faults: Faulty) -> Draft:
    check_size(len(elements))
    atoms: list[Atom] = []
    for number, element in enumerate(elements, start=1):
        try:
            atoms.append(_atom(element))
        except ValueError as error:
            faults.add(f"atom {element.get('id') or number}", str(error))
    charge = _whole(molecule, "formalCharge", (-20, 20), faults)
    multiplicity = _whole(molecule, "spinMultiplicity", (1, 40), faults)
    if charge is None:
        charge = _sum_of_charges(elements, faults)
    return Draft(
        atoms=tuple(atoms),
        charge=charge,
        multiplicity=multiplicity,
        title=one_line(molecule.get("title") or ""),
        notes=isotope_notes([element.get("elementType") or "" for element in elements]),
    )


def _atom(element: "Element") -> Atom:
    lacking = [key for key in ("elementType", *POSITION) if not element.get(key)]
    if lacking:
        flat = "; it is a flat drawing (x2, y2), so save it with 3-D coordinates" if element.get("x2") else ""
        raise ValueError(f"has no {', '.join(lacking)}{flat}")
    return atom_of([element.get("elementType") or "", *(element.get(key) or "" for key in POSITION)])


def _sum_of_charges(elements: list["Element"], faults: Faulty) -> int | None:
    stated = [_whole(element, "formalCharge", (-20, 20), faults) for element in elements]
    known = [charge for charge in stated if charge is not None]
    return sum(known) if known else None


def _whole(element: "Element", key: str, between: tuple[int, int], faults: Faulty) -> int | None:
    text = element.get(key)
    if text is None:
        return None
    low, high = between
    try:
        value = int(text[:20])
    except ValueError:
        value = high + 1
    if not low <= value <= high:
        faults.add(
            f"{_tag(element)} {element.get('id', '')}".strip(), f"{key}='{text[:20]}' must be {low} to {high}"
        )
        return None
    return value
