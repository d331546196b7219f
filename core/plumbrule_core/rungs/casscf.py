"""CASSCF: the active space solved exactly, with the orbitals that suit it best."""

from collections.abc import Mapping
from dataclasses import replace

import numpy as np

from plumbrule_core.documents.plan import Forecast, Machine
from plumbrule_core.rungs.active.counts import refuse_beyond
from plumbrule_core.rungs.active.division import Division, division_of
from plumbrule_core.rungs.active.optimise import Optimised, Watch, casscf_object, optimise
from plumbrule_core.rungs.active.prices import optimised_forecast
from plumbrule_core.rungs.active.starts import starts
from plumbrule_core.rungs.active.states import lowest
from plumbrule_core.rungs.active.values import nitrogen_value
from plumbrule_core.rungs.active.wording import (
    character_words,
    gap_words,
    leading_of_vector,
    leading_words,
    occupation_words,
)
from plumbrule_core.rungs.casci import one_determinant
from plumbrule_core.rungs.correlated.reference import reference_name
from plumbrule_core.rungs.protocol import Given, Kind, Outcome, Published, Size, Tell


class CASSCF:
    """State-specific: the lowest state of the species' spin; inactive orbitals are optimised, core too."""

    name = "CASSCF"
    says = "The active space solved exactly in orbitals made for it; the rest is left uncorrelated."
    kind: Kind = "wave function"
    needs: tuple[str, ...] = ("HF", "Active space")
    rank = 4
    single_reference = False
    citation = (
        "B. O. Roos, P. R. Taylor and P. E. M. Siegbahn, Chem. Phys. 48, 157 (1980); Q. Sun, J. Yang and "
        "G. K.-L. Chan, Chem. Phys. Lett. 683, 291 (2017)"
    )
    published: tuple[Published, ...] = (
        nitrogen_value("1.1", -109.090227072, "A04", atol=1e-7),
        replace(nitrogen_value("1.0977", -109.0900257023, "E07", atol=1e-7), slow=True),
        replace(nitrogen_value("1.6", -108.8832844863, "E08", atol=1e-7), slow=True),
    )

    def forecast(self, size: Size, machine: Machine) -> Forecast:
        """Macro iterations of integrals, diagonalisation and rotations."""
        return optimised_forecast(size, machine)

    def compute(self, given: Given, tell: Tell) -> Outcome:
        """The energy, natural orbitals and occupations; leaves the CASSCF object on the bench.

        Raises PlumbruleError where the space is beyond memory or does not fit the molecule, and Stopped.
        """
        given.bench.optimised = None
        division = division_of(given)
        if not division.active:
            return one_determinant(division, given)
        refuse_beyond(
            division.active,
            *division.electrons,
            given.memory_mb,
            f"the active space {division.space.label} of {given.spec.species.name}",
            "choose a smaller space",
        )
        stored = _usable(given.shelf.load() or {}, division)
        watch, orbitals, notes = _begin(stored, division, given, tell)
        if not division.inactive and not division.virtual:
            return _outcome(_without_rotations(division, given), division, watch, given, notes)
        found = optimise(division, orbitals, str(stored.get("stage", "")), given, watch)
        tell.checkpoint("optimised orbitals")
        return _outcome(found, division, watch, given, notes)


def _usable(stored: Mapping[str, np.ndarray], division: Division) -> Mapping[str, np.ndarray]:
    """The checkpoint where it holds orbitals of this molecule and basis, else nothing."""
    wanted, shape = {"orbitals", "begun_with", "start", "stage", "iterations"}, division.coefficients.shape
    return stored if wanted <= stored.keys() and stored["orbitals"].shape == shape else {}


def _begin(
    stored: Mapping[str, np.ndarray], division: Division, given: Given, tell: Tell
) -> tuple[Watch, np.ndarray, tuple[str, ...]]:
    """The watch, the orbitals to start from, and what is to be noted of them."""
    if stored:
        watch = Watch(
            given.shelf, tell, str(stored["start"]), stored["begun_with"], int(stored["iterations"])
        )
        notes: tuple[str, ...] = (f"carried on from iteration {watch.iterations}",)
        orbitals = np.asarray(stored["orbitals"])
    else:
        found = starts(division, given)
        watch = Watch(given.shelf, tell, found[0].words, found[0].orbitals)
        notes = tuple(f"not taken as the start: {start.words}" for start in found[1:])
        orbitals = found[0].orbitals
    for note in notes:
        tell.note(note)
    return watch, orbitals, notes


def _without_rotations(division: Division, given: Given) -> Optimised:
    """Where every orbital is active there is nothing to optimise."""
    field = casscf_object(division, given)
    state = lowest(field, division.coefficients, given)
    field.mo_coeff, field.ci, field.e_tot, field.converged = (
        division.coefficients,
        state.vector,
        state.energy,
        True,
    )
    return Optimised(field=field, converged=True, measure="nothing to optimise", state=state)


def _outcome(
    found: Optimised, division: Division, watch: Watch, given: Given, notes: tuple[str, ...]
) -> Outcome:
    field, energy = found.field, float(found.field.e_tot)
    orbitals, vector, occupations = field.cas_natorb(field.mo_coeff, field.ci, sort=False)[:3]
    # In natural orbitals, the fullest first, as the library leaves them.
    field.mo_coeff, field.ci = orbitals, vector
    given.bench.optimised = field if found.converged else None
    active = np.asarray(occupations)[division.block]
    leading = leading_of_vector(vector, division.active, division.electrons)
    begun = watch.begun_with[:, division.block]
    kept = np.linalg.svd(begun.T @ field._scf.get_ovlp() @ orbitals[:, division.block], compute_uv=False)
    failed = () if found.converged else (f"CASSCF did not converge in {watch.iterations} iterations",)
    return Outcome(
        energy=energy,
        reference=reference_name(given.bench),
        correlation=energy - float(given.bench.mean_field.e_tot),
        converged=found.converged,
        iterations=watch.iterations,
        notes=(
            *failed,
            *notes,
            *found.followed,
            leading_words(leading, division.active),
            *occupation_words(active),
            *character_words(kept),
            *gap_words(found.state.gap),
        ),
        used={
            **division.used,
            "starting orbitals": watch.start,
            "converged with": found.measure,
            "least overlap of the active orbitals with their start": f"{kept.min():.3f}",
            "inactive orbitals": "optimised too, the core among them",
            "energy tolerance": f"{field.conv_tol:g} hartree",
            "threads": str(given.threads),
        },
        arrays={"orbitals": np.asarray(orbitals), "active_occupations": active},
        space=division.space,
    )
