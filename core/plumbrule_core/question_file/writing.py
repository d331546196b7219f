"""A brief as the TOML that runs again: geometries inline, numbers with every digit."""

import json
import re
from collections.abc import Iterator, Mapping
from typing import Any

from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.recipe import Recipe
from plumbrule_core.documents.species import Species


def write_question(brief: Brief) -> str:
    """The question file of a brief; reading it back gives an equal brief.

    A multiplicity that was assumed is written out, so that every version computes the same.
    """
    sections = (_question(brief), *(_species(one) for one in brief.species), *_recipe(brief.recipe))
    return "\n\n".join("\n".join(section) for section in sections if section) + "\n"


def _question(brief: Brief) -> list[str]:
    title = {"title": brief.title} if brief.title else {}
    asked = brief.question.to_data() if brief.question is not None else {}
    return _section("question", title | asked) if title or asked else []


def _species(species: Species) -> list[str]:
    lines = "\n".join(f"{a.symbol} {_value(a.x)} {_value(a.y)} {_value(a.z)}" for a in species.atoms)
    return [
        f"[species.{_key(species.name)}]",
        f'xyz = """\n{lines}\n"""',
        f"charge = {species.charge}",
        f"multiplicity = {species.multiplicity}{'  # not given; assumed' if species.assumption else ''}",
        *_pairs({"origin": species.origin} if species.origin else {}),
    ]


def _recipe(recipe: Recipe) -> Iterator[list[str]]:
    data = recipe.to_data()
    if len(data["basis"]) == 1:
        data["basis"] = data["basis"][0]
    yield _section("recipe", {key: value for key, value in data.items() if not isinstance(value, dict)})
    for key, value in data.items():
        if isinstance(value, dict):
            yield _section(f"recipe.{key}", value)


def _section(name: str, data: Mapping[str, Any]) -> list[str]:
    return [f"[{name}]", *_pairs(data)]


def _pairs(data: Mapping[str, Any]) -> list[str]:
    return [f"{_key(key)} = {_value(value)}" for key, value in data.items()]


def _key(key: str) -> str:
    return key if re.fullmatch(r"[A-Za-z0-9_-]+", key) else _text(key)


def _value(value: object) -> str:
    if isinstance(value, Mapping):
        return "{ " + ", ".join(_pairs(value)) + " }"
    if isinstance(value, (list, tuple)):
        return "[" + ", ".join(_value(one) for one in value) + "]"
    return _text(value) if isinstance(value, str) else json.dumps(value, allow_nan=False)


def _text(text: str) -> str:
    return json.dumps(text, ensure_ascii=False).replace("\x7f", "\\u007f")
