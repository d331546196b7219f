from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from plumbrule_core.casebook import BriefEntry, Casebook
from plumbrule_core.casebook.history import MAX_STEPS
from plumbrule_core.documents.brief import Brief
from plumbrule_core.errors import CasebookError

edits = st.lists(
    st.tuples(st.sampled_from(("add", "put", "remove")), st.integers(0, 5), st.text(max_size=8)), max_size=12
)


def _edit(book: Casebook, kind: str, which: int, title: str) -> None:
    entries = book.briefs()
    if kind == "add" or not entries:
        book.add_brief(Brief(title=title), f"Add {title}")
    elif kind == "put":
        book.put_brief(entries[which % len(entries)].id, Brief(title=title), f"Name it {title}")
    else:
        book.remove_brief(entries[which % len(entries)].id, "Remove")


@settings(max_examples=60, deadline=None)
@given(edits)
def test_undoing_and_redoing_every_step_passes_through_the_same_questions(
    changes: list[tuple[str, int, str]],
) -> None:
    with Casebook.open(None) as book:
        passed: list[tuple[BriefEntry, ...]] = [book.briefs()]
        for change in changes:
            _edit(book, *change)
            if book.briefs() != passed[-1]:
                passed.append(book.briefs())
        for expected in reversed(passed[:-1]):
            promised = book.undo_label
            assert promised is not None
            assert book.undo() == promised
            assert book.briefs() == expected
        assert book.undo() is None
        for expected in passed[1:]:
            promised = book.redo_label
            assert promised is not None
            assert book.redo() == promised
            assert book.briefs() == expected
        assert book.redo() is None


@settings(max_examples=30, deadline=None)
@given(edits, st.integers(1, 6), edits)
def test_an_edit_after_undoing_forgets_what_could_be_redone_and_undoes_to_the_start(
    first: list[tuple[str, int, str]], back: int, second: list[tuple[str, int, str]]
) -> None:
    with Casebook.open(None) as book:
        for change in first:
            _edit(book, *change)
        for _ in range(back):
            book.undo()
        book.add_brief(Brief(title="a new turn"), "Turn")
        assert book.redo_label is None
        for change in second:
            _edit(book, *change)
        while book.undo() is not None:
            pass
        assert book.briefs() == ()


def test_questions_keep_their_order_and_their_numbers(tmp_path: Path) -> None:
    with Casebook.open(tmp_path / "a.plumb") as book:
        numbers = [book.add_brief(Brief(title=title), "Add") for title in ("one", "two", "three")]
        book.put_brief(numbers[0], Brief(title="first"), "Rename")
        book.remove_brief(numbers[1], "Remove")
    with Casebook.open(tmp_path / "a.plumb") as book:
        assert [(entry.id, entry.brief.title) for entry in book.briefs()] == [
            (numbers[0], "first"),
            (numbers[2], "three"),
        ]
        assert book.undo() == "Remove"
        assert [entry.brief.title for entry in book.briefs()] == ["first", "two", "three"]


def test_the_number_of_a_question_that_was_taken_back_is_never_given_to_another(tmp_path: Path) -> None:
    with Casebook.open(tmp_path / "a.plumb") as book:
        first = book.add_brief(Brief(title="one"), "Add")
        book.undo()
    with Casebook.open(tmp_path / "a.plumb") as book:
        assert book.add_brief(Brief(title="two"), "Add") != first


def test_putting_an_equal_question_makes_no_step_and_keeps_what_can_be_redone() -> None:
    with Casebook.open(None) as book:
        number = book.add_brief(Brief(title="one"), "Add")
        book.put_brief(number, Brief(title="two"), "Rename")
        book.undo()
        book.put_brief(number, Brief(title="one"), "Nothing new")
        assert (book.undo_label, book.redo_label) == ("Add", "Rename")


def test_the_history_is_kept_on_disk_and_survives_closing(tmp_path: Path) -> None:
    with Casebook.open(tmp_path / "a.plumb") as book:
        number = book.add_brief(Brief(title="one"), "Add")
        book.put_brief(number, Brief(title="two"), "Rename")
        book.undo()
    with Casebook.open(tmp_path / "a.plumb") as book:
        assert (book.undo_label, book.redo_label) == ("Add", "Rename")
        book.redo()
        assert book.brief(number).title == "two"


def test_steps_older_than_the_limit_are_forgotten_and_no_others() -> None:
    with Casebook.open(None) as book:
        number = book.add_brief(Brief(title="start"), "Add")
        for n in range(MAX_STEPS + 20):
            book.put_brief(number, Brief(title=str(n)), f"To {n}")
        undone = 0
        while book.undo() is not None:
            undone += 1
        assert undone == MAX_STEPS
        assert book.brief(number).title == "19"


def test_a_forgotten_history_leaves_the_questions() -> None:
    with Casebook.open(None) as book:
        number = book.add_brief(Brief(title="demo"), "Open the demo")
        book.forget_history()
        assert (book.undo_label, book.undo()) == (None, None)
        assert book.brief(number).title == "demo"


@pytest.mark.parametrize("call", ["brief", "put", "remove"])
def test_a_number_that_no_question_has_is_a_key_error_and_changes_nothing(call: str) -> None:
    with Casebook.open(None) as book:
        calls = {
            "brief": lambda: book.brief(7),
            "put": lambda: book.put_brief(7, Brief(), "Rename"),
            "remove": lambda: book.remove_brief(7, "Remove"),
        }
        with pytest.raises(KeyError):
            calls[call]()
        assert book.undo_label is None


def test_a_step_whose_stored_text_is_damaged_is_refused_and_nothing_changes() -> None:
    with Casebook.open(None) as book:
        number = book.add_brief(Brief(title="one"), "Add")
        book.put_brief(number, Brief(title="two"), "Rename")
        book._opened.db.execute("""UPDATE steps SET before = '{"title": 5}' WHERE label = 'Rename'""")
        with pytest.raises(CasebookError, match=r"step 'Rename'.*damaged: title: must be text"):
            book.undo()
        assert book.brief(number).title == "two"
        assert book.undo_label == "Rename"
