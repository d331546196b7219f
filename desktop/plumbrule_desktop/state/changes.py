"""Changes of a brief as edits: pure functions that the controls of the window use."""

from collections.abc import Mapping
from typing import Any

from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.findings import Edit
from plumbrule_core.documents.questions import QuestionBase
from plumbrule_core.documents.species import Species


def free_name(wanted: str, taken: set[str]) -> str:
    """The wanted name, or with the first number that makes it differ from those taken."""
    stem = wanted.strip()[:76] or "molecule"
    name, number = stem, 2
    while name in taken:
        name, number = f"{stem} {number}", number + 1
    return name


def with_species(brief: Brief, more: tuple[Species, ...]) -> tuple[Edit, ...]:
    """Add species, each under a free name."""
    kept = list(brief.species)
    for one in more:
        name = free_name(one.name, {other.name for other in kept})
        kept.append(one.model_copy(update={"name": name}))
    return (_species(kept),)


def without_species(brief: Brief, name: str) -> tuple[Edit, ...]:
    """Take a species out. The question keeps its words, so that what is missing can be said."""
    return (_species([one for one in brief.species if one.name != name]),)


def duplicated(brief: Brief, name: str) -> tuple[Edit, ...]:
    """A second species with the same atoms, right after the first."""
    kept: list[Species] = []
    taken = set(brief.by_name)
    for one in brief.species:
        kept.append(one)
        if one.name == name:
            kept.append(one.model_copy(update={"name": free_name(name, taken)}))
    return (_species(kept),)


def renamed(brief: Brief, old: str, new: str) -> tuple[Edit, ...]:
    """Another name for a species, in the question too."""
    new = new.strip()
    kept = [one.model_copy(update={"name": new}) if one.name == old else one for one in brief.species]
    edits = [_species(kept)]
    if brief.question is not None and any(name == old for _, name in brief.question.named()):
        edits.append(Edit(path="question", value=_renamed_question(brief.question, old, new)))
    return tuple(edits)


def _renamed_question(question: QuestionBase, old: str, new: str) -> Mapping[str, Any]:
    data = question.to_data()
    for key, name in question.named():
        if name != old:
            continue
        first, _, rest = key.partition(".")
        if first == "terms":
            data["terms"] = {new if each == old else each: c for each, c in data["terms"].items()}
        elif first == "fragments" and rest:
            data["fragments"][int(rest) - 1] = new
        else:
            data[first] = new
    return data


def set_species(name: str, key: str, value: object) -> tuple[Edit, ...]:
    """One value of one species, as its charge."""
    return (Edit(path=f"species.{name}.{key}", value=value),)


def set_recipe(key: str, value: object) -> tuple[Edit, ...]:
    """One value of the recipe."""
    return (Edit(path=f"recipe.{key}", value=value),)


def with_rung(brief: Brief, order: tuple[str, ...], rung: str, wanted: bool) -> tuple[Edit, ...]:
    """The recipe with a rung more or fewer, in the given order."""
    chosen = set(brief.recipe.rungs) | {rung} if wanted else set(brief.recipe.rungs) - {rung}
    known = [name for name in order if name in chosen]
    return set_recipe(
        "rungs", known + [name for name in brief.recipe.rungs if name in chosen and name not in order]
    )


def _species(kept: list[Species]) -> Edit:
    return Edit(path="species", value=[one.to_data() for one in kept])
