"""NEVPT2: the electrons outside the active space correlated by perturbation theory on CASSCF."""

from dataclasses import replace
from typing import Any

import numpy as np

from plumbrule_core.documents.plan import Forecast, Machine
from plumbrule_core.errors import PlumbruleError
from plumbrule_core.rungs.active.division import Division, division_of, restricted_field
from plumbrule_core.rungs.active.prices import perturbed_forecast, perturbed_memory_mb
from plumbrule_core.rungs.active.values import nitrogen_value
from plumbrule_core.rungs.correlated.reference import fitting_of, reference_name
from plumbrule_core.rungs.protocol import Given, Kind, Outcome, Published, Size, Tell

MOST_ACTIVE = 16
"""Active orbitals: the densities of four electrons grow with the eighth power of their number."""

SAME_ENERGY = 1e-5
"""Hartree within which orbitals count as degenerate."""
OFF_CENTRE = 1e-3
"""Bohr from which a place counts as off the centre of charge."""


class NEVPT2:
    """Strongly contracted. Frozen core orbitals, of lowest energy after CASSCF, are left out here alone."""

    name = "NEVPT2"
    says = "CASSCF with the remaining correlation to second order: sound shapes of curves, modest energies."
    kind: Kind = "wave function"
    needs: tuple[str, ...] = ("HF", "Active space", "CASSCF")
    rank = 25
    single_reference = False
    citation = (
        "C. Angeli, R. Cimiraglia, S. Evangelisti, T. Leininger and J.-P. Malrieu, J. Chem. Phys. 114, 10252 "
        "(2001); C. Angeli, R. Cimiraglia and J.-P. Malrieu, J. Chem. Phys. 117, 9138 (2002)"
    )
    published: tuple[Published, ...] = (
        replace(nitrogen_value("1.1", -109.090227072 - 0.156225827, "A04", atol=5e-6), slow=True),
        nitrogen_value("1.0977", -109.2462, "", atol=5e-5),
        replace(nitrogen_value("1.5", -109.0953, "", atol=5e-5), slow=True),
    )

    def forecast(self, size: Size, machine: Machine) -> Forecast:
        """Densities of the active electrons and integrals."""
        return perturbed_forecast(size, machine)

    def compute(self, given: Given, tell: Tell) -> Outcome:
        """CASSCF plus the correction; the library has no hook in it, so a stop ends the process.

        Raises PlumbruleError where CASSCF is not there or not converged, or the memory does not suffice.
        """
        bench, name = given.bench, given.spec.species.name
        done, division = bench.outcomes.get("CASSCF"), division_of(given)
        if done is None:
            raise PlumbruleError("CASSCF has not been computed, and NEVPT2 stands on its wave function")
        if not done.converged:
            raise PlumbruleError(f"CASSCF did not converge for {name}, so NEVPT2 on it would mean nothing")
        tell.progress(0.0, "perturbation theory")
        if division.active:
            _refuse_beyond(division, given)
            correction = perturbation(bench.optimised, bench.frozen)
            notes: tuple[str, ...] = ()
        else:
            correction = pairs_alone(division, given)
            notes = ("no orbital is active, where NEVPT2 is MP2",)
        tell.progress(1.0)
        energy = done.energy + correction
        return Outcome(
            energy=energy,
            reference=reference_name(bench),
            correlation=energy - float(bench.mean_field.e_tot),
            notes=notes,
            used={
                **division.used,
                "contraction": "strong",
                "correction to CASSCF": f"{correction:.8f} hartree",
                "frozen orbitals": str(bench.frozen),
                "threads": str(given.threads),
            },
            space=division.space,
        )


def perturbation(field: Any, frozen: int) -> float:
    """The second-order energy in hartree on a CASSCF or CASCI object; its lowest `frozen` orbitals left out.

    Frozen orbitals enter as part of the one-electron Hamiltonian, the library sees a molecule without.
    """
    from pyscf.mrpt import nevpt2

    orbitals, vector, energies = field.canonicalize(field.mo_coeff, ci=field.ci, cas_natorb=True)
    orbitals = aligned(orbitals, energies, field)
    core, seen = orbitals[:, :frozen], field.copy()
    seen.ncore = field.ncore - frozen
    if frozen:
        with_core = field.get_hcore() + field.get_veff(field.mol, 2 * core @ core.T)
        seen.get_hcore = lambda *_: with_core
    method = nevpt2.NEVPT(seen)
    method.canonicalized, method.ci, method.verbose = True, vector, 0
    method.mo_coeff, method.mo_energy = orbitals[:, frozen:], np.asarray(energies)[frozen:]
    return float(method.kernel())


