"""Is the solution a minimum? Stability, following, and the depth of what lies below a restricted one.

Methods: R. Seeger and J. A. Pople, J. Chem. Phys. 66, 3045 (1977); R. Bauernschmitt and R. Ahlrichs,
J. Chem. Phys. 104, 9047 (1996).
"""

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from plumbrule_core.rungs.protocol import Stability
from plumbrule_core.rungs.scf.ladder import descend
from plumbrule_core.rungs.scf.watch import Watch
from plumbrule_core.units import KJ_PER_HARTREE

UNSTABLE = -1e-4
"""Lowest eigenvalue of the orbital Hessian (hartree) below which a solution is called unstable.

Small negative values are rotations that cost nothing, as those of a p shell (common practice, no source).
"""
RESIDUAL = 3e-3
"""Norm of the residual of an eigenvector, in hartree.

At ten times as much the lowest eigenvalue of NO2, FeO and stretched N2 in UHF was missed; at this value all
of the twelve cases tried were right.
"""
LOWER = 1e-6
"""A followed solution counts where it lies lower by at least this many hartree."""
MOST_FOLLOWED = 4
STEP = 0.5
"""First step along an unstable direction, in radians."""
STEPS = (STEP, -STEP, 2 * STEP, -2 * STEP)
"""The steps tried one after the other; a longer one leaves a saddle that a short one falls back to."""
FLAT = -1e-3
"""Below this eigenvalue (hartree) a direction is steep: that no way down was found does not make it flat."""

Vector = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Mode:
    """The lowest direction of the orbital Hessian."""

    value: float
    direction: Vector

    @property
    def unstable(self) -> bool:
        """Whether the energy falls along it."""
        return self.value < UNSTABLE


def follow(mean_field: Any, watch: Watch | None) -> tuple[bool, tuple[str, ...]]:
    """Follow internal instabilities down; returns whether the end is stable, and what happened in words.

    A direction that is barely unstable and along which the energy stays the same is no instability.
    """
    notes: list[str] = []
    for _ in range(MOST_FOLLOWED):
        mode = internal_mode(mean_field)
        if mode is None or not mode.unstable:
            return True, tuple(notes)
        gain = _gained(mean_field, mode, watch)
        if gain is None:
            notes.append("an instability of the solution could not be followed to a lower one")
            return False, tuple(notes)
        if gain < LOWER:
            return True, tuple(notes)
        notes.append(
            f"the first solution was not a minimum; followed to one {gain * KJ_PER_HARTREE:.2f} kJ/mol lower "
            f"({gain:.6f} hartree)"
        )
    mode = internal_mode(mean_field)
    return mode is None or not mode.unstable, tuple(notes)


def _gained(mean_field: Any, mode: Mode, watch: Watch | None) -> float | None:
    """Go down along a mode; returns the gain in hartree, 0 where it is flat, None where no step helped."""
    before = _kept(mean_field)
    for step in STEPS:
        if watch is not None:
            watch.begin("following an instability")
        descend(mean_field, watch, orbitals=_moved(mean_field, step * mode.direction))
        gain = float(before["e_tot"] - mean_field.e_tot)
        if mean_field.converged and gain >= LOWER:
            return gain
        flat = mean_field.converged and abs(gain) < LOWER and mode.value > FLAT
        _put_back(mean_field, before)
        if flat:
            return 0.0
    return None


def settle(mean_field: Any, watch: Watch) -> tuple[Stability, tuple[str, ...]]:
    """Bring a field of HF to a minimum of its kind, and measure what lies below it; says what happened.

    A closed shell that is safely stable towards UHF is a minimum of its own kind too, which spares the second
    search: the singlet Hessian is the triplet one plus 4 (ia|jb), a matrix without negative eigenvalues
    (Seeger and Pople, the matrices of real RHF). Hybrid functionals have no such bound.
    """
    if mean_field.istype("UHF") or mean_field.istype("ROHF"):
        stable, notes = follow(mean_field, watch)
        return analyse(mean_field, stable), notes
    outward = external_mode(mean_field)
    if outward is None or outward.value > -UNSTABLE:
        return analyse(mean_field, True, outward), ()
    stable, notes = follow(mean_field, watch)
    return analyse(mean_field, stable, external_mode(mean_field) if notes else outward), notes


def analyse(mean_field: Any, internal: bool, mode: Mode | None = None) -> Stability:
    """What the readings need: external stability and depth of a restricted solution, natural occupations.

    `mode` is the lowest one of a restricted solution towards unrestricted ones, None where none can rotate.
    """
    if mean_field.istype("UHF"):
        return Stability(internal=internal, natural_occupations=natural_occupations(mean_field))
    if mean_field.istype("ROHF"):
        return Stability(internal=internal)
    if mode is None or not mode.unstable:
        return Stability(internal=internal, external=True, depth=0.0, natural_occupations=_paired(mean_field))
    unrestricted = _broken(mean_field, mode.direction)
    depth = max(float(mean_field.e_tot - unrestricted.e_tot), 0.0)
    return Stability(
        internal=internal, external=False, depth=depth, natural_occupations=natural_occupations(unrestricted)
    )


