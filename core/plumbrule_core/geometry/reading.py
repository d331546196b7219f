"""Reading species from files and pasted text, and writing them: the one door for geometries from outside."""

from collections import Counter
from collections.abc import Callable, Sequence
from pathlib import Path
from types import ModuleType

from plumbrule_core.documents.ground_states import ground_multiplicity
from plumbrule_core.documents.species import Atom, Species, charge_text, hill
from plumbrule_core.errors import PlumbruleError, Unreadable
from plumbrule_core.geometry import atom_lines, cml, molfile, qcschema, smiles, xyz
from plumbrule_core.geometry.draft import Draft, check_size
from plumbrule_core.geometry.stated import one_line

FORMATS: tuple[ModuleType, ...] = (molfile, qcschema, cml, xyz, atom_lines, smiles)
"""The formats that are read, in the order in which text is tried.

Each has NAME, SUFFIXES, recognises and read.
"""
WRITERS: dict[str, Callable[[Species], str]] = {
    ".xyz": xyz.write,
    ".mol": molfile.write,
    ".cml": cml.write,
    ".json": qcschema.write,
}
LARGEST_FILE = 20_000_000
"""Bytes; a species has at most 500 atoms, so a larger file is something else."""
MOST_SPECIES = 1000
LONGEST_NAME = 80

Propose = Callable[[Sequence[Atom], int], int]


def read_file(path: str | Path, propose: Propose = ground_multiplicity) -> tuple[Species, ...]:
    """All species of a file.

    Where it states no multiplicity, `propose` gives one from the atoms and the charge.
    Raises Unreadable: one line a fault, each with the file, the line and the reason.
    """
    file = Path(path)
    try:
        text = _decoded(_bytes(file))
        found = _format_for(file.suffix.lower(), text)
        return _finished(found.read(text), one_line(file.stem), f"read from {file.name}", propose)
    except Unreadable as error:
        raise Unreadable("\n".join(f"{file.name}: {line}" for line in str(error).split("\n"))) from None


def read_text(text: str, name: str = "", propose: Propose = ground_multiplicity) -> tuple[Species, ...]:
    """All species of a pasted text, whichever format it is; raises Unreadable as `read_file` does."""
    if len(text) > LARGEST_FILE:
        raise Unreadable(
            f"is longer than {LARGEST_FILE // 1_000_000} million characters; a species is far shorter"
        )
    text = _unix_lines(text)
    found = _format_for("", text)
    drafts = found.read(text)
    origin = _smiles_origin(text) if found is smiles else f"pasted as {found.NAME}"
    return _finished(drafts, one_line(name), origin, propose)


def from_smiles(text: str, name: str = "") -> Species:
    """One species built from a SMILES string; raises Unreadable with the reason."""
    draft = smiles.draft_of(text.strip())
    return _finished((draft,), one_line(name), _smiles_origin(text), ground_multiplicity)[0]


def write(species: Species, suffix: str) -> str:
    """The species as text of the format with that suffix (`.xyz`); raises PlumbruleError if unknown."""
    writer = WRITERS.get(suffix.lower())
    if writer is None:
        raise PlumbruleError(f"'{suffix}' is not a format that can be written; {', '.join(WRITERS)} are")
    return writer(species)


def _bytes(file: Path) -> bytes:
    try:
        size = file.stat().st_size
        if size > LARGEST_FILE:
            raise Unreadable(f"has {size / 1e6:.0f} MB; at most {LARGEST_FILE // 1_000_000} MB are read")
        return file.read_bytes()
    except FileNotFoundError:
        raise Unreadable("there is no such file") from None
    except IsADirectoryError:
        raise Unreadable("is a folder; name a file in it") from None
    except OSError as error:
        raise Unreadable(f"cannot be opened ({error.strerror})") from None
    except ValueError:
        raise Unreadable("is not a file name that can be opened") from None


def _decoded(data: bytes) -> str:
    """Text from UTF-8, UTF-16 with its mark, or else Latin-1, where only titles can differ."""
    if data.startswith((b"\xff\xfe", b"\xfe\xff")):
        text = data.decode("utf-16", errors="replace")
    else:
        try:
            text = data.decode("utf-8-sig")
        except UnicodeDecodeError:
            text = data.decode("latin-1")
    if "\0" in text:
        raise Unreadable("is not a text file")
    return _unix_lines(text)


def _unix_lines(text: str) -> str:
    return text.removeprefix("\ufeff").replace("\r\n", "\n").replace("\r", "\n")


def _format_for(suffix: str, text: str) -> ModuleType:
    if not text.strip():
        raise Unreadable("is empty")
    named = next((known for known in FORMATS if suffix in known.SUFFIXES), None)
    if named is not None and named.recognises(text):
        return named
    seen = next(known for known in FORMATS if known.recognises(text))
    return named if named is not None and seen is smiles else seen


def _finished(drafts: Sequence[Draft], name: str, origin: str, propose: Propose) -> tuple[Species, ...]:
    if not all(draft.atoms for draft in drafts):
        raise Unreadable("holds no atoms")
    if len(drafts) > MOST_SPECIES:
        raise Unreadable(f"holds {len(drafts)} species; at most {MOST_SPECIES} are read at once")
    names = _names(drafts, name)
    return tuple(_species(draft, own, origin, propose) for draft, own in zip(drafts, names, strict=True))


def _species(draft: Draft, name: str, origin: str, propose: Propose) -> Species:
    check_size(len(draft.atoms))
    charge = draft.charge or 0
    multiplicity = draft.multiplicity or propose(draft.atoms, charge)
    return Species(
        name=name,
        atoms=draft.atoms,
        charge=charge,
        multiplicity=multiplicity,
        origin=", ".join([origin, *draft.notes]),
    )


def _names(drafts: Sequence[Draft], name: str) -> list[str]:
    """The given name where there is one species, else titles; numbered where two would be alike."""
    if len(drafts) == 1:
        return [(name or _own_name(drafts[0]))[:LONGEST_NAME]]
    wanted = [(draft.title or name or _own_name(draft))[: LONGEST_NAME - 6] for draft in drafts]
    often, seen, names = Counter(wanted), Counter[str](), []
    for each in wanted:
        seen[each] += 1
        names.append(f"{each} {seen[each]}" if often[each] > 1 else each)
    return names


def _own_name(draft: Draft) -> str:
    return draft.title or hill(Counter(atom.symbol for atom in draft.atoms)) + charge_text(draft.charge or 0)


def _smiles_origin(text: str) -> str:
    return f"built from SMILES {one_line(text)[:60]}"
