"""How large a calculation is: the counts that its price depends on."""

from plumbrule_core.basis_sets import BASES, FROZEN_CORE, Basis, frozen_orbitals
from plumbrule_core.documents.base import digest_of
from plumbrule_core.documents.plan import Settings
from plumbrule_core.documents.species import Species
from plumbrule_core.rungs.protocol import Size


def symbols_of(species: Species) -> tuple[str, ...]:
    """The element of every atom."""
    return tuple(atom.symbol for atom in species.atoms)


def elements_of(species: tuple[Species, ...]) -> tuple[str, ...]:
    """Every element of these species, once."""
    return tuple(sorted({symbol for one in species for symbol in symbols_of(one)}))


def functions_of(species: Species, basis: Basis) -> int:
    """The number of basis functions of a species."""
    return basis.functions(symbols_of(species))


def frozen_of(species: Species, basis: Basis) -> int:
    """The number of orbitals that a frozen core leaves out."""
    return frozen_orbitals(symbols_of(species), basis)


def explicit_electrons(species: Species, basis: Basis) -> int:
    """The electrons that no core potential of the basis replaces."""
    return species.electrons - sum(basis.potential_electrons(symbol) for symbol in symbols_of(species))


def tables_of(species: Species, settings: Settings) -> str:
    """The digest of what the basis and core tables say of these elements: it is part of a task's identity."""
    basis = BASES[settings.basis]
    rows = {
        symbol: (
            basis.name_for(symbol),
            basis.counts[symbol],
            basis.potential_for(symbol),
            basis.potential_electrons(symbol),
            symbol in basis.fitted,
            FROZEN_CORE[symbol],
        )
        for symbol in symbols_of(species)
    }
    return digest_of([rows, basis.cartesian, basis.fitting])


def size_of(species: Species, settings: Settings) -> Size:
    """The counts of one species at one level."""
    basis = BASES[settings.basis]
    functions = functions_of(species, basis)
    frozen = frozen_of(species, basis) if settings.core == "frozen" else 0
    majority = (explicit_electrons(species, basis) + species.unpaired) // 2
    return Size(
        atoms=len(species.atoms),
        functions=functions,
        occupied=max(majority - frozen, 0),
        virtual=max(functions - majority, 0),
        frozen=frozen,
        unrestricted=settings.reference == "UHF" or species.multiplicity > 1,
        density_fitting=settings.density_fitting,
    )
