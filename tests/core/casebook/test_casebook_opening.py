import shutil
import sqlite3
import stat
import struct
import subprocess
import sys
import tempfile
import textwrap
from collections.abc import Callable, Iterator
from contextlib import closing
from pathlib import Path

import pytest

from plumbrule_core.casebook import Casebook
from plumbrule_core.casebook.schema import APPLICATION_ID
from plumbrule_core.documents.brief import Brief
from plumbrule_core.errors import CasebookError


def _names(folder: Path) -> set[str]:
    return {path.name for path in folder.iterdir()}


def test_a_new_casebook_is_made_with_its_marks_and_is_one_file_when_closed(tmp_path: Path) -> None:
    book = Casebook.open(tmp_path / "new.plumb")
    book.add_brief(Brief(title="one"), "Add")
    assert not book.read_only
    assert book.why_read_only == ""
    assert book._opened.db.execute("PRAGMA journal_mode").fetchone() == ("wal",)
    book.close()
    assert _names(tmp_path) == {"new.plumb"}
    head = (tmp_path / "new.plumb").read_bytes()[:100]
    assert struct.unpack(">I", head[68:72]) == (APPLICATION_ID,)
    assert struct.unpack(">I", head[60:64]) == (1,)
    assert head[18:20] == b"\x01\x01"


def test_closing_twice_does_nothing_and_a_closed_casebook_says_so(tmp_path: Path) -> None:
    book = Casebook.open(tmp_path / "a.plumb")
    book.close()
    book.close()
    with pytest.raises(CasebookError, match="closed"):
        book.briefs()
    with pytest.raises(CasebookError, match="closed"):
        book.add_brief(Brief(), "Add")
    with pytest.raises(CasebookError, match="closed"):
        book.refresh()


