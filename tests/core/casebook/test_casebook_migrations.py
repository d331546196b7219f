import shutil
import sqlite3
from pathlib import Path

import pytest

from plumbrule_core.casebook import Casebook, migrations
from plumbrule_core.casebook.checks import check_layout
from plumbrule_core.casebook.connection import connect
from plumbrule_core.errors import CasebookError


def _add_colour(db: sqlite3.Connection) -> None:
    db.execute("ALTER TABLE meta ADD COLUMN colour TEXT NOT NULL DEFAULT 'grey'")


def _add_marks(db: sqlite3.Connection) -> None:
    db.execute("CREATE TABLE marks (task TEXT PRIMARY KEY)")
    db.execute("INSERT INTO marks SELECT task FROM results")


def _fail(db: sqlite3.Connection) -> None:
    db.execute("DROP TABLE results")
    db.execute("INSERT INTO nowhere VALUES (1)")


@pytest.fixture
def old(tmp_path: Path, samples: Path) -> Path:
    return Path(shutil.copy(samples / "v1.plumb", tmp_path / "old.plumb"))


def test_there_is_a_sample_of_every_version(samples: Path) -> None:
    assert {path.name for path in samples.glob("*.plumb")} == {
        f"v{n + 1}.plumb" for n in range(migrations.newest())
    }


def test_every_older_sample_opens_with_all_that_it_holds(tmp_path: Path, samples: Path) -> None:
    for sample in samples.glob("*.plumb"):
        with Casebook.open(Path(shutil.copy(sample, tmp_path))) as book:
            assert book.damaged == ()
            assert [entry.brief.title for entry in book.briefs()] == [
                "Water by two rungs",
                "Is oxygen a triplet?",
            ]
            assert (book.undo_label, book.redo_label) == ("Add the spin gap", "Rename it")
            results = book.results()
            assert {one.rung: one.energy for one in results.values()} == {"HF": -76.025, "MP2": -76.229}
            assert [len(state.trace) for state in book.task_states(results).values()] == [2, 1]
            (hartree_fock,) = (one for one in results.values() if one.rung == "HF")
            orbitals = book.array(hartree_fock.arrays["orbital_energies"])
            assert orbitals.tolist() == [-20.55, -1.34, -0.71, -0.57, -0.49]


def test_an_older_version_is_brought_forward_step_by_step_with_a_copy_left_beside(
    old: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    before = old.read_bytes()
    monkeypatch.setattr(migrations, "MIGRATIONS", (_add_colour, _add_marks))
    with Casebook.open(old) as book:
        assert not book.read_only
        kept = book.migrated_from
        assert kept == old.with_name("old (version 1).plumb")
        assert book._opened.db.execute("PRAGMA user_version").fetchone() == (3,)
        assert book._opened.db.execute("SELECT count(*) FROM marks").fetchone() == (2,)
        assert len(book.results()) == 2
    with Casebook.open(old) as book:
        assert book.migrated_from is None
    assert {path.name for path in old.parent.iterdir()} == {"old.plumb", "old (version 1).plumb"}
    monkeypatch.undo()
    assert kept is not None
    with Casebook.open(kept) as book:
        assert len(book.results()) == 2
    assert kept.stat().st_size == len(before)


def test_a_copy_that_stands_beside_already_is_not_overwritten(
    old: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    taken = old.with_name("old (version 1).plumb")
    taken.write_text("mine")
    monkeypatch.setattr(migrations, "MIGRATIONS", (_add_colour,))
    with Casebook.open(old) as book:
        assert book.migrated_from == old.with_name("old (version 1) 2.plumb")
    assert taken.read_text() == "mine"


def test_a_step_that_fails_leaves_the_last_whole_version(old: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(migrations, "MIGRATIONS", (_add_colour, _fail))
    with pytest.raises(CasebookError, match=r"old\.plumb cannot be opened"):
        Casebook.open(old)
    monkeypatch.setattr(migrations, "MIGRATIONS", (_add_colour,))
    with Casebook.open(old) as book:
        assert len(book.results()) == 2
        assert book.migrated_from is None


def test_a_reader_migrates_its_own_picture_alone(old: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    with Casebook.open(old):
        monkeypatch.setattr(migrations, "MIGRATIONS", (_add_marks,))
        with Casebook.open(old) as reader:
            assert reader.read_only
            assert len(reader.results()) == 2
    assert {path.name for path in old.parent.iterdir()} == {"old.plumb"}
    monkeypatch.undo()
    Casebook.open(old).close()


def test_a_new_casebook_has_the_same_tables_as_a_migrated_one(
    old: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(migrations, "MIGRATIONS", (_add_colour, _add_marks))
    new = old.with_name("new.plumb")
    for path in (old, new):
        with Casebook.open(path):
            pass
        db = connect(path, "ro")
        check_layout(path.name, db)
        db.close()
