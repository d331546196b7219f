"""Reading a question file: every fault at once, each with the key or line it stands at."""

import json
import re
import tomllib
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from datetime import date, datetime, time
from pathlib import Path
from typing import Any, TypeVar

from pydantic import TypeAdapter, ValidationError

from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.faults import Fault, faults_of
from plumbrule_core.documents.questions import Question, QuestionBase
from plumbrule_core.documents.recipe import Recipe
from plumbrule_core.documents.species import Species
from plumbrule_core.errors import Refused
from plumbrule_core.question_file.molecules import read_species

LARGEST_FILE = 20_000_000
"""Bytes; a question file is text that people write, so anything larger is some other file."""

SECTIONS = ("question", "species", "recipe")
T = TypeVar("T")
_QUESTION: TypeAdapter[Question] = TypeAdapter(Question)


@dataclass(frozen=True, slots=True, kw_only=True)
class Draft:
    """What could be read of a question file, and all that is wrong with it."""

    title: str = ""
    question: Question | None = None
    species: tuple[Species, ...] = ()
    recipe: Recipe | None = None
    faults: tuple[Fault, ...] = ()

    def brief(self) -> Brief:
        """The brief; raises Refused with every fault where there is any."""
        if self.faults or self.recipe is None:
            raise Refused(self.faults)
        return Brief(title=self.title, question=self.question, species=self.species, recipe=self.recipe)


def read_question(path: Path) -> Brief:
    """The brief of a question file; geometry files are looked for beside it.

    Raises Refused with every fault that can be seen without planning: syntax, unknown keys, wrong types,
    geometries that cannot be read, questions that do not balance.
    """
    return read_draft(path).brief()


def read_draft(path: Path) -> Draft:
    """What can be read of a question file, with its faults; raises nothing."""
    try:
        data = _tables(path)
    except Refused as refused:
        return Draft(faults=_faults(refused))
    return _Reading(path.parent, data).draft()


def _faults(refused: Refused) -> tuple[Fault, ...]:
    return tuple(fault for fault in refused.faults if isinstance(fault, Fault))


def _tables(path: Path) -> Mapping[str, Any]:
    text = _text(path)
    try:
        return tomllib.loads(text)
    except RecursionError:
        raise _refused(str(path), "nests lists or tables too deeply") from None
    except ValueError as error:
        raise _refused(*_syntax(path, text, str(error))) from None


def _text(path: Path) -> str:
    try:
        if path.stat().st_size > LARGEST_FILE:
            raise _refused(str(path), "is too large to be a question file")
        return path.read_text(encoding="utf-8-sig")
    except FileNotFoundError:
        raise _refused(str(path), "there is no such file") from None
    except OSError as error:
        raise _refused(str(path), f"cannot be read: {error.strerror or error}") from None
    except UnicodeDecodeError as error:
        raise _refused(f"{path}, byte {error.start}", "is not text in UTF-8; save it as UTF-8") from None
    except ValueError:
        raise _refused(repr(str(path)), "is not a file name that can be opened") from None


def _syntax(path: Path, text: str, says: str) -> tuple[str, str]:
    """`Invalid value (at line 3, column 9)` as the place and the sentence."""
    place = re.search(r" \(at (line \d+, column \d+|end of document)\)$", says)
    if place is None:
        return str(path), f"is not valid TOML: {says}"
    last = f"line {len(text.splitlines())}, the last"
    where = last if place[1] == "end of document" else place[1]
    return f"{path}, {where}", f"is not valid TOML here: {says[: place.start()]}"


def _refused(where: str, says: str) -> Refused:
    return Refused((Fault(where=where, says=says),))


class _Reading:
    """One pass over the tables of a question file, collecting faults on the way."""

    def __init__(self, folder: Path, data: Mapping[str, Any]) -> None:
        self._folder = folder
        self._data = data
        self._faults: list[Fault] = []

    def draft(self) -> Draft:
        for key in self._data:
            if key not in SECTIONS:
                says = "is not a key that is known here; there is [question], [species.NAME] and [recipe]"
                self._add(key, says)
        title, question = self._question()
        named, species = self._species()
        recipe = self._read("recipe", Recipe.model_validate_json, self._data.get("recipe", {}))
        self._faults.extend(fault for one in species for fault in one.faults())
        if question is not None:
            self._faults.extend(_question_faults(question, named, species))
        return Draft(
            title=title, question=question, species=species, recipe=recipe, faults=tuple(self._faults)
        )

    def _add(self, where: str, says: str) -> None:
        self._faults.append(Fault(where=where, says=says))

    def _read(self, where: str, validate: Callable[[str], T], data: object) -> T | None:
        try:
            return validate(json.dumps(_plain(data, where)))
        except ValidationError as error:
            self._faults.extend(_without_tag(fault, data) for fault in faults_of(error, where))
        except Refused as refused:
            self._faults.extend(_faults(refused))
        return None

    def _question(self) -> tuple[str, Question | None]:
        if "question" not in self._data:
            self._add("question", "is missing: a file needs a [question] table that says what to find out")
            return "", None
        table = self._data["question"]
        if not isinstance(table, dict):
            self._add("question", "must be a table")
            return "", None
        title = table.get("title", "")
        if not isinstance(title, str) or len(title) > 200:
            self._add("question.title", "must be text in quotes, 200 letters at most")
            title = ""
        asked = {key: value for key, value in table.items() if key != "title"}
        return title, self._read("question", _QUESTION.validate_json, asked)

    def _species(self) -> tuple[frozenset[str], tuple[Species, ...]]:
        tables = self._data.get("species", {})
        if not isinstance(tables, dict):
            self._add("species", "must be tables, one for each species: [species.water]")
            return frozenset(), ()
        found = []
        for name, table in tables.items():
            try:
                found.append(read_species(name, _plain(table, f"species.{name}"), self._folder))
            except Refused as refused:
                self._faults.extend(_faults(refused))
        return frozenset(tables), tuple(found)


def _question_faults(
    question: QuestionBase, named: frozenset[str], species: tuple[Species, ...]
) -> tuple[Fault, ...]:
    """The question's own faults; a species that is there but could not be read is not called missing."""
    read = {one.name: one for one in species}
    unread = named - set(read)
    if unread and any(name in unread for _, name in question.named()):
        there = tuple((key, name) for key, name in question.named() if name not in named)
        return tuple(
            Fault(where=f"question.{key}", says=f"there is no species named '{name}'") for key, name in there
        )
    vague = bool(unread) and question.built and not question.named()
    return () if vague else question.faults(read)


def _without_tag(fault: Fault, data: object) -> Fault:
    """`question.bond.species` as `question.species`: the kind is no part of the key."""
    kind = data.get("kind") if isinstance(data, dict) else None
    where = fault.where.replace(f"question.{kind}", "question", 1) if isinstance(kind, str) else fault.where
    return Fault(where=where, says=fault.says)


def _plain(value: object, where: str) -> Any:
    """TOML values as JSON has them; raises Refused for a whole number that TOML itself does not allow."""
    if isinstance(value, dict):
        return {key: _plain(one, f"{where}.{key}") for key, one in value.items()}
    if isinstance(value, list):
        return [_plain(one, f"{where}.{place}") for place, one in enumerate(value)]
    if isinstance(value, (datetime, date, time)):
        raise _refused(where, "is a date or a time, which has no meaning here")
    if isinstance(value, int) and abs(value) >= 2**63:
        raise _refused(where, "is too large a number")
    return value
