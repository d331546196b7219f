"""Reading a table of a question file: what is right in it is kept, so that the rest can still be judged."""

import json
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass
from datetime import date, datetime, time
from typing import Any, Generic, TypeVar

from pydantic import ValidationError
from pydantic.fields import FieldInfo

from plumbrule_core.documents.base import Document
from plumbrule_core.documents.faults import Fault, faults_of

D = TypeVar("D", bound=Document)
LARGEST_NUMBER = 2**63
"""Whole numbers below this are the ones that every reader of TOML takes."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Table(Generic[D]):
    """A table that was read; `value` holds what is right in it, and stand-ins for the keys in `spoilt`.

    `value` is None where so much is wrong that nothing is left to judge. `spoilt` names the known keys that
    are wrong or missing; a key that is not known spoils nothing.
    """

    value: D | None
    faults: tuple[Fault, ...] = ()
    spoilt: frozenset[str] = frozenset()


def read_table(kind: type[D], data: Mapping[str, Any], where: str) -> Table[D]:
    """The table as a document of this kind, with every fault."""
    odd: list[Fault] = []
    plain = _plain(data, where, odd)
    try:
        value = kind.model_validate_json(json.dumps(plain))
    except ValidationError as error:
        at = {fault.where for fault in odd}
        faults = (*odd, *(fault for fault in faults_of(error, where) if fault.where not in at))
        return _mended(kind, plain, error, faults)
    spoilt = frozenset(fault.where.removeprefix(f"{where}.").split(".")[0] for fault in odd)
    return Table(value=value, faults=tuple(odd), spoilt=spoilt)


def _mended(
    kind: type[D], data: dict[str, Any], error: ValidationError, faults: tuple[Fault, ...]
) -> Table[D]:
    """The table without its faulty entries."""
    paths = [tuple(map(str, detail["loc"])) for detail in error.errors()]
    known = {field.alias or name: field for name, field in kind.model_fields.items()}
    kept = dict(_stand_ins(known)) | _without(data, paths)
    spoilt = frozenset(path[0] for path in paths if path) & frozenset(known)
    try:
        value = kind.model_validate_json(json.dumps(kept))
    except ValidationError:
        return Table(value=None, faults=faults, spoilt=spoilt)
    return Table(value=value, faults=faults, spoilt=spoilt)


def _stand_ins(known: Mapping[str, FieldInfo]) -> Iterator[tuple[str, object]]:
    """Values for keys that must be there, so that the others can be judged without them."""
    for key, field in known.items():
        if field.is_required() and field.annotation in (str, float):
            yield key, "" if field.annotation is str else 1.0


def _without(data: Mapping[str, Any], paths: Iterable[tuple[str, ...]]) -> dict[str, Any]:
    """A copy without what stands at the paths; a list with a faulty entry goes as a whole."""
    below: dict[str, list[tuple[str, ...]]] = {}
    for path in paths:
        below.setdefault(path[0] if path else "", []).append(path[1:])
    kept = {}
    for key, value in data.items():
        if key not in below:
            kept[key] = value
        elif isinstance(value, Mapping) and all(below[key]):
            kept[key] = _without(value, below[key])
    return kept


def _plain(value: Any, where: str, odd: list[Fault]) -> Any:
    """TOML values as JSON has them; what JSON cannot hold is left out and reported."""
    if isinstance(value, Mapping):
        held = {key: _plain(one, f"{where}.{key}", odd) for key, one in value.items()}
        return {key: one for key, one in held.items() if one is not None}
    if isinstance(value, list):
        return [_plain(one, where, odd) for one in value]
    if isinstance(value, datetime | date | time):
        odd.append(Fault(where=where, says="is a date or a time, which has no meaning here"))
        return None
    if isinstance(value, int) and abs(value) >= LARGEST_NUMBER:
        odd.append(Fault(where=where, says="is too large a number"))
        return None
    return value
