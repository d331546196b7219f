"""Writes the shipped tables of basis sets and frozen cores from what PySCF has.

Run it after a change of the PySCF version: `python packaging/make_basis_table.py`. It prints the elements
that it left out because the library's data for them cannot be right, and why.
"""

import json
import warnings
from collections.abc import Iterator
from dataclasses import dataclass, field, replace
from pathlib import Path
from typing import Any

RESOURCES = Path(__file__).parent.parent / "resources" / "plumbrule_resources"
LAST_ELEMENT = 86
LETTERS = {2: "D", 3: "T", 4: "Q", 5: "5"}
NO_DIFFUSE_BY_DESIGN = ("H", "He")
"""Split-valence sets with one plus have no diffuse functions here, and those with two have none on helium."""


@dataclass(frozen=True, kw_only=True)
class Entry:
    """One basis set: what is chosen by hand, before the library's counts are added."""

    name: str
    family: str
    zeta: int
    cardinal: int | None = None
    diffuse: bool = False
    core_valence: bool = False
    cartesian: bool = False
    relativistic: bool = False
    polarised: bool = False
    larger: str | None = None
    smaller: str | None = None
    diffuse_partner: str | None = None
    core_partner: str | None = None
    potential_name: str | None = None
    stand_ins: tuple[tuple[str, tuple[str, ...] | None], ...] = field(default=())
    """Sets that lend functions to elements this set lacks: to those named, or (None) to any."""


def ladder(pattern: str, cardinals: str, **shared: Any) -> Iterator[Entry]:
    """One entry per cardinal number of a family named like `cc-pVXZ`; X in other names follows."""
    for letter in cardinals:
        cardinal = next(number for number, known in LETTERS.items() if known == letter)
        named = {key: _lettered(value, letter) for key, value in shared.items()}
        yield Entry(
            name=_lettered(pattern, letter),
            family=pattern,
            zeta=cardinal,
            cardinal=cardinal,
            polarised=True,
            larger=_neighbour(pattern, cardinals, cardinal + 1),
            smaller=_neighbour(pattern, cardinals, cardinal - 1),
            **named,
        )


def _lettered(value: Any, letter: str) -> Any:
    if isinstance(value, str):
        return value.replace("X", letter)
    if isinstance(value, tuple):
        return tuple((str(_lettered(name, letter)), whom) for name, whom in value)
    return value


def _neighbour(pattern: str, cardinals: str, cardinal: int) -> str | None:
    letter = LETTERS.get(cardinal)
    return str(_lettered(pattern, letter)) if letter is not None and letter in cardinals else None


LIGHT = ("H", "He")
CORRELATION_CONSISTENT = (
    *ladder("cc-pVXZ", "DTQ5", diffuse_partner="aug-cc-pVXZ", core_partner="cc-pCVXZ"),
    *ladder("aug-cc-pVXZ", "DTQ5", diffuse=True, core_partner="aug-cc-pwCVXZ"),
    *ladder(
        "cc-pCVXZ",
        "DTQ5",
        core_valence=True,
        diffuse_partner="aug-cc-pwCVXZ",
        stand_ins=(("cc-pVXZ", LIGHT),),
    ),
    *ladder("cc-pwCVXZ", "TQ5", core_valence=True, stand_ins=(("cc-pVXZ", LIGHT),)),
    *ladder("aug-cc-pwCVXZ", "DTQ5", diffuse=True, core_valence=True, stand_ins=(("aug-cc-pVXZ", LIGHT),)),
    *ladder("cc-pVXZ-DK", "DTQ5", relativistic=True, diffuse_partner="aug-cc-pVXZ-DK"),
    *ladder("aug-cc-pVXZ-DK", "DTQ5", diffuse=True, relativistic=True),
    *ladder(
        "cc-pVXZ-PP",
        "DTQ5",
        diffuse_partner="aug-cc-pVXZ-PP",
        core_partner="cc-pwCVXZ-PP",
        potential_name="cc-pVXZ-PP",
        stand_ins=(("cc-pVXZ", None),),
    ),
    *ladder(
        "aug-cc-pVXZ-PP",
        "DTQ5",
        diffuse=True,
        potential_name="cc-pVXZ-PP",
        stand_ins=(("aug-cc-pVXZ", None),),
    ),
    *ladder(
        "cc-pwCVXZ-PP",
        "DTQ5",
        core_valence=True,
        potential_name="cc-pVXZ-PP",
        stand_ins=(("cc-pCVXZ", None), ("cc-pVXZ", LIGHT)),
    ),
)


