import os
import sqlite3
import threading
import tracemalloc
import zlib
from collections.abc import Callable, Iterator
from pathlib import Path

import numpy as np
import pytest

from plumbrule_core.casebook import Casebook
from plumbrule_core.casebook.arrays import name_of
from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.results import ArrayRef, Reading, Result
from plumbrule_core.documents.run_state import TaskState
from plumbrule_core.errors import CasebookError

Make = Callable[..., Result]
Npy = Callable[[object], bytes]


def test_results_traces_and_arrays_come_back_as_they_were_put(
    tmp_path: Path, result: Make, npy: Npy, water_brief: Callable[[str], Brief]
) -> None:
    orbitals = np.random.default_rng(7).normal(size=(24, 24))
    with Casebook.open(tmp_path / "a.plumb") as book:
        number = book.add_brief(water_brief("water"), "Add water")
        ref = book.put_array(npy(orbitals))
        done = result("t1", arrays={"orbitals": ref})
        book.put_result(done)
        state = TaskState(
            task="t1",
            state="done",
            trace=((1, -75.9, None), (2, -76.0, 1e-9)),
            log=("two iterations",),
            readings=(Reading(name="T1", value=0.008),),
            result=done,
        )
        book.put_task_state(state)
    with Casebook.open(tmp_path / "a.plumb") as book:
        assert book.brief(number) == water_brief("water")
        assert book.results() == {"t1": done}
        assert book.task_states(["t1", "never run"]) == {"t1": state}
        np.testing.assert_array_equal(book.array(book.results()["t1"].arrays["orbitals"]), orbitals)
        assert book.damaged == ()


def test_a_newer_result_of_the_same_task_takes_the_place_of_the_older(result: Make) -> None:
    with Casebook.open(None) as book:
        book.put_result(result("t", -1.0))
        book.put_result(result("t", -2.0))
        assert {task: one.energy for task, one in book.results().items()} == {"t": -2.0}


@pytest.mark.parametrize(
    "values",
    [np.arange(6, dtype=np.int32).reshape(2, 3), np.array([True, False]), np.array(1 + 2j), np.zeros((0, 4))],
)
def test_arrays_of_every_plain_kind_come_back_equal(values: np.ndarray, npy: Npy) -> None:
    with Casebook.open(None) as book:
        ref = book.put_array(npy(values))
        back = book.array(ref)
        np.testing.assert_array_equal(back, values)
        assert (back.dtype, ref.shape) == (values.dtype, values.shape)


def test_an_array_is_named_by_its_bytes_and_kept_once(tmp_path: Path, npy: Npy) -> None:
    content = npy([1.0, 2.0])
    (tmp_path / "blob.npy").write_bytes(content)
    with Casebook.open(tmp_path / "a.plumb") as book:
        assert book.put_array(tmp_path / "blob.npy") == book.put_array(content)
        assert book.put_array(content).blob == name_of(content)
        assert book._opened.db.execute("SELECT count(*) FROM blobs").fetchone() == (1,)


class Trap:
    """Makes a folder when it is unpickled."""

    def __init__(self, folder: Path) -> None:
        self.folder = folder

    def __reduce__(self) -> tuple[object, ...]:
        return (os.mkdir, (str(self.folder),))


@pytest.fixture
def pickled(tmp_path: Path) -> Iterator[bytes]:
    """An `.npy` file of objects that would run code when loaded, and did not by the end of the test."""
    np.save(tmp_path / "objects.npy", np.array([Trap(tmp_path / "sprung")], dtype=object), allow_pickle=True)
    yield (tmp_path / "objects.npy").read_bytes()
    assert not (tmp_path / "sprung").exists()


def test_pickled_objects_are_refused_as_arrays(pickled: bytes) -> None:
    with Casebook.open(None) as book:
        for content in (pickled, pickled[pickled.index(b"\n") + 1 :]):
            with pytest.raises(CasebookError, match="not a plain array"):
                book.put_array(content)


def test_pickled_objects_planted_in_the_file_are_refused_when_read(pickled: bytes) -> None:
    with Casebook.open(None) as book:
        row = (name_of(pickled), zlib.compress(pickled))
        book._opened.db.execute("INSERT INTO blobs (name, packed) VALUES (?, ?)", row)
        with pytest.raises(CasebookError, match="not a plain array"):
            book.array(ArrayRef(blob=name_of(pickled), shape=(1,), dtype="object"))


def test_a_small_blob_that_swells_without_end_is_refused_without_filling_the_memory(npy: Npy) -> None:
    bomb = npy(np.zeros(20_000_000))
    with Casebook.open(None) as book:
        row = (name_of(bomb), zlib.compress(bomb))
        book._opened.db.execute("INSERT INTO blobs (name, packed) VALUES (?, ?)", row)
        tracemalloc.start()
        with pytest.raises(CasebookError, match="damaged"):
            book.array(ArrayRef(blob=name_of(bomb), shape=(2,), dtype="float64"))
        peak = tracemalloc.get_traced_memory()[1]
        tracemalloc.stop()
        assert peak < 5_000_000


