"""The lines of what the model leaves out: core, relativity, geometry, spin-orbit coupling."""

import math

from plumbrule_core.basis_sets import frozen_orbitals
from plumbrule_core.documents.findings import BudgetLine
from plumbrule_core.documents.ground_states import ground_multiplicity
from plumbrule_core.documents.species import Species, hill, spin_words
from plumbrule_core.elements import ELEMENTS
from plumbrule_core.judgement.budget_tables import TABLES, column, in_unit, size_factor
from plumbrule_core.judgement.case import Case, SpeciesView
from plumbrule_core.judgement.geometry_origin import origin_of
from plumbrule_core.units import ANGSTROM_PER_BOHR, convert

MILLIDYNE_PER_ANGSTROM = 1.0 / 15.5689
"""In hartree per bohr squared."""


def core_line(case: Case, kind: str) -> BudgetLine | None:
    """The correlation of the core: left out where it is frozen, small where the basis was made for it."""
    table = TABLES["core"]
    if not any(_has_core(case, view) for view in case.views):
        return None
    treated = case.recipe.core == "all" and all(basis.core_valence for basis in case.bases)
    heavy = heaviest(case) > 10
    kcal = (
        table["treated"]
        if treated
        else column("core", "frozen", kind) * (table["heavier_factor"] if heavy else 1.0)
    )
    factor = size_factor(case, kind)
    how = _core_words(case, treated)
    source = table["source"] + (f"; {table['heavier_source']}" if heavy and not treated else "")
    return BudgetLine(
        cause="core correlation",
        size=in_unit(kcal * factor, case.unit),
        unit=case.unit,
        how=how,
        source=source,
    )


def _has_core(case: Case, view: SpeciesView) -> bool:
    """Whether there is a core at all, frozen, correlated or in a potential; hydrogen and helium have none."""
    symbols_here = [atom.symbol for atom in view.species.atoms]
    if case.largest is None or case.largest.missing(symbols_here):
        return any(ELEMENTS[symbol].number > 2 for symbol in symbols_here)
    potential = any(case.largest.potential_electrons(symbol) for symbol in symbols_here)
    return potential or frozen_orbitals(symbols_here, case.largest) > 0


def _core_words(case: Case, treated: bool) -> str:
    if treated:
        return "all electrons are correlated"
    if case.recipe.core == "all":
        return "all electrons are correlated, but in a basis that was not made for the core"
    return "frozen core; typical size of what is left out"


def relativity_line(case: Case, kind: str) -> BudgetLine:
    """Scalar relativity: left out, in a core potential, or treated by X2C."""
    table = TABLES["relativity"]
    kcal, how = _relativity(case, kind)
    factor = size_factor(case, kind)
    return BudgetLine(
        cause="scalar relativity",
        size=in_unit(kcal * factor, case.unit),
        unit=case.unit,
        how=how,
        source=table["source"],
    )


def _relativity(case: Case, kind: str) -> tuple[float, str]:
    table = TABLES["relativity"]
    if case.recipe.relativity == "X2C":
        return table["treated"], "X2C"
    rows = table["atomisation" if kind == "atomisation" else "other"]
    bare = [s for s in symbols(case) if case.largest is None or not case.largest.potential_electrons(s)]
    heaviest_bare = max((ELEMENTS[symbol].number for symbol in bare), default=1)
    left_out = next(size for limit, size in rows.items() if heaviest_bare <= int(limit))
    if len(bare) < len(symbols(case)) and table["potential"] >= left_out:
        return table["potential"], "in the core potential of the heavy atoms"
    return (
        left_out,
        f"left out; typical size up to {max(bare, key=lambda s: ELEMENTS[s].number, default='H')}",
    )


def symbols(case: Case) -> tuple[str, ...]:
    """The elements of the question."""
    return tuple(dict.fromkeys(atom.symbol for one in case.species for atom in one.atoms))


def heaviest(case: Case) -> int:
    """The largest atomic number of the question."""
    return max((ELEMENTS[symbol].number for symbol in symbols(case)), default=1)