def def2(name: str, zeta: int, **more: Any) -> Entry:
    """A def2 set, whose potentials carry its own name."""
    family = "def2, diffuse" if more.get("diffuse") else "def2"
    return Entry(
        name=name, family=family, zeta=zeta, cardinal=zeta, polarised=True, potential_name=name, **more
    )


DEF2 = (
    def2("def2-SVP", 2, larger="def2-TZVP", diffuse_partner="def2-SVPD"),
    def2("def2-TZVP", 3, larger="def2-QZVP", smaller="def2-SVP", diffuse_partner="def2-TZVPD"),
    def2("def2-TZVPP", 3, larger="def2-QZVPP", smaller="def2-SVP", diffuse_partner="def2-TZVPPD"),
    def2("def2-QZVP", 4, smaller="def2-TZVP", diffuse_partner="def2-QZVPD"),
    def2("def2-QZVPP", 4, smaller="def2-TZVPP", diffuse_partner="def2-QZVPPD"),
    def2("def2-SVPD", 2, larger="def2-TZVPD", diffuse=True),
    def2("def2-TZVPD", 3, larger="def2-QZVPD", smaller="def2-SVPD", diffuse=True),
    def2("def2-TZVPPD", 3, larger="def2-QZVPPD", smaller="def2-SVPD", diffuse=True),
    def2("def2-QZVPD", 4, smaller="def2-TZVPD", diffuse=True),
    def2("def2-QZVPPD", 4, smaller="def2-TZVPPD", diffuse=True),
)


def split_valence(name: str, zeta: int, **more: Any) -> Entry:
    """A split-valence set; its d functions are Cartesian, except in the 6-311G sets."""
    family = "6-311G" if zeta == 3 else name.split("G")[0].replace("+", "") + "G"
    return Entry(
        name=name,
        family=family,
        zeta=zeta,
        cartesian=zeta == 2,
        diffuse="+" in name,
        polarised="*" in name,
        **more,
    )


SPLIT_VALENCE = (
    Entry(name="STO-3G", family="minimal", zeta=1, larger="3-21G"),
    Entry(name="STO-6G", family="minimal", zeta=1, larger="6-31G"),
    split_valence("3-21G", 2, larger="6-31G*", smaller="STO-3G"),
    split_valence("6-31G", 2, larger="6-31G*", smaller="STO-3G"),
    split_valence("6-31G*", 2, larger="6-31G**", smaller="6-31G", diffuse_partner="6-31+G*"),
    split_valence("6-31G**", 2, larger="6-311G**", smaller="6-31G*", diffuse_partner="6-31++G**"),
    split_valence("6-31+G*", 2, larger="6-31+G**"),
    split_valence("6-31+G**", 2, larger="6-311+G**", smaller="6-31+G*"),
    split_valence("6-31++G**", 2, larger="6-311++G**"),
    split_valence("6-311G", 3, larger="6-311G*", smaller="6-31G"),
    split_valence("6-311G*", 3, larger="6-311G**", smaller="6-31G*", diffuse_partner="6-311+G*"),
    split_valence("6-311G**", 3, smaller="6-31G**", diffuse_partner="6-311++G**"),
    split_valence("6-311+G*", 3, larger="6-311+G**", smaller="6-31+G*"),
    split_valence("6-311+G**", 3, smaller="6-31+G**"),
    split_valence("6-311++G**", 3, smaller="6-31++G**"),
)
CHOSEN = (*SPLIT_VALENCE, *CORRELATION_CONSISTENT, *DEF2)


def symbols() -> list[str]:
    """The symbols from hydrogen to radon."""
    from pyscf.data.elements import ELEMENTS

    return list(ELEMENTS[1 : LAST_ELEMENT + 1])


def functions(name: str, symbol: str, cartesian: bool) -> int:
    """The number of functions that the library's set has for an element; 0 where it has none."""
    from pyscf.gto.basis import load
    from pyscf.lib.exceptions import BasisNotFoundError

    try:
        shells = load(name, symbol)
    except BasisNotFoundError:
        return 0
    return sum(_contractions(shell) * _components(shell[0], cartesian) for shell in shells)


