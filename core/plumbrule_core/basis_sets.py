"""The basis sets that can be asked for: which elements each covers, how large it is, and its neighbours.

The tables are written by `packaging/make_basis_table.py` from what PySCF has, so that the window knows them
without loading it. To build a molecule, give each element `Basis.name_for(symbol)` as its basis,
`Basis.potential_for(symbol)` as its effective core potential where that is not None, and Cartesian functions
where `Basis.cartesian`.
"""

import difflib
import json
import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from types import MappingProxyType
from typing import Any

from plumbrule_core.errors import PlumbruleError
from plumbrule_resources import text


@dataclass(frozen=True, slots=True, kw_only=True)
class Basis:
    """One basis set; `larger`, `smaller` and the partners are names in `BASES`."""

    name: str
    family: str
    zeta: int
    """How many functions describe each valence orbital: 1 minimal, 2 double, 3 triple ..."""
    cardinal: int | None = None
    """The number X by which energies of a family extrapolate; None where the family does not."""
    diffuse: bool = False
    core_valence: bool = False
    cartesian: bool = False
    """Whether d and higher functions are Cartesian (6 d functions, not 5)."""
    relativistic: bool = False
    """Contracted for a scalar relativistic Hamiltonian; right with X2C alone."""
    polarised: bool = False
    """Whether it has functions of higher angular momentum than occupied shells; correlation needs them."""
    larger: str | None = None
    smaller: str | None = None
    diffuse_partner: str | None = None
    """The same set with diffuse functions; None where it has them, or there is none."""
    core_partner: str | None = None
    """The same set with functions for the core; None where it has them, or there is none."""
    counts: Mapping[str, int]
    """Functions by element, elements that borrow from another set included."""
    potentials: Mapping[str, int]
    """Electrons that the effective core potential replaces, by element; elements without one are absent."""
    potential_name: str | None = None
    borrowed: Mapping[str, str]
    """Elements that this set was not made for, and the set that stands in for them."""
    fitting: tuple[str, str] | None = None
    """The sets that fit Coulomb and exchange, and correlation; None where no pair was made for this set."""
    fitted: frozenset[str] = frozenset()

    def missing(self, symbols: Iterable[str]) -> tuple[str, ...]:
        """The elements that the set does not cover, each once, in the order they came."""
        return tuple(symbol for symbol in dict.fromkeys(symbols) if symbol not in self.counts)

    def functions(self, symbols: Iterable[str]) -> int:
        """How many functions these atoms carry; raises PlumbruleError where the set does not cover one."""
        atoms = tuple(symbols)
        if lacking := self.missing(atoms):
            raise PlumbruleError(f"{self.name} has no functions for {', '.join(lacking)}")
        return sum(self.counts[symbol] for symbol in atoms)

    def potential_electrons(self, symbol: str) -> int:
        """The electrons of an atom that this set's effective core potential replaces; 0 where it has none."""
        return self.potentials.get(symbol, 0)

    def potential_for(self, symbol: str) -> str | None:
        """The name of the effective core potential of an element; None where it has none."""
        return self.potential_name if symbol in self.potentials else None

    def name_for(self, symbol: str) -> str:
        """The name of the set whose functions the element takes: this one, or the one standing in."""
        return self.borrowed.get(symbol, self.name)

    def fits(self, symbols: Iterable[str]) -> bool:
        """Whether density-fitting sets were made for all of these elements in this set."""
        return all(symbol in self.fitted for symbol in symbols)


def find(name: str) -> Basis | None:
    """The basis set of that name, whatever its capitals, hyphens and spaces; None where there is none."""
    return _BY_KEY.get(_key(name))


def nearest(name: str, symbols: Iterable[str] = (), limit: int = 3) -> tuple[Basis, ...]:
    """The sets most like the one named that cover all the elements, most alike first, the named one left out.

    An unknown name stands for the known one that is spelt most like it.
    """
    atoms = tuple(symbols)
    wanted = find(name)
    model = wanted or _spelt_like(name)
    covering = [basis for basis in BASES.values() if basis is not wanted and not basis.missing(atoms)]
    return tuple(sorted(covering, key=lambda basis: _unlikeness(basis, model))[:limit])


def frozen_orbitals(symbols: Iterable[str], basis: Basis) -> int:
    """How many core orbitals (spatial) are frozen; what a core potential replaces is not counted again.

    By element: `frozen_core.json`, which names its source. A potential that replaces more than the core of an
    element leaves nothing to freeze there.
    """
    return sum(max(0, FROZEN_CORE[symbol] - basis.potential_electrons(symbol) // 2) for symbol in symbols)


def _key(name: str) -> str:
    starred = re.sub(r"\(d,\s*p\)", "**", name.lower()).replace("(d)", "*")
    return re.sub(r"[\s_\-‐‑–]", "", starred)


def _spelt_like(name: str) -> Basis:
    alike = difflib.get_close_matches(_key(name), _BY_KEY, n=1, cutoff=0.0)
    return _BY_KEY[alike[0]]


def _unlikeness(basis: Basis, model: Basis) -> tuple[int, bool, bool, bool, bool, bool, float]:
    """Size ranks first: a set of another size answers another question, one of another family rarely."""
    return (
        abs(basis.zeta - model.zeta),
        basis.relativistic != model.relativistic,
        basis.polarised != model.polarised,
        basis.core_valence != model.core_valence,
        basis.diffuse != model.diffuse,
        basis.family != model.family,
        -difflib.SequenceMatcher(None, basis.name, model.name).ratio(),
    )


def _basis(row: dict[str, Any]) -> Basis:
    shaped = {
        **row,
        "counts": MappingProxyType(row["counts"]),
        "potentials": MappingProxyType(row["potentials"]),
        "borrowed": MappingProxyType(row["borrowed"]),
        "fitting": tuple(row["fitting"]) if row["fitting"] else None,
        "fitted": frozenset(row["fitted"]),
    }
    return Basis(**shaped)


def _load() -> Mapping[str, Basis]:
    rows = json.loads(text("basis_sets.json"))["bases"]
    return MappingProxyType({row["name"]: _basis(row) for row in rows})


BASES: Mapping[str, Basis] = _load()
_BY_KEY: Mapping[str, Basis] = MappingProxyType({_key(name): basis for name, basis in BASES.items()})
FROZEN_CORE: Mapping[str, int] = MappingProxyType(json.loads(text("frozen_core.json"))["orbitals"])
"""Frozen core orbitals of each neutral atom."""
