"""The PySCF molecule and its empty mean field, built from a task."""

from typing import Any, Literal

from plumbrule_core import basis_sets
from plumbrule_core.basis_sets import Basis
from plumbrule_core.documents.plan import TaskSpec
from plumbrule_core.documents.species import spin_words
from plumbrule_core.errors import PlumbruleError
from plumbrule_core.rungs.protocol import Given

ReferenceKind = Literal["RHF", "UHF", "ROHF"]


def molecule_of(given: Given) -> Any:
    """The molecule on the bench, built where there is none yet; raises PlumbruleError."""
    from pyscf import lib

    lib.num_threads(given.threads)
    if given.bench.molecule is None:
        given.bench.molecule = build_molecule(given.spec, given.memory_mb)
    return given.bench.molecule


def build_molecule(spec: TaskSpec, memory_mb: float) -> Any:
    """A PySCF Mole: angstrom, silent, with the core potential that belongs to the basis.

    Raises PlumbruleError where the basis lacks an element or where settings contradict each other.
    """
    from pyscf import gto

    species, settings = spec.species, spec.settings
    basis = basis_of(spec)
    molecule = gto.Mole()
    molecule.atom = [(atom.symbol, (atom.x, atom.y, atom.z)) for atom in species.atoms]
    molecule.unit = "Angstrom"
    molecule.charge, molecule.spin = species.charge, species.unpaired
    molecule.basis = {symbol: basis.name_for(symbol) for symbol in species.counts}
    molecule.ecp = {symbol: name for symbol in species.counts if (name := basis.potential_for(symbol))}
    molecule.cart = basis.cartesian
    molecule.verbose = 0
    molecule.max_memory = memory_mb
    if molecule.ecp and settings.relativity == "X2C":
        raise PlumbruleError(
            f"{settings.basis} replaces inner electrons of {', '.join(sorted(molecule.ecp))} by a potential "
            "that already holds relativity, so X2C cannot be added: choose no relativity, or another basis"
        )
    return molecule.build()


def basis_of(spec: TaskSpec) -> Basis:
    """The basis set of a task; raises PlumbruleError where it is unknown or lacks an element."""
    name, symbols = spec.settings.basis, tuple(spec.species.counts)
    basis = basis_sets.find(name)
    if basis is not None and not basis.missing(symbols):
        return basis
    why = "is not known" if basis is None else f"has no functions for {', '.join(basis.missing(symbols))}"
    offers = ", ".join(other.name for other in basis_sets.nearest(name, symbols))
    raise PlumbruleError(f"the basis {name} {why}; {offers} would do")


def reference_kind(spec: TaskSpec) -> ReferenceKind:
    """Which Hartree-Fock is meant: restricted for closed shells, unrestricted for open ones unless asked.

    Raises PlumbruleError where RHF is asked for an open shell.
    """
    species, wanted = spec.species, spec.settings.reference
    if species.unpaired == 0:
        return "UHF" if wanted == "UHF" else "RHF"
    if wanted == "RHF":
        raise PlumbruleError(
            f"RHF pairs all electrons, but {species.name} is a {spin_words(species.multiplicity)}: "
            "choose UHF, ROHF or auto as the reference"
        )
    return "ROHF" if wanted == "ROHF" else "UHF"


def empty_mean_field(given: Given, functional: str = "") -> Any:
    """A mean field that has not run: HF, or Kohn-Sham where a functional is named."""
    from pyscf.scf import hf

    hf.MUTE_CHKFILE = True  # the library's temporary checkpoint files: our shelf keeps the orbitals
    molecule, spec = molecule_of(given), given.spec
    mean_field = _class_of(reference_kind(spec), bool(functional))(molecule)
    if functional:
        mean_field.xc = functional
    if spec.settings.density_fitting:
        fitting = basis_of(spec).fitting
        mean_field = mean_field.density_fit(auxbasis=fitting[0] if fitting else None)
    if spec.settings.relativity == "X2C":
        mean_field = mean_field.x2c()
    mean_field.max_memory = given.memory_mb
    return mean_field


def _class_of(kind: ReferenceKind, kohn_sham: bool) -> Any:
    from pyscf.dft import rks, roks, uks
    from pyscf.scf import hf, rohf, uhf

    if kohn_sham:
        return {"RHF": rks.RKS, "UHF": uks.UKS, "ROHF": roks.ROKS}[kind]
    return {"RHF": hf.RHF, "UHF": uhf.UHF, "ROHF": rohf.ROHF}[kind]
