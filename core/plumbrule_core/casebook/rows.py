"""Documents in rows: written with a digest, validated when read, so that one damaged row hides no other."""

import hashlib
from collections.abc import Callable, Iterable
from typing import TypeVar

from pydantic import ValidationError

from plumbrule_core.documents.base import Document
from plumbrule_core.documents.faults import faults_of
from plumbrule_core.errors import CasebookError

D = TypeVar("D", bound=Document)
Key = TypeVar("Key", int, str)


def digest_of_row(key: int | str, text: str) -> str:
    """Twenty hexadecimal digits that tell whether a row is still what was written."""
    return hashlib.sha256(f"{key} {text}".encode()).hexdigest()[:20]


def parsed(model: type[D], text: str, what: str) -> D:
    """The document; raises CasebookError that names `what` is damaged, and where."""
    try:
        return model.from_json(text)
    except ValidationError as error:
        raise CasebookError(f"{what} is damaged: {faults_of(error)[0]}.") from error


def read_row(model: type[D], row: tuple[Key, object, object], what: str) -> D:
    """The document of one row; raises CasebookError where it is not what was written."""
    key, text, digest = row
    if not isinstance(text, str) or digest_of_row(key, text) != digest:
        raise CasebookError(f"{what} is damaged: it is not what was written.")
    return parsed(model, text, what)


def sift(
    model: type[D], rows: Iterable[tuple[Key, object, object]], naming: Callable[[Key], str]
) -> tuple[dict[Key, D], tuple[str, ...]]:
    """The documents that can be read, by key, and a sentence for each one that cannot."""
    good: dict[Key, D] = {}
    damaged: list[str] = []
    for row in rows:
        try:
            good[row[0]] = read_row(model, row, naming(row[0]))
        except CasebookError as error:
            damaged.append(str(error))
    return good, tuple(damaged)