def test_an_unsaved_casebook_has_no_path_and_leaves_nothing(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr("tempfile.tempdir", str(tmp_path))
    with Casebook.open(None) as book:
        assert book.path is None
        assert not book.read_only
        (folder,) = tmp_path.iterdir()
        assert stat.S_IMODE(folder.stat().st_mode) & 0o077 == 0 or sys.platform == "win32"
    assert _names(tmp_path) == set()


def test_a_folder_that_is_not_there_is_said(tmp_path: Path) -> None:
    with pytest.raises(CasebookError, match=r"no folder .*nowhere"):
        Casebook.open(tmp_path / "nowhere" / "a.plumb")


def test_a_folder_is_no_casebook(tmp_path: Path) -> None:
    with pytest.raises(CasebookError, match="is a folder"):
        Casebook.open(tmp_path)


def test_names_with_signs_of_an_address_are_plain_names(tmp_path: Path) -> None:
    path = tmp_path / "100 % sure? #1 ä.plumb"
    with Casebook.open(path) as book:
        book.add_brief(Brief(title="one"), "Add")
    assert _names(tmp_path) == {path.name}
    with Casebook.open(path) as book:
        assert len(book.briefs()) == 1


def _foreign_database(path: Path) -> None:
    with closing(sqlite3.connect(path)) as db, db:
        db.execute("CREATE TABLE pictures (name TEXT)")


def _foreign_database_with_log(path: Path) -> None:
    with closing(sqlite3.connect(path)) as db:
        db.execute("PRAGMA journal_mode = WAL")
        db.execute("CREATE TABLE pictures (name TEXT)")


def _newer(path: Path) -> None:
    Casebook.open(path).close()
    with closing(sqlite3.connect(path)) as db:
        db.execute("PRAGMA user_version = 99")


def _no_version(path: Path) -> None:
    Casebook.open(path).close()
    with closing(sqlite3.connect(path)) as db:
        db.execute("PRAGMA user_version = 0")


def _with_trigger(path: Path) -> None:
    Casebook.open(path).close()
    with closing(sqlite3.connect(path)) as db, db:
        db.execute("CREATE TRIGGER more AFTER INSERT ON results BEGIN DELETE FROM briefs; END")


def _without_a_table(path: Path) -> None:
    Casebook.open(path).close()
    with closing(sqlite3.connect(path)) as db, db:
        db.execute("DROP TABLE blobs")


def _broken_page(path: Path) -> None:
    with Casebook.open(path) as book:
        for n in range(50):
            book.add_brief(Brief(title=str(n) * 50), "Add")
    content = bytearray(path.read_bytes())
    page = len(content) - 4096
    content[page : page + 2000] = b"\xa5" * 2000
    path.write_bytes(content)


REFUSED: dict[str, tuple[Callable[[Path], object], str]] = {
    "empty": (lambda path: path.write_bytes(b""), "is empty"),
    "a few bytes": (lambda path: path.write_bytes(b"SQLite format 3\x00"), "no casebook"),
    "text": (lambda path: path.write_text("a question\n" * 200), "no casebook"),
    "another database": (_foreign_database, "no casebook"),
    "another database with a log": (_foreign_database_with_log, "no casebook"),
    "newer": (_newer, r"newer Plumbrule: it has version 99 and this program knows up to 1"),
    "no version": (_no_version, "no version"),
    "a trigger": (_with_trigger, "its tables are not those of a casebook"),
    "a missing table": (_without_a_table, "its tables are not those of a casebook"),
    "a broken page": (_broken_page, "damaged"),
}


@pytest.mark.parametrize("kind", REFUSED)
def test_what_is_no_casebook_of_this_version_is_refused_untouched(tmp_path: Path, kind: str) -> None:
    make, says = REFUSED[kind]
    path = tmp_path / "file.plumb"
    make(path)
    before, names = path.read_bytes(), _names(tmp_path)
    with pytest.raises(CasebookError, match=says):
        Casebook.open(path)
    assert path.read_bytes() == before
    assert _names(tmp_path) == names


@pytest.mark.parametrize("left", [0, 1, 16, 99, 100, 512, 4096, 5000, -4096, -1])
def test_a_truncated_casebook_is_refused_untouched(closed: Path, left: int) -> None:
    before = closed.read_bytes()[:left]
    closed.write_bytes(before)
    with pytest.raises(CasebookError, match=r"closed\.plumb"):
        Casebook.open(closed)
    assert closed.read_bytes() == before
    assert _names(closed.parent) == {"closed.plumb"}


# As root, permissions forbid nothing: the child gives its rights up once everything is imported.
UNPRIVILEGED = """
    import os, sys, pathlib, tempfile
    import plumbrule_core.casebook
    from plumbrule_core.documents.brief import Brief
    from plumbrule_core.errors import CasebookError
    tempfile.tempdir = sys.argv[2]
    if os.getuid() == 0:
        os.setgid(65534)
        os.setuid(65534)
    try:
        with plumbrule_core.casebook.Casebook.open(pathlib.Path(sys.argv[1])) as book:
            print(book.why_read_only)
            print([entry.brief.title for entry in book.briefs()], book.damaged)
            try:
                book.add_brief(Brief(), "Add")
            except CasebookError as error:
                print(error)
    except CasebookError as error:
        print(error)
"""

needs_permissions = pytest.mark.skipif(sys.platform == "win32", reason="POSIX permissions")


@pytest.fixture
def shelf(closed: Path) -> Iterator[Path]:
    """A folder that every user may enter, unlike pytest's own: `book` holds a closed casebook."""
    folder = Path(tempfile.mkdtemp(prefix="plumbrule-test-"))
    (folder / "book").mkdir()
    (folder / "scratch").mkdir()
    shutil.copy(closed, folder / "book")
    folder.chmod(0o755)
    (folder / "scratch").chmod(0o777)
    yield folder
    (folder / "book").chmod(0o755)
    shutil.rmtree(folder)


def _as_nobody(shelf: Path, name: str) -> list[str]:
    run = subprocess.run(
        [
            sys.executable,
            "-c",
            textwrap.dedent(UNPRIVILEGED),
            str(shelf / "book" / name),
            str(shelf / "scratch"),
        ],
        capture_output=True,
        text=True,
        check=True,
    )
    assert _names(shelf / "scratch") == set()
    return run.stdout.splitlines()


@needs_permissions
def test_a_write_protected_file_opens_for_reading_and_says_so(shelf: Path) -> None:
    (shelf / "book" / "closed.plumb").chmod(0o444)
    (shelf / "book").chmod(0o777)
    why, briefs, refused = _as_nobody(shelf, "closed.plumb")
    assert why == "closed.plumb is write-protected, so it can only be read."
    assert briefs == "['one'] ()"
    assert refused == f"The casebook cannot be changed. {why}"
    assert _names(shelf / "book") == {"closed.plumb"}


@needs_permissions
def test_a_folder_that_cannot_be_written_to_opens_for_reading_and_says_so(shelf: Path) -> None:
    (shelf / "book").chmod(0o555)
    why, briefs, refused = _as_nobody(shelf, "closed.plumb")
    assert why == f"The folder {shelf / 'book'} cannot be written to, so the casebook can only be read."
    assert briefs == "['one'] ()"
    assert refused == f"The casebook cannot be changed. {why}"


@needs_permissions
def test_what_a_log_still_holds_is_read_in_a_folder_that_cannot_be_written_to(
    shelf: Path, closed: Path
) -> None:
    with Casebook.open(closed) as book:
        book.add_brief(Brief(title="in the log"), "Add")
        shutil.copy(closed.with_name("closed.plumb-wal"), shelf / "book")
        shutil.copy(closed, shelf / "book")
    (shelf / "book").chmod(0o555)
    _, briefs, _ = _as_nobody(shelf, "closed.plumb")
    assert briefs == "['one', 'in the log'] ()"


@needs_permissions
def test_a_casebook_that_cannot_be_made_is_refused_in_words(shelf: Path) -> None:
    (shelf / "book").chmod(0o555)
    (says,) = _as_nobody(shelf, "new.plumb")
    assert says.startswith("There is no casebook")
    assert "cannot be written to" in says