def aligned(orbitals: np.ndarray, energies: np.ndarray, field: Any) -> np.ndarray:
    """The same orbitals with all degenerate inactive and virtual ones turned alike.

    Strong contraction is not invariant when degenerate orbitals mix (2e-6 hartree for N2), so that the energy
    would hang on rounding; along one direction in the molecule's own frame every set comes out the same.
    """
    mol, turned = field.mol, np.array(orbitals)
    direction = own_direction(mol.atom_coords(), mol.atom_charges())
    with mol.with_common_orig(mol.atom_charges() @ mol.atom_coords() / mol.atom_charges().sum()):
        moments = mol.intor_symmetric("int1e_rr", comp=9).reshape(3, 3, mol.nao, mol.nao)
    along = np.einsum("i,j,ijpq->pq", direction, direction, moments)
    occupied = field.ncore + field.ncas
    for block in (range(field.ncore), range(occupied, orbitals.shape[1])):
        for group in _degenerate(block, np.asarray(energies)):
            columns = turned[:, group]
            turned[:, group] = columns @ np.linalg.eigh(columns.T @ along @ columns)[1]
    return turned


def own_direction(places: np.ndarray, charges: np.ndarray) -> np.ndarray:
    """A direction fixed to the molecule and along none of its axes: by its two first atoms off the centre."""
    rest = places - charges @ places / charges.sum()
    found: list[np.ndarray] = []
    for candidate in (*rest, *np.eye(3)):
        for earlier in found:
            candidate = candidate - (candidate @ earlier) * earlier
        length = np.linalg.norm(candidate)
        if length > OFF_CENTRE and len(found) < 2:
            found.append(candidate / length)
    return found[0] + 0.6 * found[1]


def _degenerate(block: range, energies: np.ndarray) -> list[list[int]]:
    groups: list[list[int]] = []
    for k in block:
        if groups and abs(energies[k] - energies[groups[-1][-1]]) < SAME_ENERGY:
            groups[-1].append(k)
        else:
            groups.append([k])
    return [group for group in groups if len(group) > 1]


def pairs_alone(division: Division, given: Given) -> float:
    """What NEVPT2 is without an active orbital: the MP2 energy of the closed shell, in hartree."""
    from pyscf.mp import dfmp2, mp2

    field, filled = restricted_field(given.bench).copy(), division.inactive
    field.mo_occ = np.repeat([2.0, 0.0], [filled, division.virtual])
    fock = field.get_fock(dm=field.make_rdm1(division.coefficients, field.mo_occ))
    parts = (division.coefficients[:, :filled], division.coefficients[:, filled:])
    turns = [np.linalg.eigh(columns.T @ fock @ columns) for columns in parts]
    field.mo_coeff = np.hstack([columns @ turn for columns, (_, turn) in zip(parts, turns, strict=True)])
    field.mo_energy, field.converged = np.concatenate([energies for energies, _ in turns]), True
    fitted = given.spec.settings.density_fitting
    solver = (dfmp2.DFMP2 if fitted else mp2.RMP2)(field, frozen=given.bench.frozen or None)
    if fitted:
        solver.with_df = fitting_of(given)
    solver.verbose, solver.max_memory = 0, given.memory_mb
    return float(solver.kernel(with_t2=False)[0])


def _refuse_beyond(division: Division, given: Given) -> None:
    functions = division.coefficients.shape[0]
    needed = perturbed_memory_mb(division.active, division.inactive, functions)
    if division.active <= MOST_ACTIVE and needed <= given.memory_mb:
        return
    raise PlumbruleError(
        f"NEVPT2 with {division.active} active orbitals needs about {needed / 1000:.3g} GB of memory, but "
        f"{given.memory_mb / 1000:.3g} GB are allowed and {MOST_ACTIVE} orbitals are the most it takes; "
        "choose a smaller space"
    )
