"""What differs between two briefs, in words: for saying what a remedy has changed."""

from collections.abc import Iterator
from typing import Any

from plumbrule_core.documents.brief import Brief

WORDS = {
    "recipe.basis": "basis",
    "recipe.core": "core",
    "recipe.reference": "reference",
    "recipe.rungs": "rungs",
    "recipe.density_fitting": "density fitting",
    "recipe.relativity": "relativity",
    "question.within": "accuracy needed",
    "question.unit": "unit",
    "question.kind": "question",
    "title": "title",
}


def differences(before: Brief, after: Brief) -> tuple[str, ...]:
    """One line for each value that differs: `basis: cc-pVDZ → cc-pVTZ`."""
    old, new = dict(_leaves(_keyed(before))), dict(_leaves(_keyed(after)))
    paths = [path for path in {**old, **new} if old.get(path) != new.get(path)]
    lines = [f"{_path_words(path)}: {_value(old.get(path))} \u2192 {_value(new.get(path))}" for path in paths]
    return (*lines, *_moved(before, after))


def _keyed(brief: Brief) -> dict[str, Any]:
    data = brief.to_data()
    data["species"] = {
        one["name"]: {k: v for k, v in one.items() if k not in ("name", "atoms")} for one in data["species"]
    }
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