def geometry_line(case: Case) -> BudgetLine | None:
    """The strain of geometries that are not at their minimum: half k d^2 a bond, by where they came from."""
    table = TABLES["geometry"]
    views = [(part.coefficient, case.view(part.species)) for part in case.parts]
    strains = [coefficient * strain(view) for coefficient, view in views]
    kcal = convert(math.hypot(*strains), "hartree", "kcal/mol")
    if kcal == 0:
        return None
    worst = next(
        (o for o in ("force field", "cut", "unknown") if o in map(origin_of, case.species)), "optimised"
    )
    words = {
        "force field": "built by a force field",
        "cut": "cut from the molecule and not relaxed, or of unknown origin",
        "unknown": "of unknown origin",
        "optimised": "said to be optimised",
    }
    return BudgetLine(
        cause="geometry",
        size=in_unit(kcal, case.unit),
        unit=case.unit,
        how=f"geometries {words[worst]}: half k d² for every bond",
        source=table["source"],
    )


def strain(view: SpeciesView) -> float:
    """The energy in hartree by which a geometry is expected to lie above its minimum."""
    table, origin = TABLES["geometry"], origin_of(view.species)
    displacements = table["displacements"]
    d = displacements.get("unknown" if origin == "cut" else origin, 0.0) / ANGSTROM_PER_BOHR
    k = table["force_constant"] * MILLIDYNE_PER_ANGSTROM
    return 0.5 * k * d * d * len(view.bonds)


def spin_orbit_line(case: Case) -> BudgetLine | None:
    """The spin-orbit lowering of atoms and small radicals, a known shift; gaps in the table are said."""
    shifts = [(part, _lowering(part.species)) for part in case.parts]
    known = math.fsum(-part.coefficient * cm for part, cm in shifts if cm is not None)
    unlisted = [part for part, cm in shifts if cm is None]
    unknown = [f"{part.species.formula} ({_spin(part.species)})" for part in unlisted]
    if not known and not unknown:
        return None
    table = TABLES["spin_orbit"]
    gap = f"; not in the table: {', '.join(dict.fromkeys(unknown))}" if unknown else ""
    return BudgetLine(
        cause="spin-orbit coupling",
        size=in_unit(math.hypot(*(p.coefficient * _unknown(p.species) for p in unlisted)), case.unit),
        unit=case.unit,
        how=f"not in the number: the first-order lowering of atoms and radicals{gap}",
        source=table["source"],
        shift=convert(known, "cm-1", case.unit) or None,
    )


def _spin(species: Species) -> str:
    return spin_words(species.multiplicity).split(",")[0]


def _unknown(species: Species) -> float:
    """In kcal/mol: the largest first-order lowering that is known of the heaviest atom's row."""
    heaviest_atom = max(ELEMENTS[atom.symbol].number for atom in species.atoms)
    rows = TABLES["spin_orbit"]["unknown"]
    return float(next(size for limit, size in rows.items() if heaviest_atom <= int(limit)))


def _key(species: Species) -> str:
    """How the table names a species: the formula in Hill order and one sign for every charge."""
    return hill(species.counts) + ("+" if species.charge > 0 else "-") * abs(species.charge)


def _lowering(species: Species) -> float | None:
    """In cm-1; 0 where there is none in first order, None where it matters and is not known.

    A singlet has none. The table holds for the ground state; of another spin state nothing is known.
    """
    if species.multiplicity == 1:
        return 0.0
    table = TABLES["spin_orbit"]
    if len(species.atoms) == 1:
        known = table["ions"] if species.charge else table["atoms"]
        ground = species.multiplicity == ground_multiplicity(species.atoms, species.charge)
        return float(known[_key(species)]) if ground and _key(species) in known else None
    known = table["molecules"].get(_key(species), {})
    if str(species.multiplicity) in known:
        return float(known[str(species.multiplicity)])
    heavy = any(ELEMENTS[atom.symbol].number > 18 for atom in species.atoms)
    return None if heavy or len(species.atoms) == 2 else 0.0
