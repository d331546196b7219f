"""Bare atom lines as people paste them: a symbol or atomic number and three coordinates in angstrom."""

from plumbrule_core.documents.species import Atom
from plumbrule_core.geometry.draft import Draft, Faulty, atom_of, check_size, isotope_notes
from plumbrule_core.geometry.stated import stated

SUFFIXES: tuple[str, ...] = ()
NAME = "atom lines"


def recognises(text: str) -> bool:
    """Whether any line has two numbers or more after its first field."""
    return any(_like_an_atom(_fields(line)) for line in text.split("\n"))


def read(text: str) -> tuple[Draft, ...]:
    """One species; raises Unreadable with every faulty line.

    A line of its own may state `charge=1 multiplicity=2`.
    """
    faults = Faulty()
    atoms: list[Atom] = []
    labels: list[str] = []
    said: dict[str, int] = {}
    for number, line in enumerate(text.split("\n"), start=1):
        if not line.strip() or line.lstrip().startswith("#"):
            continue
        try:
            fields = _fields(line)
            if not _like_an_atom(fields) and (found := stated(line)):
                said |= found
                continue
            atoms.append(atom_of(fields))
            labels.append(fields[0])
        except ValueError as error:
            faults.add(number, str(error))
    faults.refuse()
    check_size(len(atoms))
    return (
        Draft(
            atoms=tuple(atoms),
            charge=said.get("charge"),
            multiplicity=said.get("multiplicity"),
            notes=isotope_notes(labels),
        ),
    )


def _fields(line: str) -> list[str]:
    return line.replace(",", " ").replace(";", " ").split()


def _like_an_atom(fields: list[str]) -> bool:
    return sum(_is_number(text) for text in fields[1:4]) >= 2


def _is_number(text: str) -> bool:
    try:
        float(text.lower().replace("d", "e"))
    except ValueError:
        return False
    return True
