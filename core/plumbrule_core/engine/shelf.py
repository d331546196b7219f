"""Checkpoints on disk: per task one archive of plain arrays, replaced as a whole, never a pickle."""

import zipfile
import zlib
from collections.abc import Callable, Mapping
from datetime import datetime
from pathlib import Path
from typing import BinaryIO

import numpy as np

from plumbrule_core.engine.files import write_whole


def ignore(_text: str) -> None:
    """Nobody listens."""


class FolderShelf:
    """Where one task keeps its checkpoints (`rungs.protocol.Shelf`).

    A task's id is the digest of everything that determines its number, so a checkpoint found under it
    fits by geometry, basis, settings and library versions.
    """

    def __init__(self, folder: Path, task_id: str, say: Callable[[str], None] = ignore) -> None:
        """`say` gets a sentence where a checkpoint cannot be read."""
        self.path = folder / f"{task_id}.npz"
        self._say = say

    @property
    def written(self) -> str:
        """When the checkpoint was written, as `2026-03-01 14:05`; empty where there is none."""
        try:
            stamp = self.path.stat().st_mtime
        except FileNotFoundError:
            return ""
        return datetime.fromtimestamp(stamp).strftime("%Y-%m-%d %H:%M")

    def load(self) -> Mapping[str, np.ndarray] | None:
        """The last checkpoint, or None where there is none that can be read."""
        try:
            return _read_archive(self.path)
        except FileNotFoundError:
            return None
        except _UNREADABLE as error:
            self._say(f"the checkpoint {self.path} cannot be read ({error}): starting afresh")
            return None

    def save(self, arrays: Mapping[str, np.ndarray]) -> None:
        """Write beside and rename; raises OSError for a full disk, ValueError for arrays of objects."""
        write_whole(self.path, lambda file: _write_archive(file, arrays))


_UNREADABLE = (OSError, ValueError, EOFError, RuntimeError, zipfile.BadZipFile, zlib.error)


def _read_archive(path: Path) -> Mapping[str, np.ndarray]:
    arrays = {}
    with zipfile.ZipFile(path) as archive:
        for name in archive.namelist():
            with archive.open(name) as member:
                arrays[name.removesuffix(".npy")] = np.lib.format.read_array(member, allow_pickle=False)
    return arrays


def _write_archive(file: BinaryIO, arrays: Mapping[str, np.ndarray]) -> None:
    with zipfile.ZipFile(file, "w", zipfile.ZIP_STORED) as archive:
        for name, array in arrays.items():
            with archive.open(f"{name}.npy", "w", force_zip64=True) as member:
                np.lib.format.write_array(member, np.asarray(array), allow_pickle=False)