@pytest.mark.parametrize("shape", [(3,), (2, 1), (-1,), (10**30,)])
def test_an_array_that_is_not_what_its_result_says_is_refused(npy: Npy, shape: tuple[int, ...]) -> None:
    with Casebook.open(None) as book:
        ref = book.put_array(npy([1.0, 2.0]))
        with pytest.raises(CasebookError, match=ref.blob):
            book.array(ref.model_copy(update={"shape": shape}))


def test_an_array_that_is_missing_is_told_by_name() -> None:
    with Casebook.open(None) as book, pytest.raises(CasebookError, match=r"does not hold the array abc"):
        book.array(ArrayRef(blob="abc", shape=(1,), dtype="float64"))


def test_a_damaged_blob_is_told_and_put_right_by_putting_it_again(npy: Npy) -> None:
    with Casebook.open(None) as book:
        ref = book.put_array(npy([1.0, 2.0]))
        book._opened.db.execute("UPDATE blobs SET packed = substr(packed, 1, 40)")
        with pytest.raises(CasebookError, match="damaged"):
            book.array(ref)
        assert book.put_array(npy([1.0, 2.0])) == ref
        assert book.array(ref).tolist() == [1.0, 2.0]


DAMAGES = {
    "a digit of an energy": "document = replace(document, '-76.0', '-75.0')",
    "no JSON": "document = '{'",
    "a number": "document = 5",
    "broken text": "document = CAST(x'ff7b' AS TEXT)",
    "the name of its task": "task = 't2 '",
}


@pytest.mark.parametrize("damage", DAMAGES)
def test_a_damaged_row_is_named_and_hides_no_other(damage: str, result: Make) -> None:
    with Casebook.open(None) as book:
        for task in ("t1", "t2", "t3"):
            book.put_result(result(task))
        book._opened.db.execute(f"UPDATE results SET {DAMAGES[damage]} WHERE task = 't2'")
        assert list(book.results()) == ["t1", "t3"]
        (says,) = book.damaged
        assert says.startswith("The result of task t2")
        book.put_result(result("t2"))
        assert "t2" in book.results()


def test_a_damaged_question_is_named_and_can_be_replaced_or_removed(
    water_brief: Callable[[str], Brief],
) -> None:
    with Casebook.open(None) as book:
        number = book.add_brief(water_brief("one"), "Add")
        other = book.add_brief(water_brief("two"), "Add")
        book._opened.db.execute("UPDATE briefs SET document = '{}}' WHERE id = ?", (number,))
        assert [entry.id for entry in book.briefs()] == [other]
        assert book.damaged == (f"Question {number} is damaged: it is not what was written.",)
        with pytest.raises(CasebookError, match=f"Question {number} is damaged"):
            book.brief(number)
        book.put_brief(number, water_brief("anew"), "Write it anew")
        assert book.damaged == ()


def test_a_damaged_trace_is_named_and_left_out() -> None:
    with Casebook.open(None) as book:
        book.put_task_state(TaskState(task="t1", state="done"))
        book.put_task_state(TaskState(task="t2", state="done"))
        book._opened.db.execute("UPDATE task_states SET digest = 'x' WHERE task = 't1'")
        assert list(book.task_states(["t1", "t2"])) == ["t2"]
        assert book.damaged == ("The trace of task t1 is damaged: it is not what was written.",)


def test_two_threads_write_at_once_and_lose_nothing(result: Make, npy: Npy) -> None:
    troubles: list[Exception] = []

    def work(book: Casebook, name: str) -> None:
        try:
            for n in range(40):
                book.put_array(npy([n]))
                book.put_result(result(f"{name}{n}"))
                book.add_brief(Brief(title=f"{name}{n}"), "Add")
                book.results()
        except Exception as error:
            troubles.append(error)

    with Casebook.open(None) as book:
        threads = [threading.Thread(target=work, args=(book, name)) for name in "ab"]
        for thread in threads:
            thread.start()
        for thread in threads:
            thread.join()
        assert troubles == []
        assert set(book.results()) == {f"{name}{n}" for name in "ab" for n in range(40)}
        assert len(book.briefs()) == 80


def test_a_full_disk_is_said_in_words_and_what_was_kept_stays(result: Make, npy: Npy) -> None:
    with Casebook.open(None) as book:
        book.put_result(result("t1"))
        pages = book._opened.db.execute("PRAGMA page_count").fetchone()[0]
        book._opened.db.execute(f"PRAGMA max_page_count = {pages + 2}")
        noise = np.random.default_rng(1).normal(size=10_000)
        with pytest.raises(CasebookError, match=r"not kept: the disk is full"):
            book.put_array(npy(noise))
        assert list(book.results()) == ["t1"]
        book._opened.db.execute("PRAGMA max_page_count = 100000")
        np.testing.assert_array_equal(book.array(book.put_array(npy(noise))), noise)


def test_a_file_that_is_not_there_is_told_by_name(tmp_path: Path) -> None:
    with Casebook.open(None) as book, pytest.raises(CasebookError, match=r"gone\.npy"):
        book.put_array(tmp_path / "gone.npy")


def test_what_created_the_casebook_is_written_in_it(tmp_path: Path) -> None:
    Casebook.open(tmp_path / "a.plumb").close()
    db = sqlite3.connect(tmp_path / "a.plumb")
    assert db.execute("SELECT value FROM meta WHERE key = 'created by'").fetchone() == ("0.1.0",)
    db.close()
