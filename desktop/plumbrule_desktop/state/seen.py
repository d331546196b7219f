"""What the window sees of an open casebook: values, read in the clerk's thread."""

from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from plumbrule_core.documents.brief import Brief

if TYPE_CHECKING:
    from plumbrule_core.session import RungCard, Session


@dataclass(frozen=True, slots=True)
class Entry:
    """One question of the casebook, as the chooser lists it."""

    id: int
    title: str


@dataclass(frozen=True, slots=True)
class Casebook:
    """What the window shows of the open file."""

    path: Path | None = None
    read_only: bool = False
    why_read_only: str = ""
    damaged: tuple[str, ...] = ()
    undo_label: str | None = None
    redo_label: str | None = None


@dataclass(frozen=True, slots=True)
class Offer:
    """What the core can do, known once it has been imported."""

    rungs: "tuple[RungCard, ...]" = ()
    bases: tuple[str, ...] = ()
    exports: Mapping[str, str] | None = None


def ids_of(session: "Session") -> tuple[int, ...]:
    """The numbers of its questions."""
    return tuple(entry.id for entry in session.briefs())


def shelf_of(session: "Session", brief_id: int) -> tuple[Casebook, tuple[Entry, ...], Brief]:
    """The file, the list of questions, and one of them."""
    file = Casebook(
        session.path,
        session.read_only,
        session.why_read_only,
        session.damaged,
        session.undo_label,
        session.redo_label,
    )
    entries = tuple(Entry(entry.id, title_of(entry.brief)) for entry in session.briefs())
    return file, entries, session.brief(brief_id)


def title_of(brief: Brief) -> str:
    """What the chooser calls a question: its title, or its sentence."""
    if brief.title:
        return brief.title
    if brief.question is None:
        return "New question"
    words = "".join(clause.text for clause in brief.question.sentence(brief.by_name))
    return words.removeprefix("The ").split(", within")[0]
