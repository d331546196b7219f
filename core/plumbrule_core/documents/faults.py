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
    """Every fault of a refused document in words, each with its key; entries of lists are counted from 1."""
    return tuple(Fault(where=_where(detail, prefix), says=_sentence(detail)) for detail in error.errors())


def _where(detail: ErrorDetails, prefix: str) -> str:
    keys = (step for step in detail["loc"] if isinstance(step, str))
    return ".".join([*([prefix] if prefix else []), *keys])


def _sentence(detail: ErrorDetails) -> str:
    context: Mapping[str, Any] = detail.get("ctx") or {}
    say = _SENTENCES.get(detail["type"])
    says = say(context) if say else detail["msg"].removeprefix("Value error, ")
    entries = (f"entry {step + 1}" for step in detail["loc"] if isinstance(step, int))
    return " ".join([*entries, says])


def _entries(number: int) -> str:
    return f"{number} {'entry' if number == 1 else 'entries'}"


def _choices(expected: str) -> str:
    return expected.replace("True", "true").replace("False", "false")


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
    "mapping_type": lambda c: "must be a table",
    "dict_type": lambda c: "must be a table",
    "model_type": lambda c: "must be a table",
    "literal_error": lambda c: f"must be {_choices(c['expected'])}",
    "greater_than": lambda c: f"must be more than {c['gt']}",
    "greater_than_equal": lambda c: f"must be {c['ge']} or more",
    "less_than_equal": lambda c: f"must be {c['le']} or less",
    "too_short": lambda c: f"needs at least {_entries(c['min_length'])}",
    "too_long": lambda c: f"takes at most {_entries(c['max_length'])}",
    "string_too_short": lambda c: "must not be empty",
    "string_too_long": lambda c: f"must be {c['max_length']} letters at most",
}
