"""Reading a question file: every fault at once, each with the key or line it stands at."""

import re
import tomllib
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.faults import Fault
from plumbrule_core.documents.questions import Question
from plumbrule_core.documents.recipe import Recipe
from plumbrule_core.documents.species import Species
from plumbrule_core.errors import Refused
from plumbrule_core.question_file.asking import Asked, read_asked
from plumbrule_core.question_file.molecules import read_species
from plumbrule_core.question_file.tables import read_table

LARGEST_FILE = 20_000_000
"""Bytes; a question file is text that people write, so anything larger is some other file."""

LISTS = ("basis", "rungs")
SECTIONS = ("question", "species", "recipe")


@dataclass(frozen=True, slots=True, kw_only=True)
class Draft:
    """What could be read of a question file, and all that is wrong with it."""

    title: str = ""
    question: Question | None = None
    species: tuple[Species, ...] = ()
    recipe: Recipe | None = None
    """Where there are faults, question and recipe hold stand-ins for what is wrong."""
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
        title, asked = self._question()
        named, species = self._species()
        recipe = self._recipe()
        self._faults.extend(asked.faults_among(named, {one.name: one for one in species}))
        return Draft(
            title=title, question=asked.question, species=species, recipe=recipe, faults=tuple(self._faults)
        )

    def _add(self, where: str, says: str) -> None:
        self._faults.append(Fault(where=where, says=says))

    def _question(self) -> tuple[str, Asked]:
        if "question" not in self._data:
            self._add("question", "is missing: a file needs a [question] table that says what to find out")
            return "", Asked()
        table = self._data["question"]
        if not isinstance(table, dict):
            self._add("question", "must be a table")
            return "", Asked()
        title = table.get("title", "")
        if not isinstance(title, str) or len(title) > 200:
            self._add("question.title", "must be text in quotes, 200 letters at most")
            title = ""
        asked = read_asked({key: value for key, value in table.items() if key != "title"})
        self._faults.extend(asked.faults)
        return title, asked

    def _species(self) -> tuple[frozenset[str], tuple[Species, ...]]:
        tables = self._data.get("species", {})
        if not isinstance(tables, dict):
            self._add("species", "must be tables, one for each species: [species.water]")
            return frozenset(), ()
        read = [read_species(name, table, self._folder) for name, table in tables.items()]
        self._faults.extend(fault for one in read for fault in one.faults)
        return frozenset(tables), tuple(one.species for one in read if one.species is not None)

    def _recipe(self) -> Recipe | None:
        """The recipe; where basis or rungs are at fault, with the names there, to be judged as well."""
        data = self._data.get("recipe", {})
        if not isinstance(data, dict):
            self._add("recipe", "must be a table")
            return None
        read = read_table(Recipe, data, "recipe")
        self._faults.extend(read.faults)
        spoilt: dict[str, Any] = {key: _names(data[key]) for key in LISTS if key in read.spoilt}
        return read.value.model_copy(update=spoilt) if read.value is not None else None


def _names(value: object) -> tuple[str, ...]:
    return tuple(one for one in value if isinstance(one, str)) if isinstance(value, list) else ()
