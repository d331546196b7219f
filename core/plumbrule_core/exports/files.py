"""Writing a file so that no half-written one can ever stand at its name."""

import contextlib
import os
from pathlib import Path

from plumbrule_core.errors import Unreadable


def save(path: Path, data: bytes) -> None:
    """Write beside and rename; raises Unreadable with the reason where the folder does not take the file."""
    beside = path.with_name(f".{path.name}.{os.getpid()}.part")
    try:
        with beside.open("wb") as file:
            file.write(data)
            file.flush()
            os.fsync(file.fileno())
        beside.replace(path)
    except OSError as error:
        with contextlib.suppress(OSError):
            beside.unlink()
        raise Unreadable(f"'{path}' cannot be written: {error.strerror or error}") from None
