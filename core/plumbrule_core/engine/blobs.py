"""Arrays of results: one `.npy` file each, without pickle, named by the digest of its bytes."""

import hashlib
import io
import os
from pathlib import Path

import numpy as np

from plumbrule_core.documents.results import ArrayRef
from plumbrule_core.engine.files import write_whole


def save_array(folder: Path, array: np.ndarray) -> ArrayRef:
    """Keep one array; raises OSError where the disk is full, ValueError for an array of objects."""
    buffer = io.BytesIO()
    np.save(buffer, array, allow_pickle=False)
    content = buffer.getvalue()
    ref = ArrayRef(
        blob=hashlib.sha256(content).hexdigest()[:20],
        shape=tuple(array.shape),
        dtype=str(array.dtype),
    )
    path = folder / f"{ref.blob}.npy"
    if path.exists():
        os.utime(path)
    else:
        write_whole(path, lambda file: file.write(content))
    return ref


def load_array(folder: Path, ref: ArrayRef) -> np.ndarray:
    """The array again; raises OSError where it is gone and ValueError where it is damaged."""
    return np.load(folder / f"{ref.blob}.npy", allow_pickle=False)
