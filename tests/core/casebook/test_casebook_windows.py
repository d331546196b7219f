import sqlite3
import subprocess
import sys
import textwrap
import threading
from collections.abc import Callable
from contextlib import closing
from pathlib import Path

import pytest

from plumbrule_core.casebook import Casebook, connection, lock
from plumbrule_core.casebook.lock import NoLock, WriterLock
from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.results import Result
from plumbrule_core.errors import CasebookError


def _names(folder: Path) -> set[str]:
    return {path.name for path in folder.iterdir()}


def test_the_second_opening_reads_only_and_says_why(closed: Path, result: Callable[..., Result]) -> None:
    with Casebook.open(closed) as writer, Casebook.open(closed) as reader:
        assert not writer.read_only
        assert reader.read_only
        assert "Another window" in reader.why_read_only
        assert reader.briefs() == writer.briefs()
        assert reader.path == writer.path
        for change in (
            lambda: reader.add_brief(Brief(), "Add"),
            lambda: reader.put_brief(1, Brief(), "Edit"),
            lambda: reader.remove_brief(1, "Remove"),
            reader.undo,
            reader.redo,
            reader.forget_history,
            lambda: reader.put_result(result("t")),
            lambda: reader.put_array(b""),
        ):
            with pytest.raises(CasebookError, match=r"cannot be changed\. Another window"):
                change()


def test_a_reader_sees_what_the_writer_finished_once_it_refreshes(closed: Path) -> None:
    with Casebook.open(closed) as writer, Casebook.open(closed) as reader:
        writer.add_brief(Brief(title="two"), "Add")
        assert len(reader.briefs()) == 1
        reader.refresh()
        assert [entry.brief.title for entry in reader.briefs()] == ["one", "two"]
        writer.refresh()
        assert writer.undo() == "Add"


def test_a_reader_keeps_the_writer_from_nothing_and_reads_on_after_it(closed: Path) -> None:
    writer = Casebook.open(closed)
    with Casebook.open(closed) as reader:
        writer.add_brief(Brief(title="two"), "Add")
        writer.close()
        assert _names(closed.parent) == {"closed.plumb"}
        reader.refresh()
        assert len(reader.briefs()) == 2
        assert reader.read_only
    with Casebook.open(closed) as again:
        assert not again.read_only


def test_a_reader_whose_file_is_gone_says_so_and_keeps_what_it_had(closed: Path) -> None:
    with Casebook.open(closed) as writer, Casebook.open(closed) as reader:
        writer.close()
        closed.unlink()
        with pytest.raises(CasebookError, match="cannot be read again"):
            reader.refresh()
        assert len(reader.briefs()) == 1


def test_a_link_to_an_open_casebook_is_the_same_casebook(closed: Path) -> None:
    link = closed.with_name("link.plumb")
    try:
        link.symlink_to(closed)
    except OSError:
        pytest.skip("this system lets nobody make links")
    with Casebook.open(closed), Casebook.open(link) as second:
        assert second.read_only


def test_another_process_that_holds_the_casebook_makes_this_one_read_only(closed: Path) -> None:
    hold = (
        "import sys, pathlib; from plumbrule_core.casebook import Casebook; "
        "book = Casebook.open(pathlib.Path(sys.argv[1])); print(book.read_only, flush=True); "
        "sys.stdin.read(); book.close()"
    )
    with subprocess.Popen(
        [sys.executable, "-c", hold, str(closed)], stdin=subprocess.PIPE, stdout=subprocess.PIPE, text=True
    ) as other:
        assert other.stdout is not None
        assert other.stdout.readline() == "False\n"
        with Casebook.open(closed) as book:
            assert book.read_only
        other.communicate("", timeout=30)
    with Casebook.open(closed) as book:
        assert not book.read_only


def test_a_new_casebook_is_not_made_while_another_window_makes_it(tmp_path: Path) -> None:
    held = WriterLock.take(tmp_path / "a.plumb")
    with pytest.raises(CasebookError, match="Another window"):
        Casebook.open(tmp_path / "a.plumb")
    held.release()
    held.release()
    Casebook.open(tmp_path / "a.plumb").close()
    assert _names(tmp_path) == {"a.plumb"}


def test_a_lock_on_a_file_that_its_last_holder_removed_meanwhile_is_taken_anew(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    held, removed = lock._held, []

    def removed_at_first(beside: Path) -> int:
        handle = held(beside)
        if not removed:
            removed.append(beside)
            beside.unlink()
        return handle

    monkeypatch.setattr(lock, "_held", removed_at_first)
    first = WriterLock.take(tmp_path / "a.plumb")
    assert removed
    with pytest.raises(NoLock):
        WriterLock.take(tmp_path / "a.plumb")
    first.release()


def _hold_a_reading(path: Path) -> sqlite3.Connection:
    reading = sqlite3.connect(path, isolation_level=None, check_same_thread=False)
    reading.execute("BEGIN")
    reading.execute("SELECT count(*) FROM briefs").fetchone()
    return reading


def test_closing_waits_for_a_reading_that_is_under_way(closed: Path) -> None:
    book = Casebook.open(closed)
    book.add_brief(Brief(title="two"), "Add")
    reading = _hold_a_reading(closed)
    end = threading.Timer(0.3, reading.close)
    end.start()
    book.close()
    end.join()
    assert _names(closed.parent) == {"closed.plumb"}


def test_a_reading_that_does_not_end_leaves_the_log_and_loses_nothing(
    closed: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(connection, "PATIENCE", 0.1)
    with closing(_hold_a_reading(closed)), pytest.raises(CasebookError, match="kept it busy"):
        Casebook.open(closed)
    with Casebook.open(closed) as book:
        book.add_brief(Brief(title="two"), "Add")
        reading = _hold_a_reading(closed)
    reading.close()
    with Casebook.open(closed) as book:
        assert [entry.brief.title for entry in book.briefs()] == ["one", "two"]
    assert _names(closed.parent) == {"closed.plumb"}


TAKING_TURNS = """
    import pathlib, sys, time
    from plumbrule_core.casebook import Casebook
    from plumbrule_core.documents.brief import Brief

    wrote, end = 0, time.monotonic() + 1.5
    while time.monotonic() < end:
        with Casebook.open(pathlib.Path(sys.argv[1])) as book:
            if not book.read_only:
                book.add_brief(Brief(title=sys.argv[2]), "Add")
                wrote += 1
            elif book.damaged:
                sys.exit(book.damaged)
        time.sleep(0.001)
    print(wrote)
"""


def test_processes_that_open_and_close_in_turn_lose_no_change_and_leave_one_file(closed: Path) -> None:
    turns = [
        subprocess.Popen(
            [sys.executable, "-c", textwrap.dedent(TAKING_TURNS), str(closed), name],
            stdout=subprocess.PIPE,
            text=True,
        )
        for name in ("left", "right")
    ]
    wrote = [int(turn.communicate(timeout=60)[0]) for turn in turns]
    with Casebook.open(closed) as book:
        titles = [entry.brief.title for entry in book.briefs()]
    assert [titles.count("left"), titles.count("right")] == wrote
    assert sum(wrote) > 0
    assert _names(closed.parent) == {"closed.plumb"}
