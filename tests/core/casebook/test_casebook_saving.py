from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest

from plumbrule_core.casebook import Casebook, saving
from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.results import Result
from plumbrule_core.errors import CasebookError


def _names(folder: Path) -> set[str]:
    return {path.name for path in folder.iterdir()}


def test_a_copy_holds_everything_and_is_one_file(
    tmp_path: Path, result: Callable[..., Result], npy: Callable[[object], bytes]
) -> None:
    with Casebook.open(None) as book:
        number = book.add_brief(Brief(title="one"), "Add")
        book.put_brief(number, Brief(title="two"), "Rename")
        book.undo()
        ref = book.put_array(npy([1.0, 2.0]))
        book.put_result(result("t1", arrays={"a": ref}))
        book.save_copy(tmp_path / "copy.plumb")
        assert _names(tmp_path) == {"copy.plumb"}
        with Casebook.open(tmp_path / "copy.plumb") as copy:
            assert copy.briefs() == book.briefs()
            assert copy.results() == book.results()
            assert (copy.undo_label, copy.redo_label) == ("Add", "Rename")
            assert not copy.read_only
            np.testing.assert_array_equal(copy.array(ref), [1.0, 2.0])
        book.add_brief(Brief(title="three"), "Add")
        assert len(book.briefs()) == 2
    assert _names(tmp_path) == {"copy.plumb"}


def test_a_copy_replaces_an_older_file_with_the_log_that_a_crash_left_beside_it(tmp_path: Path) -> None:
    target = tmp_path / "old.plumb"
    with Casebook.open(target) as old:
        old.add_brief(Brief(title="old"), "Add")
        log = target.with_name("old.plumb-wal").read_bytes()
    target.with_name("old.plumb-wal").write_bytes(log)
    with Casebook.open(None) as book:
        book.add_brief(Brief(title="new"), "Add")
        book.save_copy(target)
    assert _names(tmp_path) == {"old.plumb"}
    with Casebook.open(target) as book:
        assert [entry.brief.title for entry in book.briefs()] == ["new"]


def test_a_casebook_is_not_saved_over_itself(tmp_path: Path) -> None:
    path = tmp_path / "a.plumb"
    with Casebook.open(path) as book:
        number = book.add_brief(Brief(title="one"), "Add")
        for same in (path, tmp_path / "x" / ".." / "a.plumb"):
            (tmp_path / "x").mkdir(exist_ok=True)
            with pytest.raises(CasebookError, match="this casebook itself"):
                book.save_copy(same)
        with Casebook.open(path) as reader, pytest.raises(CasebookError, match="this casebook itself"):
            reader.save_copy(path)
        assert book.brief(number).title == "one"


def test_a_casebook_that_another_window_has_open_is_not_replaced(tmp_path: Path) -> None:
    with Casebook.open(tmp_path / "other.plumb") as other, Casebook.open(None) as book:
        other.add_brief(Brief(title="theirs"), "Add")
        with pytest.raises(CasebookError, match=r"other\.plumb cannot be replaced\. Another window"):
            book.save_copy(tmp_path / "other.plumb")
        assert len(other.briefs()) == 1
    assert _names(tmp_path) == {"other.plumb"}


def test_a_copy_that_cannot_be_finished_leaves_the_older_file(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    target = tmp_path / "old.plumb"
    target.write_text("mine")

    def broken(*_: object) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(saving, "copy_into", broken)
    with (
        Casebook.open(None) as book,
        pytest.raises(CasebookError, match=r"old\.plumb cannot be saved: No space left"),
    ):
        book.save_copy(target)
    assert target.read_text() == "mine"
    assert _names(tmp_path) == {"old.plumb"}


@pytest.mark.parametrize(("target", "says"), [("nowhere/a.plumb", "no folder"), (".", "is a folder")])
def test_a_place_that_cannot_hold_a_copy_is_said(tmp_path: Path, target: str, says: str) -> None:
    with Casebook.open(None) as book, pytest.raises(CasebookError, match=says):
        book.save_copy(tmp_path / target)
