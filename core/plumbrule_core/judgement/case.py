"""What a rule sees: a frozen view over one brief, its plan and the results that are there."""

import math
from collections.abc import Mapping
from dataclasses import dataclass, field
from functools import cached_property

from plumbrule_core.basis_sets import Basis, find, frozen_orbitals
from plumbrule_core.documents.bonding import Bond, bonds
from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.plan import Machine, Plan, Settings
from plumbrule_core.documents.questions import Part, QuestionBase
from plumbrule_core.documents.recipe import Recipe
from plumbrule_core.documents.results import Reading, ReadingValue, Result
from plumbrule_core.documents.species import Species
from plumbrule_core.elements import ELEMENTS
from plumbrule_core.rungs import RUNGS, stands_on_space
from plumbrule_core.units import EnergyUnit

Key = tuple[str, str]
"""Rung and basis."""


@dataclass(frozen=True)
class SpeciesView:
    """One species of the question with what was computed for it; bases from the smallest to the largest."""

    species: Species
    results: Mapping[Key, Result]
    bases: tuple[str, ...]
    correlated_electrons: int

    @property
    def name(self) -> str:
        """The name of the species."""
        return self.species.name

    def energy(self, rung: str, basis: str | None = None) -> float | None:
        """Energy in hartree at one basis, or at the largest that has it."""
        for one in (basis,) if basis else self.bases[::-1]:
            if one is not None and (result := self.results.get((rung, one))):
                return result.energy
        return None

    @cached_property
    def energies(self) -> Mapping[str, float]:
        """Rung to energy in hartree, each at the largest basis that has it, in the order of the ladder.

        What a detection computes is compared with nothing, so it is left out.
        """
        computed = (rung for rung, _ in self.results if RUNGS[rung].kind != "detection")
        found = {rung: self.energy(rung) for rung in dict.fromkeys(computed)}
        return {rung: energy for rung, energy in found.items() if energy is not None}

    @cached_property
    def readings(self) -> Mapping[str, Reading]:
        """The readings by name, each from the largest basis that has it."""
        return {
            reading.name: reading
            for basis in self.bases
            for (_, at), result in self.results.items()
            if at == basis
            for reading in result.readings
        }

    def number(self, name: str) -> float | None:
        """A reading that is one number, or None where it was not taken."""
        value: ReadingValue | None = self.readings[name].value if name in self.readings else None
        return None if value is None or isinstance(value, bool | tuple) else float(value)

    def flag(self, name: str) -> bool | None:
        """A reading that is true or false, or None where it was not taken."""
        value = self.readings[name].value if name in self.readings else None
        return value if isinstance(value, bool) else None

    @property
    def closed_shell(self) -> bool:
        """Whether no electron is unpaired."""
        return self.species.multiplicity == 1

    @cached_property
    def bonds(self) -> tuple[Bond, ...]:
        """Pairs of bonded atoms, numbered from 0."""
        return bonds(self.species.atoms)

    @cached_property
    def has_metal(self) -> bool:
        """Whether a transition metal is there, for which the limits of the diagnostics differ."""
        return any(ELEMENTS[atom.symbol].is_transition_metal for atom in self.species.atoms)

    @property
    def exact_from_ccsd(self) -> bool:
        """Whether at most two electrons are correlated, so that CISD and CCSD are exact."""
        return self.correlated_electrons <= 2

    def inexact(self, rung: str) -> bool:
        """Whether the rung leaves something out.

        Of two electrons only HF, MP2, the functionals and what works in an active space do.
        """
        partial = rung in ("HF", "MP2") or RUNGS[rung].kind != "wave function" or stands_on_space(rung)
        return not self.exact_from_ccsd or partial

    @property
    def share_of_triples(self) -> float | None:
        """(T) divided by the whole correlation energy; None for two electrons or where not computed."""
        return None if self.exact_from_ccsd else self.number("share_of_triples")


def _identity(species: Species) -> tuple[str, str]:
    """The content as well as the name: two species of one name must never share their energies."""
    return species.name, species.content


def _is_ground(atom: Species) -> bool:
    ground = ELEMENTS[atom.atoms[0].symbol].ground_multiplicity
    return atom.charge == 0 and atom.multiplicity == ground


@dataclass(frozen=True, slots=True)
class Standing:
    """What the answer stands on, once that is known; sizes in the user's unit.

    `uncertainty` is None where there is no bar.
    """

    rung: str
    value: float
    uncertainty: float | None = None
    largest_cause: str = ""


