"""SMILES: one string a line, a title after it; built in three dimensions by a force field."""

from dataclasses import replace

from plumbrule_core.errors import Unreadable
from plumbrule_core.geometry.building import build, isotopes_left_out, library_refusals, sanitised
from plumbrule_core.geometry.draft import Draft, Faulty

SUFFIXES = (".smi",)
NAME = "SMILES"
LONGEST = 2000
"""Characters; longer than any species that can be calculated, short enough for the parser's stack."""


def recognises(text: str) -> bool:
    """Whether any text is there: SMILES is what remains when it is nothing else."""
    return bool(text.strip())


def read(text: str) -> tuple[Draft, ...]:
    """One species a line; raises Unreadable with every faulty line."""
    faults = Faulty()
    drafts: list[Draft] = []
    for number, line in enumerate(text.split("\n"), start=1):
        if not line.strip():
            continue
        smiles, _, title = line.strip().partition(" ")
        try:
            drafts.append(draft_of(smiles, title.strip()))
        except Unreadable as error:
            faults.add(number, str(error))
    faults.refuse()
    return tuple(drafts)


def draft_of(smiles: str, title: str = "") -> Draft:
    """The species of one SMILES string; raises Unreadable with the reason."""
    from rdkit import Chem, rdBase

    shown = smiles[:40]
    if len(smiles) > LONGEST:
        raise Unreadable(
            f"a SMILES string of {len(smiles)} characters is too long; at most {LONGEST} are read"
        )
    with rdBase.BlockLogs():
        molecule = Chem.MolFromSmiles(smiles, sanitize=False) if smiles.isascii() else None
    if molecule is None or molecule.GetNumAtoms() == 0:
        raise Unreadable(
            f"'{shown}' is neither a SMILES string (water is O, hydroxide is [OH-]) nor coordinates "
            "(one line an atom: a symbol and three numbers in angstrom)"
        )
    with library_refusals(f"SMILES {shown}"):
        draft = build(sanitised(molecule), title)
    return replace(draft, notes=isotopes_left_out(molecule) + draft.notes)
