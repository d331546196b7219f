"""The cache folder: checkpoints, arrays of results, calibration; all of it can be computed again."""

import contextlib
import os
import re
import shutil
from collections.abc import Iterable, Iterator
from pathlib import Path

import psutil

KEEP_DAYS = 30
KEEP_BYTES = 10 * 10**9
SCRATCH = "worker-"
"""Begins the name of a worker's scratch folder; the process id of the program that started it follows."""


def cache_folder() -> Path:
    """The folder that `PLUMBRULE_CACHE` names, else the user's cache folder; made where it is missing."""
    named = os.environ.get("PLUMBRULE_CACHE")
    if named:
        folder = Path(named).absolute()
    else:
        from platformdirs import user_cache_dir

        folder = Path(user_cache_dir("plumbrule", appauthor=False))
    folder.mkdir(mode=0o700, parents=True, exist_ok=True)
    return folder


def shelf_folder(cache: Path) -> Path:
    """Where checkpoints and the workers' logs are."""
    return cache / "shelf"


def blob_folder(cache: Path) -> Path:
    """Where the arrays of results are."""
    return cache / "blobs"


def prune(
    cache: Path, now: float, *, keep: Iterable[str] = (), days: float = KEEP_DAYS, size: float = KEEP_BYTES
) -> None:
    """Remove files unused for so many days, then the oldest until `size` bytes remain.

    `now` is seconds since the epoch; files named after a task in `keep` stay. Scratch folders go
    whose program is gone.
    """
    kept = set(keep)
    files = [path for folder in (shelf_folder(cache), blob_folder(cache)) for path in _files(folder)]
    facts = [(stat.st_mtime, stat.st_size, path) for path, stat in files if path.stem not in kept]
    total = 0
    for stamp, length, path in sorted(facts, reverse=True):
        total += length
        if now - stamp > days * 86400 or total > size:
            # Another window may use or have removed the file: then it is left to that one.
            with contextlib.suppress(OSError):
                path.unlink()
    for folder in shelf_folder(cache).glob(f"{SCRATCH}*"):
        owner = re.match(rf"{SCRATCH}(\d{{1,9}})-", folder.name)
        if owner and not psutil.pid_exists(int(owner[1])):
            shutil.rmtree(folder, ignore_errors=True)


def _files(folder: Path) -> Iterator[tuple[Path, os.stat_result]]:
    for path in folder.iterdir() if folder.is_dir() else ():
        with contextlib.suppress(FileNotFoundError):
            if path.is_file():
                yield path, path.stat()
