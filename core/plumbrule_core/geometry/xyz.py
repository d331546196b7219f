"""XYZ: a count, a comment, then one line an atom in angstrom; frames follow one another.

A comment may state `charge=1 multiplicity=2`, and may name its columns (`Properties=species:S:1:pos:R:3`).
"""

import re

from plumbrule_core.documents.species import Atom, Species
from plumbrule_core.geometry.draft import Draft, Faulty, atom_of, check_size, isotope_notes
from plumbrule_core.geometry.stated import comment_for, stated, title_in

SUFFIXES = (".xyz",)
NAME = "XYZ"


def recognises(text: str) -> bool:
    """Whether the first line is a bare count."""
    first = text.lstrip().split("\n", 1)[0].strip()
    return first.isascii() and first.isdigit()


def read(text: str) -> tuple[Draft, ...]:
    """All frames; raises Unreadable with every faulty line."""
    lines = text.rstrip().split("\n")
    faults = Faulty()
    drafts: list[Draft] = []
    at = _next_filled(lines, 0)
    while at < len(lines):
        count = _count(lines, at, faults)
        if count is None:
            break
        drafts.append(_frame(lines, at, count, faults))
        at = _next_filled(lines, at + 2 + count)
    faults.refuse()
    return tuple(drafts)


def write(species: Species) -> str:
    """One frame, coordinates in angstrom to eight decimals."""
    comment = comment_for(species.charge, species.multiplicity, species.name)
    rows = [f"{a.symbol:<2} {a.x:16.8f} {a.y:16.8f} {a.z:16.8f}" for a in species.atoms]
    return "\n".join([str(len(rows)), comment, *rows]) + "\n"


def _next_filled(lines: list[str], at: int) -> int:
    while at < len(lines) and not lines[at].strip():
        at += 1
    return at


def _count(lines: list[str], at: int, faults: Faulty) -> int | None:
    said = lines[at].strip()
    if not (said.isascii() and said.isdigit()) or int(said[:9]) == 0:
        earlier = " (or the count above is too small)" if at else ""
        faults.add(at + 1, f"the number of atoms should stand here, not '{said[:40]}'{earlier}")
        return None
    count = int(said[:9])
    check_size(count)
    left = len(lines) - at - 2
    if left < count:
        faults.add(
            at + 1, f"{count} atoms are announced, but the file ends after {max(left, 0)} lines of them"
        )
        return None
    return count


def _frame(lines: list[str], at: int, count: int, faults: Faulty) -> Draft:
    comment = lines[at + 1]
    said: dict[str, int] = {}
    try:
        said = stated(comment)
    except ValueError as error:
        faults.add(at + 2, str(error))
    label, position = _columns(comment)
    atoms: list[Atom] = []
    labels: list[str] = []
    for number, line in enumerate(lines[at + 2 : at + 2 + count], start=at + 3):
        fields = line.split()
        fields = fields[label : label + 1] + fields[position : position + 3]
        try:
            atoms.append(atom_of(fields))
            labels.append(fields[0])
        except ValueError as error:
            faults.add(number, f"{error} (atom {number - at - 2} of {count})")
    cell = ("its periodic cell left out",) if re.search(r"(?i)\blattice\s*=", comment) else ()
    return Draft(
        atoms=tuple(atoms),
        charge=said.get("charge"),
        multiplicity=said.get("multiplicity"),
        title=title_in(comment),
        notes=isotope_notes(labels) + cell,
    )


def _columns(comment: str) -> tuple[int, int]:
    """Where the label and the first coordinate stand in a line, from 0."""
    match = re.search(r"(?i)\bproperties\s*=\s*\"?([\w:]+)", comment)
    parts = match[1].split(":") if match else []
    place, start = 0, {"species": 0, "pos": 1}
    for name, _, width in zip(parts[::3], parts[1::3], parts[2::3], strict=False):
        start[name.lower()] = place
        place += int(width[:3]) if width.isdigit() else 1
    return start["species"], start["pos"]