def internal_mode(mean_field: Any) -> Mode | None:
    """The lowest direction within solutions of the same kind; None where no orbital can rotate."""
    from pyscf.soscf import newton_ah

    if _rotations(mean_field) == 0:
        return None
    kind = "uhf" if mean_field.istype("UHF") else "rohf" if mean_field.istype("ROHF") else "rhf"
    generate = getattr(newton_ah, f"gen_g_hop_{kind}")
    _, times_hessian, diagonal = generate(mean_field, mean_field.mo_coeff, mean_field.mo_occ)
    return _lowest(lambda x: 2 * times_hessian(x), 2 * diagonal)


def external_mode(mean_field: Any) -> Mode | None:
    """The lowest direction from a restricted towards an unrestricted solution (the triplet Hessian)."""
    if _rotations(mean_field) == 0:
        return None
    filled, empty = mean_field.mo_occ > 0, mean_field.mo_occ == 0
    occupied, virtual = mean_field.mo_coeff[:, filled], mean_field.mo_coeff[:, empty]
    fock = mean_field.mo_coeff.T @ mean_field.get_fock() @ mean_field.mo_coeff
    inner, outer = fock[np.ix_(filled, filled)], fock[np.ix_(empty, empty)]
    response = mean_field.gen_response(singlet=False, hermi=1)

    def times_hessian(x: Vector) -> Vector:
        x = x.reshape(virtual.shape[1], occupied.shape[1])
        half = virtual @ (2 * x) @ occupied.T
        return np.asarray(outer @ x - x @ inner + virtual.T @ response(half + half.T) @ occupied).ravel()

    return _lowest(times_hessian, (np.diag(outer)[:, None] - np.diag(inner)).ravel())


def natural_occupations(mean_field: Any) -> tuple[float, ...]:
    """Natural occupations of the total density, largest first."""
    values, vectors = np.linalg.eigh(mean_field.get_ovlp())
    root = (vectors * np.sqrt(np.clip(values, 0, None))) @ vectors.T
    density = np.asarray(mean_field.make_rdm1())
    total = density.sum(axis=0) if density.ndim == 3 else density
    return tuple(float(n) for n in np.linalg.eigvalsh(root @ total @ root)[::-1])


def _lowest(times_hessian: Callable[[Vector], Vector], diagonal: Vector) -> Mode:
    from pyscf import lib

    def precondition(residual: Vector, value: float, *_: object) -> Vector:
        gap = diagonal - value
        gap[np.abs(gap) < 1e-8] = 1e-8
        return np.asarray(residual / gap)

    _, values, vectors = lib.davidson1(
        lambda xs: [times_hessian(x) for x in xs],
        _starts(diagonal),
        precondition,
        tol=RESIDUAL**2,
        tol_residual=RESIDUAL,
        max_cycle=60,
        verbose=0,
    )
    return Mode(float(values[0]), np.asarray(vectors[0]))


def _starts(diagonal: Vector) -> list[Vector]:
    """The three cheapest single rotations, and one that holds every symmetry so that none is missed."""
    cheapest = np.argsort(diagonal)[:3]
    units = [np.eye(1, diagonal.size, int(k)).ravel() for k in cheapest]
    if diagonal.size <= 3:
        return units
    mixed = np.random.default_rng(7).standard_normal(diagonal.size) / np.maximum(np.abs(diagonal), 0.1)
    return [*units, mixed / np.linalg.norm(mixed)]


def _rotations(mean_field: Any) -> int:
    from pyscf.scf.hf import uniq_var_indices

    return sum(int(uniq_var_indices(occupation).sum()) for occupation in np.atleast_2d(mean_field.mo_occ))


def _moved(mean_field: Any, direction: Vector) -> Any:
    if not mean_field.istype("UHF"):
        return _rotated(mean_field.mo_coeff, mean_field.mo_occ, direction)
    from pyscf.scf.hf import uniq_var_indices

    cut = int(uniq_var_indices(mean_field.mo_occ[0]).sum())
    parts = (direction[:cut], direction[cut:])
    return np.array([_rotated(mean_field.mo_coeff[s], mean_field.mo_occ[s], parts[s]) for s in (0, 1)])


def _rotated(orbitals: Any, occupation: Any, amounts: Vector) -> Any:
    from pyscf.scf.hf import uniq_var_indices
    from scipy.linalg import expm

    rotation = np.zeros((len(occupation), len(occupation)))
    rotation[uniq_var_indices(occupation)] = amounts
    return orbitals @ expm(rotation - rotation.T)


def _broken(mean_field: Any, direction: Vector) -> Any:
    unrestricted = mean_field.to_uhf()
    unrestricted.mo_occ = np.array([mean_field.mo_occ / 2] * 2)
    unrestricted.conv_tol, unrestricted.conv_tol_grad = 1e-8, 1e-4
    half = STEP * direction
    occupation = unrestricted.mo_occ[0]
    orbitals = np.array([_rotated(mean_field.mo_coeff, occupation, sign * half) for sign in (1, -1)])
    descend(unrestricted, None, orbitals=orbitals)
    follow(unrestricted, None)
    return unrestricted


def _paired(mean_field: Any) -> tuple[float, ...]:
    return tuple(sorted((float(n) for n in mean_field.mo_occ), reverse=True))


def _kept(mean_field: Any) -> dict[str, Any]:
    return {
        name: getattr(mean_field, name) for name in ("converged", "e_tot", "mo_energy", "mo_coeff", "mo_occ")
    }


def _put_back(mean_field: Any, kept: dict[str, Any]) -> None:
    for name, value in kept.items():
        setattr(mean_field, name, value)
