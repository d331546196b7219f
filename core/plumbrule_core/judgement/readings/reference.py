"""After HF: is it the right solution, and does it look like one determinant?

Stability: R. Seeger and J. A. Pople, J. Chem. Phys. 66, 3045 (1977). Natural occupations of the unrestricted
solution: P. Pulay and T. P. Hamilton, J. Chem. Phys. 88, 4926 (1988).
"""

from typing import Any

import numpy as np

from plumbrule_core.documents.plan import TaskSpec
from plumbrule_core.documents.results import Reading
from plumbrule_core.judgement.readings.family import Family
from plumbrule_core.rungs.protocol import Bench, Stability
from plumbrule_core.units import PER_HARTREE


def measure(bench: Bench, spec: TaskSpec) -> tuple[Reading, ...]:
    """Spin, stability, gap and basis of the field on the bench."""
    field = bench.mean_field
    return (*_spin(field, spec), *_stability(field, bench.stability), *_gap(field), *_basis(field))


def fractional(occupations: tuple[float, ...], doubly: int, singly: int) -> float | None:
    """The largest min(n, 2 - n) among orbitals that should be paired or empty; None where there are none."""
    paired = [*occupations[:doubly], *occupations[doubly + singly :]]
    return max((max(min(n, 2 - n), 0.0) for n in paired), default=None)


def _spin(field: Any, spec: TaskSpec) -> tuple[Reading, ...]:
    found = float(field.spin_square()[0])
    half = spec.species.unpaired / 2
    ideal = half * (half + 1)
    return (
        Reading(name="s2", value=found),
        Reading(name="s2_ideal", value=ideal),
        Reading(name="s2_excess", value=found - ideal),
    )


def _stability(field: Any, found: Stability | None) -> tuple[Reading, ...]:
    if found is None:
        return ()
    readings = [Reading(name="stable", value=found.internal)]
    if found.external is not None:
        readings.append(Reading(name="stable_external", value=found.external))
    if found.depth is not None:
        readings.append(Reading(name="instability_depth", value=found.depth, unit="hartree"))
    occupations = found.natural_occupations
    if occupations is not None:
        alpha, beta = field.mol.nelec
        readings.append(Reading(name="uhf_natural_occupations", value=occupations, unit="electrons"))
        if (most := fractional(occupations, min(alpha, beta), abs(alpha - beta))) is not None:
            readings.append(Reading(name="uhf_fractional", value=most, unit="electrons"))
    return tuple(readings)


def _gap(field: Any) -> tuple[Reading, ...]:
    gaps = []
    for energies, occupation in zip(
        *(np.atleast_2d(x) for x in (field.mo_energy, field.mo_occ)), strict=True
    ):
        filled, empty = energies[occupation > 0], energies[occupation == 0]
        if filled.size and empty.size:
            gaps.append(float(empty.min() - filled.max()))
    if not gaps:
        return ()
    return (Reading(name="homo_lumo_gap", value=min(gaps) * PER_HARTREE["eV"], unit="eV"),)


def _basis(field: Any) -> tuple[Reading, ...]:
    smallest = float(np.linalg.eigvalsh(field.get_ovlp())[0])
    removed = field.mol.nao - np.shape(field.mo_coeff)[-1]
    return (
        Reading(name="overlap_condition", value=smallest),
        Reading(name="removed_functions", value=float(removed), unit="functions"),
    )


REFERENCE = Family(
    after="HF",
    names=(
        "s2",
        "s2_ideal",
        "s2_excess",
        "stable",
        "stable_external",
        "instability_depth",
        "uhf_natural_occupations",
        "uhf_fractional",
        "homo_lumo_gap",
        "overlap_condition",
        "removed_functions",
    ),
    citation="R. Seeger and J. A. Pople, J. Chem. Phys. 66, 3045 (1977)",
    measure=measure,
)
