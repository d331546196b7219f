"""Faults: what is wrong with a document, where it stands, and what would be right."""

from collections.abc import Callable, Mapping
from typing import Any

from pydantic import ValidationError
from pydantic_core import ErrorDetails

from plumbrule_core.documents.base import Document


class Fault(Document):
    """One thing that is wrong: `where` is the key (`recipe.basis`) or line it stands at."""

    where: str
    says: str

    def __str__(self) -> str:
        return f"{self.where}: {self.says}" if self.where else self.says


def faults_of(error: ValidationError, prefix: str = "") -> tuple[Fault, ...]:
    """Every fault of a refused document in words, each with its key."""
    return tuple(Fault(where=_where(detail, prefix), says=_sentence(detail)) for detail in error.errors())


def _where(detail: ErrorDetails, prefix: str) -> str:
    return ".".join([*([prefix] if prefix else []), *(str(step) for step in detail["loc"])])


def _sentence(detail: ErrorDetails) -> str:
    context: Mapping[str, Any] = detail.get("ctx") or {}
    say = _SENTENCES.get(detail["type"])
    return say(context) if say else detail["msg"].removeprefix("Value error, ")


_SENTENCES: Mapping[str, Callable[[Mapping[str, Any]], str]] = {
    "missing": lambda c: "is missing",
    "extra_forbidden": lambda c: "is not a key that is known here",
    "string_type": lambda c: "must be text in quotes",
    "int_type": lambda c: "must be a whole number",
    "int_from_float": lambda c: "must be a whole number",
    "float_type": lambda c: "must be a number",
    "bool_type": lambda c: "must be true or false",
    "finite_number": lambda c: "must be a finite number",
    "tuple_type": lambda c: "must be a list",
    "dict_type": lambda c: "must be a table",
    "model_type": lambda c: "must be a table",
    "literal_error": lambda c: f"must be one of {c['expected']}",
    "greater_than": lambda c: f"must be more than {c['gt']}",
    "greater_than_equal": lambda c: f"must be {c['ge']} or more",
    "less_than_equal": lambda c: f"must be {c['le']} or less",
    "too_short": lambda c: f"needs at least {c['min_length']} entries",
    "too_long": lambda c: f"takes at most {c['max_length']} entries",
    "string_too_short": lambda c: "must not be empty",
    "union_tag_invalid": lambda c: f"must be one of {c['expected_tags']}",
    "union_tag_not_found": lambda c: "has no kind; say which kind of question this is",
}
