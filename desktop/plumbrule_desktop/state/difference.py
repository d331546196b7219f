"""What differs between two briefs, and what is wrong with one, in words without the keys of a file."""

from collections.abc import Iterator
from typing import Any

from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.faults import Fault
from plumbrule_desktop.state.amounts import unit_words

WORDS = {
    "recipe.basis": "basis",
    "recipe.core": "core",
    "recipe.reference": "reference",
    "recipe.rungs": "rungs",
    "recipe.density_fitting": "density fitting",
    "recipe.relativity": "relativity",
    "question.within": "accuracy needed",
    "question.kind": "question",
    "title": "title",
}


def differences(before: Brief, after: Brief) -> tuple[str, ...]:
    """One line for each value that differs: `basis: cc-pVDZ → cc-pVTZ`."""
    old, new = dict(_leaves(_keyed(before))), dict(_leaves(_keyed(after)))
    paths = [path for path in {**old, **new} if old.get(path) != new.get(path)]
    lines = [f"{_path_words(path)}: {_value(old.get(path))} \u2192 {_value(new.get(path))}" for path in paths]
    return (*lines, *_moved(before, after))


def needs_only(before: Brief, after: Brief) -> bool:
    """Whether nothing but the accuracy needed, its unit or the title differs: no number changes by that."""
    if before.question is None or after.question is None:
        return False
    need = {"within": after.question.within, "unit": after.question.unit}
    same = {"question": before.question.model_copy(update=need), "title": after.title}
    return before.model_copy(update=same) == after


def fault_words(fault: Fault) -> str:
    """A fault as a sentence, with the name of what it stands at in place of its key."""
    place = "" if fault.where.split(".")[0] in ("", "question") else f"{_path_words(fault.where)}: "
    words = f"{place}{fault.says}"
    return f"{words[:1].upper()}{words[1:]}" + ("" if words.endswith((".", "?", "!")) else ".")


def _keyed(brief: Brief) -> dict[str, Any]:
    data = brief.to_data()
    data["species"] = {
        one["name"]: {k: v for k, v in one.items() if k not in ("name", "atoms")} for one in data["species"]
    }
    question = data.get("question")
    if question:
        question["within"] = f"{question['within']:g} {unit_words(question.pop('unit'))}"
    return data


def _leaves(data: dict[str, Any], path: str = "") -> Iterator[tuple[str, Any]]:
    for key, value in data.items():
        here = f"{path}.{key}" if path else key
        if isinstance(value, dict):
            yield from _leaves(value, here)
        else:
            yield here, value


def _moved(before: Brief, after: Brief) -> Iterator[str]:
    for name, species in after.by_name.items():
        old = before.by_name.get(name)
        if old is not None and old.atoms != species.atoms:
            yield f"{name}: its atoms"


def _path_words(path: str) -> str:
    if path in WORDS:
        return WORDS[path]
    first, *rest = path.split(".")
    if first == "species" and rest:
        return f"{'.'.join(rest[:-1])}, {rest[-1].replace('_', ' ')}" if len(rest) > 1 else rest[0]
    return " ".join(rest or [first]).replace("_", " ")


def _value(value: object) -> str:
    if value is None:
        return "none"
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, list):
        return ", ".join(str(one) for one in value) or "none"
    return f"{value:g}" if isinstance(value, float) else str(value)