def _contractions(shell: list) -> int:
    return len(next(row for row in shell[1:] if isinstance(row, list))) - 1


def _components(momentum: int, cartesian: bool) -> int:
    return (momentum + 1) * (momentum + 2) // 2 if cartesian else 2 * momentum + 1


def potential(name: str, symbol: str) -> int:
    """The electrons that the library's potential of that name replaces; 0 where it has none."""
    from pyscf.gto.basis import load_ecp

    found = load_ecp(name, symbol)
    return found[0] if found else 0


def fitting_sets(name: str) -> tuple[str, str] | None:
    """The sets that fit Coulomb and exchange, and correlation; None where the library has no pair."""
    from pyscf.df.addons import DEFAULT_AUXBASIS

    key = name.lower().replace("-", "")
    key = key.split("g")[0] + "g" if key.startswith(("6", "3")) else key
    return DEFAULT_AUXBASIS.get(key)


def row(entry: Entry) -> dict[str, object]:
    """One basis set as the shipped table has it."""
    counts = {s: n for s in symbols() if (n := functions(entry.name, s, entry.cartesian))}
    potentials = (
        {s: n for s in counts if (n := potential(entry.potential_name, s))} if entry.potential_name else {}
    )
    borrowed: dict[str, str] = {}
    for lender, whom in entry.stand_ins:
        for symbol in whom or symbols():
            if symbol not in counts and (count := functions(lender, symbol, entry.cartesian)):
                counts[symbol], borrowed[symbol] = count, lender
    fitting = fitting_sets(entry.name)
    fitted = [s for s in counts if all(functions(aux, s, False) for aux in fitting)] if fitting else []
    data = {key: value for key, value in vars(replace(entry, stand_ins=())).items() if value}
    return {
        **data,
        "counts": {s: counts[s] for s in symbols() if s in counts},
        "potentials": potentials,
        "borrowed": borrowed,
        "fitting": list(fitting) if fitting else None,
        "fitted": fitted,
    }


def prune(rows: dict[str, dict]) -> None:
    """Leave out elements whose data cannot be right: diffuse or larger sets that add nothing, and say so."""
    for name, found in rows.items():
        plain = [other for other in rows.values() if other.get("diffuse_partner") == name]
        below = (
            [rows[found["smaller"]]]
            if found.get("smaller") and found["family"].startswith(("cc-", "aug-"))
            else []
        )
        for reference, what in [*((r, "diffuse") for r in plain), *((r, "smaller") for r in below)]:
            strict = what == "smaller" or found["family"].startswith("6-31")
            _prune_against(found, reference, strict)


def _prune_against(found: dict, reference: dict, strict: bool) -> None:
    for symbol in list(found["counts"]):
        ours, theirs = found["counts"][symbol], reference["counts"].get(symbol, 0)
        if ours < theirs or (strict and ours == theirs and symbol not in NO_DIFFUSE_BY_DESIGN):
            print(f"{found['name']}: {symbol} left out, {ours} functions; {reference['name']} has {theirs}")
            del found["counts"][symbol]
            found["potentials"].pop(symbol, None)
            found["borrowed"].pop(symbol, None)
            found["fitted"] = [other for other in found["fitted"] if other != symbol]


def basis_table() -> dict[str, object]:
    """The whole table of basis sets."""
    from pyscf import __version__

    rows = {entry.name: row(entry) for entry in CHOSEN}
    prune(rows)
    return {
        "source": f"PySCF {__version__}, written by packaging/make_basis_table.py",
        "bases": list(rows.values()),
    }


def core_table() -> dict[str, object]:
    """Frozen core orbitals by element, neutral atoms, no potential."""
    from pyscf import __version__
    from pyscf.data.elements import chemcore_atm

    frozen = {symbol: chemcore_atm[number] for number, symbol in enumerate(symbols(), start=1)}
    return {"source": f"PySCF {__version__}, pyscf.data.elements.chemcore_atm", "orbitals": frozen}


def main() -> None:
    """Write both tables."""
    warnings.simplefilter("ignore")
    for name, table in (("basis_sets.json", basis_table()), ("frozen_core.json", core_table())):
        text = json.dumps(table, separators=(",", ":")).replace('{"name"', '\n{"name"')
        (RESOURCES / name).write_text(text + "\n", encoding="utf-8")


if __name__ == "__main__":
    main()