@dataclass(frozen=True)
class Case:
    """Everything that a rule may look at."""

    brief: Brief
    plan: Plan
    results: Mapping[str, Result]
    machine: Machine | None = None
    standing: Standing | None = None
    failed: Mapping[str, str] = field(default_factory=dict)
    """Identity of each task that failed, or was not run because another did, to the reason."""

    @property
    def recipe(self) -> Recipe:
        """The recipe of the brief."""
        return self.brief.recipe

    @property
    def question(self) -> QuestionBase | None:
        """The question, or None while none is asked."""
        return self.brief.question

    @property
    def unit(self) -> EnergyUnit:
        """The user's unit."""
        return self.question.unit if self.question else "kJ/mol"

    @cached_property
    def parts(self) -> tuple[Part, ...]:
        """The sum that answers the question; empty where the brief is at fault."""
        if self.question is None or self.brief.faults():
            return ()
        return self.question.parts(self.brief.by_name)

    @cached_property
    def species(self) -> tuple[Species, ...]:
        """The species of the question, each once; all of the brief while the question is at fault."""
        if not self.parts:
            return self.brief.species
        return tuple({_identity(part.species): part.species for part in self.parts}.values())

    @cached_property
    def bases(self) -> tuple[Basis, ...]:
        """The known basis sets of the recipe, the smallest first."""
        found = {basis.name: basis for basis in map(find, self.recipe.basis) if basis is not None}
        return tuple(sorted(found.values(), key=lambda basis: (basis.cardinal or basis.zeta, basis.name)))

    @property
    def largest(self) -> Basis | None:
        """The largest basis set, or None where no name is known."""
        return self.bases[-1] if self.bases else None

    @cached_property
    def settings(self) -> Mapping[str, Settings]:
        """The settings of each level by its digest, as the plan has them."""
        return {task.spec.settings.level: task.spec.settings for task in self.plan.tasks}

    @cached_property
    def rungs(self) -> tuple[str, ...]:
        """The rungs that are planned and known, wave functions by rank first, then functionals."""
        planned = dict.fromkeys([*(task.spec.rung for task in self.plan.tasks), *self.recipe.rungs])
        known = [name for name in planned if name in RUNGS]
        return tuple(sorted(known, key=lambda name: (RUNGS[name].kind != "wave function", RUNGS[name].rank)))

    @property
    def wave_functions(self) -> tuple[str, ...]:
        """The rungs of the ladder proper, the best last."""
        return tuple(name for name in self.rungs if RUNGS[name].kind == "wave function")

    @property
    def single_reference(self) -> tuple[str, ...]:
        """The rungs that stand on one determinant, functionals included."""
        return tuple(name for name in self.rungs if RUNGS[name].single_reference)

    def doubtful(self, view: SpeciesView) -> tuple[str, ...]:
        """The rungs that stand on one determinant and are not exact for this species all the same."""
        return tuple(name for name in self.single_reference if view.inexact(name))

    @cached_property
    def _by_content(self) -> Mapping[str, Mapping[Key, Result]]:
        found: dict[str, dict[Key, Result]] = {}
        for task in self.plan.tasks:
            if result := self.results.get(task.id):
                key = (task.spec.rung, task.spec.settings.basis)
                found.setdefault(task.spec.species.content, {})[key] = result
        return found

    @cached_property
    def views(self) -> tuple[SpeciesView, ...]:
        """The species of the question with their results."""
        return tuple(self.view(one) for one in self.species)

    @cached_property
    def _views(self) -> dict[tuple[str, str], SpeciesView]:
        return {}

    def view(self, species: Species) -> SpeciesView:
        """One species with its results."""
        known = _identity(species)
        if known not in self._views:
            self._views[known] = self._seen(species)
        return self._views[known]

    def _seen(self, species: Species) -> SpeciesView:
        names = tuple(basis.name for basis in self.bases)
        return SpeciesView(
            species, self._by_content.get(species.content, {}), names, self._correlated(species)
        )

    def _correlated(self, species: Species) -> int:
        symbols = [atom.symbol for atom in species.atoms]
        if self.largest is None or self.largest.missing(symbols):
            return species.electrons
        hidden = sum(self.largest.potential_electrons(symbol) for symbol in symbols)
        frozen = 2 * frozen_orbitals(symbols, self.largest) if self.recipe.core == "frozen" else 0
        return species.electrons - hidden - frozen

    @cached_property
    def pending(self) -> int:
        """How many tasks of the plan have no result and can still get one."""
        return sum(task.id not in self.results and task.id not in self.failed for task in self.plan.tasks)

    @cached_property
    def _atoms(self) -> Mapping[str, SpeciesView]:
        found: dict[str, SpeciesView] = {}
        for task in self.plan.tasks:
            one = task.spec.species
            if len(one.atoms) == 1 and _is_ground(one):
                found.setdefault(one.atoms[0].symbol, self.view(one))
        return found

    def atomisation(self, view: SpeciesView, rung: str, basis: str) -> float | None:
        """The energy in hartree of all atoms minus the molecule; None where an atom was not computed."""
        whole = view.energy(rung, basis)
        if whole is None or len(view.species.atoms) < 2 or view.species.charge:
            return None
        atoms = [
            self._atoms[a.symbol].energy(rung, basis) if a.symbol in self._atoms else None
            for a in view.species.atoms
        ]
        known = [energy for energy in atoms if energy is not None]
        return math.fsum(known) - whole if len(known) == len(atoms) else None

    def tae_triples(self, view: SpeciesView) -> float | None:
        """%TAE[(T)]: what (T) adds to the atomisation energy, in per cent of it; None where undefined.

        100 (TAE[CCSD(T)] - TAE[CCSD]) / TAE[CCSD(T)] (Karton et al., J. Chem. Phys. 125, 144108 (2006)).
        """
        for basis in view.bases[::-1]:
            full, doubles = (self.atomisation(view, rung, basis) for rung in ("CCSD(T)", "CCSD"))
            if full is not None and doubles is not None:
                return 100 * (full - doubles) / full if full > 0 else None
        return None
