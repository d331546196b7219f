"""Questions as the window proposes them: every kind with sensible first values. Pure functions."""

from collections.abc import Callable, Mapping
from typing import Any, get_args

from plumbrule_core.documents.bonding import Bond, bonds, distance, pieces
from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.findings import Edit
from plumbrule_core.documents.ground_states import ground_multiplicity
from plumbrule_core.documents.questions import Question, QuestionBase
from plumbrule_core.documents.species import Species
from plumbrule_desktop.state.changes import free_name, with_species

Data = dict[str, Any]


def kinds() -> Mapping[str, str]:
    """The kinds that can be answered: their word in the file, and what the question line calls them."""
    union = get_args(get_args(Question)[0])
    return {str(one.model_fields["kind"].default): one.label for one in union if one.built}


def asked(brief: Brief, kind: str) -> tuple[Edit, ...]:
    """The edits that ask a question of this kind about the molecules at hand; at least one is needed.

    Where a second species is needed and there is none, it is made: the other spin state, the cation.
    """
    old = brief.question
    shared: Data = {"kind": kind, "within": old.within if old else 4.0, "unit": old.unit if old else "kJ/mol"}
    data, more = _FIRST[kind](brief)
    added = with_species(brief, more) if more else ()
    return (*added, Edit(path="question", value=shared | data))


def set_question(brief: Brief, **values: Any) -> tuple[Edit, ...]:
    """The question with some values changed; None takes a value away."""
    data = (brief.question.to_data() if brief.question else {}) | values
    return (Edit(path="question", value={key: value for key, value in data.items() if value is not None}),)


def cuttable(species: Species) -> tuple[Bond, ...]:
    """The bonds whose cut leaves two pieces, from 0."""
    links = bonds(species.atoms)
    count = len(species.atoms)
    whole = len(pieces(count, links))
    return tuple(
        link
        for link in links
        if len(pieces(count, [other for other in links if other != link])) == whole + 1 == 2
    )


def bond_words(species: Species, bond: Bond) -> str:
    """`N1-N2, 1.45 \u00e5ngstr\u00f6m` in plain letters."""
    i, j = bond
    first, second = species.atoms[i], species.atoms[j]
    return f"{first.symbol}{i + 1}\u2013{second.symbol}{j + 1}, {distance(first, second):.3f} \u00c5"


def _energy(brief: Brief) -> tuple[Data, tuple[Species, ...]]:
    return {"species": _main(brief).name}, ()


def _reaction(brief: Brief) -> tuple[Data, tuple[Species, ...]]:
    names = [one.name for one in brief.species]
    terms = {name: -1.0 for name in names}
    terms[names[-1]] = 1.0
    return {"terms": terms}, ()


def _bond(brief: Brief) -> tuple[Data, tuple[Species, ...]]:
    for one in sorted(brief.species, key=lambda one: -len(one.atoms)):
        found = cuttable(one)
        if found and not one.charge:
            heavy = max(found, key=lambda bond: sum(one.atoms[place].symbol != "H" for place in bond))
            return {"species": one.name, "cut": [heavy[0] + 1, heavy[1] + 1]}, ()
    return {"species": _main(brief).name, "cut": [1, 2]}, ()


def _spin_gap(brief: Brief) -> tuple[Data, tuple[Species, ...]]:
    def partner(one: Species) -> Species | None:
        same = (other for other in brief.species if other.counts == one.counts and other.charge == one.charge)
        return next((other for other in same if other.multiplicity != one.multiplicity), None)

    def pair(one: Species, other: Species) -> Data:
        low, high = sorted((one, other), key=lambda each: each.multiplicity)
        return {"low": low.name, "high": high.name}

    for one in brief.species:
        other = partner(one)
        if other is not None:
            return pair(one, other), ()
    one = _main(brief)
    multiplicity = one.multiplicity - 2 if one.multiplicity > 2 else one.multiplicity + 2
    made = _variant(brief, one, "other spin", multiplicity=multiplicity)
    return pair(one, made), (made,)


def _ionisation(brief: Brief) -> tuple[Data, tuple[Species, ...]]:
    for one in brief.species:
        for other in brief.species:
            if other.counts == one.counts and other.charge == one.charge + 1:
                return {"from": one.name, "to": other.name}, ()
    one = _main(brief)
    charge = one.charge + 1
    made = _variant(brief, one, "cation", charge=charge, multiplicity=ground_multiplicity(one.atoms, charge))
    return {"from": one.name, "to": made.name}, (made,)


def _variant(brief: Brief, one: Species, word: str, **values: Any) -> Species:
    name = free_name(f"{one.name} {word}", set(brief.by_name))
    return one.model_copy(update={"name": name, **values})


def _main(brief: Brief) -> Species:
    return brief.species[0]


_FIRST: Mapping[str, Callable[[Brief], tuple[Data, tuple[Species, ...]]]] = {
    "energy": _energy,
    "reaction": _reaction,
    "bond": _bond,
    "spin gap": _spin_gap,
    "ionisation": _ionisation,
}


def side_words(question: QuestionBase, brief: Brief) -> str:
    """What is wrong with the question, in one line, or nothing."""
    return "; ".join(fault.says for fault in question.faults(brief.by_name))
