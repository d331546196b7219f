"""Checkpoints and arrays are whole or not there, and hold no code."""

import os
import pickle
import re
from pathlib import Path

import numpy as np
import pytest

import plumbrule_core.engine
from plumbrule_core.documents.results import ArrayRef
from plumbrule_core.engine import blob_folder, cache_folder, load_array, shelf_folder
from plumbrule_core.engine.blobs import save_array
from plumbrule_core.engine.cache import prune
from plumbrule_core.engine.shelf import FolderShelf

DAY = 86400.0


def test_a_checkpoint_comes_back_as_it_was_saved(tmp_path):
    shelf = FolderShelf(tmp_path / "shelf", "abc")
    assert shelf.load() is None
    assert shelf.written == ""
    t2 = np.arange(24.0).reshape(2, 3, 4)
    shelf.save({"t2": t2, "n": np.array(7), "file": np.array([True, False]), "stage": np.array("damped")})
    kept = shelf.load()
    assert np.array_equal(kept["t2"], t2)
    assert int(kept["n"]) == 7
    assert kept["file"].tolist() == [True, False]
    assert str(kept["stage"]) == "damped"
    assert re.fullmatch(r"\d{4}-\d\d-\d\d \d\d:\d\d", shelf.written)


def test_a_checkpoint_is_replaced_as_a_whole(tmp_path):
    shelf = FolderShelf(tmp_path, "abc")
    shelf.save({"t1": np.zeros(3), "t2": np.zeros(4)})
    shelf.save({"t1": np.ones(3)})
    assert list(shelf.load()) == ["t1"]
    assert [path.name for path in tmp_path.iterdir()] == ["abc.npz"]


def test_where_writing_fails_the_old_checkpoint_stays(tmp_path, monkeypatch):
    shelf = FolderShelf(tmp_path, "abc")
    shelf.save({"t1": np.zeros(3)})

    def full(descriptor):
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(os, "fsync", full)
    with pytest.raises(OSError, match="No space left"):
        shelf.save({"t1": np.ones(3)})
    assert shelf.load()["t1"].tolist() == [0, 0, 0]
    assert [path.name for path in tmp_path.iterdir()] == ["abc.npz"]


@pytest.mark.parametrize("keep", [0, 10, 200, 0.5, 0.99])
def test_a_checkpoint_that_was_cut_short_is_said_and_counts_as_none(tmp_path, keep):
    said = []
    shelf = FolderShelf(tmp_path, "abc", said.append)
    shelf.save({"t1": np.arange(1000.0)})
    whole = shelf.path.read_bytes()
    shelf.path.write_bytes(whole[: int(keep * len(whole)) if keep < 1 else keep])
    assert shelf.load() is None
    assert "cannot be read" in said[0]
    assert "starting afresh" in said[0]


def test_a_flipped_bit_is_noticed(tmp_path):
    said = []
    shelf = FolderShelf(tmp_path, "abc", said.append)
    shelf.save({"t1": np.arange(1000.0)})
    content = bytearray(shelf.path.read_bytes())
    content[len(content) // 2] ^= 1
    shelf.path.write_bytes(content)
    assert shelf.load() is None
    assert len(said) == 1


class Trap:
    sprung = False

    def __reduce__(self):
        return (setattr, (Trap, "sprung", True))


def test_a_pickle_in_a_checkpoint_is_not_run(tmp_path):
    said = []
    shelf = FolderShelf(tmp_path, "abc", said.append)
    np.savez(shelf.path, t1=np.array([Trap()], dtype=object))
    assert shelf.load() is None
    assert len(said) == 1
    shelf.path.write_bytes(pickle.dumps(Trap()))
    assert shelf.load() is None
    assert not Trap.sprung


def test_arrays_of_objects_are_refused(tmp_path):
    with pytest.raises(ValueError, match="Object arrays cannot be saved"):
        FolderShelf(tmp_path, "abc").save({"odd": np.array([{}], dtype=object)})
    with pytest.raises(ValueError, match="Object arrays cannot be saved"):
        save_array(tmp_path, np.array([{}], dtype=object))
    assert list(tmp_path.iterdir()) == []


def test_no_source_file_of_the_engine_knows_pickle():
    for source in Path(plumbrule_core.engine.__file__).parent.glob("*.py"):
        text = source.read_text()
        assert "import pickle" not in text
        assert "allow_pickle=True" not in text


def test_an_array_is_named_by_its_bytes_and_kept_once(tmp_path):
    array = np.linspace(0, 1, 7, dtype=np.float32)
    ref = save_array(tmp_path, array)
    assert ref == save_array(tmp_path, array.copy())
    assert re.fullmatch(r"[0-9a-f]{20}", ref.blob)
    assert [path.name for path in tmp_path.iterdir()] == [f"{ref.blob}.npy"]
    assert np.array_equal(load_array(tmp_path, ref), array)
    assert load_array(tmp_path, ref).dtype == np.float32


def test_an_array_that_is_gone_raises(tmp_path):
    with pytest.raises(FileNotFoundError):
        load_array(tmp_path, ArrayRef(blob="0" * 20, shape=(1,), dtype="float64"))


def test_the_cache_folder_is_the_named_one_and_made_where_missing(tmp_path, monkeypatch):
    monkeypatch.setenv("PLUMBRULE_CACHE", str(tmp_path / "a" / "b"))
    assert cache_folder() == tmp_path / "a" / "b"
    assert cache_folder().is_dir()


def test_without_a_name_the_cache_folder_is_the_users(tmp_path, monkeypatch):
    monkeypatch.delenv("PLUMBRULE_CACHE", raising=False)
    monkeypatch.setenv("XDG_CACHE_HOME", str(tmp_path))
    assert "plumbrule" in str(cache_folder())


def aged(path: Path, days: float, size: int = 10) -> Path:
    path.parent.mkdir(parents=True, exist_ok=True)
    path.write_bytes(b"x" * size)
    os.utime(path, (1e9 - days * DAY, 1e9 - days * DAY))
    return path


def test_pruning_removes_what_is_old_but_not_what_the_plan_names(tmp_path):
    old = aged(shelf_folder(tmp_path) / "old.npz", 31)
    needed = aged(shelf_folder(tmp_path) / "needed.npz", 31)
    young = aged(blob_folder(tmp_path) / "young.npy", 29)
    prune(tmp_path, 1e9, keep=["needed"])
    assert [p.exists() for p in (old, needed, young)] == [False, True, True]


def test_pruning_keeps_the_youngest_within_the_size(tmp_path):
    files = [aged(blob_folder(tmp_path) / f"{n}.npy", n, size=100) for n in range(5)]
    prune(tmp_path, 1e9, size=250)
    assert [p.exists() for p in files] == [True, True, False, False, False]


def test_pruning_removes_the_scratch_of_programs_that_are_gone(tmp_path):
    mine = shelf_folder(tmp_path) / f"worker-{os.getpid()}-abc"
    orphan = shelf_folder(tmp_path) / "worker-400000000-abc"
    for folder in (mine, orphan):
        aged(folder / "integrals", 0)
    prune(tmp_path, 1e9)
    assert mine.exists()
    assert not orphan.exists()


def test_pruning_an_empty_cache_does_nothing(tmp_path):
    prune(tmp_path, 1e9)
    assert list(tmp_path.iterdir()) == []
