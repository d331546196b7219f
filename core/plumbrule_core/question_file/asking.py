"""The `[question]` table: its kind first, then everything that can be judged of it."""

import difflib
from collections.abc import Collection, Mapping
from dataclasses import dataclass
from typing import Any

from plumbrule_core.documents.faults import Fault
from plumbrule_core.documents.questions import KINDS, EnergyQuestion, Question
from plumbrule_core.documents.species import Species
from plumbrule_core.question_file.tables import read_table

ASIDE = frozenset({"within", "unit"})
"""Keys that no other fault of a question depends on."""

ALIKE = 0.8
"""From 0 to 1: an unknown kind as alike as this is judged as the known one (common practice, no source)."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Asked:
    """A question as far as it could be read; `spoilt` names the keys that were wrong."""

    question: Question | None = None
    faults: tuple[Fault, ...] = ()
    spoilt: frozenset[str] = frozenset()

    def faults_among(self, named: Collection[str], species: Mapping[str, Species]) -> tuple[Fault, ...]:
        """What the species show to be wrong; `named` includes those that could not be read themselves."""
        if self.question is None:
            return ()
        if self._can_judge(named, species):
            return self.question.faults(species)
        early = self.question.early_faults(named)
        return tuple(fault for fault in early if not self._stands_in(fault.where))

    def _stands_in(self, where: str) -> bool:
        """Whether a fault is that of a stand-in, whose key has been reported already."""
        return bool(self.spoilt) and where in ("question", *(f"question.{key}" for key in self.spoilt))

    def _can_judge(self, named: Collection[str], species: Mapping[str, Species]) -> bool:
        """Whether everything that the question's own faults depend on could be read."""
        if self.question is None or self.spoilt - ASIDE:
            return False
        wanted = {name for _, name in self.question.named()} or set(named)
        return wanted.isdisjoint(set(named) - set(species))


def read_asked(table: Mapping[str, Any]) -> Asked:
    """The question of a table with every fault that needs no species."""
    named = table.get("kind")
    if isinstance(named, str) and named in KINDS:
        return _as(KINDS[named], table)
    fault = Fault(where="question.kind", says=_about(named))
    near = _nearest(named)
    if near is not None and KINDS[near].built:
        read = _as(KINDS[near], {**table, "kind": near})
        return Asked(question=read.question, faults=(fault, *read.faults), spoilt=read.spoilt)
    # Which other keys belong there depends on the kind, so only those that every kind has are judged.
    common = {key: value for key, value in table.items() if key in ASIDE}
    off = _as(EnergyQuestion, {**common, "kind": "energy"}).faults
    return Asked(faults=(fault, *off))


def _as(kind: type[Question], table: Mapping[str, Any]) -> Asked:
    read = read_table(kind, table, "question")
    faults = read.faults
    if read.value is None and not kind.built:
        faults = (*faults, kind.not_built())
    return Asked(question=read.value, faults=faults, spoilt=read.spoilt)


def _nearest(named: object) -> str | None:
    if not isinstance(named, str):
        return None
    return next(iter(difflib.get_close_matches(named.casefold().strip(), KINDS, n=1, cutoff=ALIKE)), None)


def _about(named: object) -> str:
    built = ", ".join(name for name, kind in KINDS.items() if kind.built)
    later = ", ".join(name for name, kind in KINDS.items() if not kind.built)
    there_is = f"there is {built}" + (f" (not built yet: {later})" if later else "")
    if named is None:
        return f"is missing; {there_is}"
    if not isinstance(named, str):
        return f"must be text in quotes; {there_is}"
    near = _nearest(named)
    return f"there is no kind '{named}'; {f'did you mean {near}? ' if near else ''}{there_is}"
