"""Edits: small named changes of a brief, as a remedy or a control of the window makes them."""

from collections.abc import Iterable
from typing import Any

from pydantic import ValidationError

from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.faults import Fault, faults_of
from plumbrule_core.documents.findings import Edit
from plumbrule_core.errors import Refused


def edited(brief: Brief, edits: Iterable[Edit]) -> Brief:
    """The brief with every edit made; raises Refused where the outcome is no valid brief.

    A path is `title`, `question.within`, `recipe.rungs`, `species.water.charge`, and so on: names of species
    stand where a list would have a number. The value None takes an entry away.
    """
    data = brief.to_data()
    for edit in edits:
        _set(data, edit)
    try:
        return Brief.from_data(data)
    except ValidationError as error:
        raise Refused(faults_of(error)) from None


def _set(data: dict[str, Any], edit: Edit) -> None:
    first, *rest = edit.path.split(".")
    if first == "species" and rest:
        _set_species(data["species"], edit, ".".join(rest))
        return
    home = data
    for step in [first, *rest][:-1]:
        home = home.setdefault(step, {})
    last = [first, *rest][-1]
    if edit.value is None:
        home.pop(last, None)
    else:
        home[last] = edit.value


def _set_species(species: list[dict[str, Any]], edit: Edit, path: str) -> None:
    name, _, key = path.rpartition(".")
    for one in species:
        if one["name"] == name:
            one[key] = edit.value
            return
    raise Refused((Fault(where=edit.path, says=f"there is no species named '{name}'"),))
