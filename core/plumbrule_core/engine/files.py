"""Files that are either whole or not there: written beside, made durable, then renamed."""

import os
import tempfile
from collections.abc import Callable
from pathlib import Path
from typing import BinaryIO

UNFINISHED = ".unfinished"
"""Suffix of a file that is being written; a killed worker leaves it, pruning removes it."""


def write_whole(path: Path, write: Callable[[BinaryIO], object]) -> None:
    """Replace one file as a whole, or leave the old one as it was; raises OSError."""
    path.parent.mkdir(parents=True, exist_ok=True)
    handle, beside = tempfile.mkstemp(dir=path.parent, prefix=path.name, suffix=UNFINISHED)
    try:
        with os.fdopen(handle, "wb") as file:
            write(file)
            file.flush()
            os.fsync(file.fileno())
        Path(beside).replace(path)
    except BaseException:
        Path(beside).unlink(missing_ok=True)
        raise
    _keep_name(path.parent)


def _keep_name(folder: Path) -> None:
    """Make the renaming itself durable, where the system can open folders."""
    if os.name != "posix":
        return
    handle = os.open(folder, os.O_RDONLY)
    try:
        os.fsync(handle)
    finally:
        os.close(handle)
