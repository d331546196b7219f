"""Arrays in the casebook: compressed `.npy` bytes, named by their content, never pickled."""

import hashlib
import io
import math
import sqlite3
import zlib

import numpy as np

from plumbrule_core.documents.results import ArrayRef
from plumbrule_core.errors import CasebookError

HEADER_LIMIT = 65_536 + 12
"""Longest header of the `.npy` format version 1.0, with its magic string, in bytes."""
COMPRESSION = 1
"""The quickest: floating-point numbers gain little from more effort (common practice, no source)."""


def put(db: sqlite3.Connection, npy: bytes) -> ArrayRef:
    """Keep the array and name it; raises CasebookError where the bytes are no plain array."""
    array = _unpacked(npy, "an array")
    name = name_of(npy)
    db.execute(
        "INSERT OR REPLACE INTO blobs (name, packed) VALUES (?, ?)", (name, zlib.compress(npy, COMPRESSION))
    )
    return ArrayRef(blob=name, shape=array.shape, dtype=str(array.dtype))


def get(db: sqlite3.Connection, ref: ArrayRef) -> np.ndarray:
    """The array; raises CasebookError where it is missing or damaged."""
    row = db.execute("SELECT packed FROM blobs WHERE name = ?", (ref.blob,)).fetchone()
    if row is None:
        raise CasebookError(
            f"The casebook does not hold the array {ref.blob}; compute the task again to have it."
        )
    npy = _inflated(row[0], ref)
    if name_of(npy) != ref.blob:
        raise CasebookError(_damaged(ref))
    array = _unpacked(npy, f"The array {ref.blob}")
    if array.shape != ref.shape or array.dtype != np.dtype(ref.dtype):
        raise CasebookError(_damaged(ref))
    return array


def name_of(npy: bytes) -> str:
    """Twenty hexadecimal digits that name the bytes of an `.npy` file."""
    return hashlib.sha256(npy).hexdigest()[:20]


def _inflated(packed: object, ref: ArrayRef) -> bytes:
    """At most as many bytes as the array can have: a small damaged file must not fill the memory."""
    try:
        most = math.prod(ref.shape) * np.dtype(ref.dtype).itemsize + HEADER_LIMIT
        return zlib.decompressobj().decompress(packed, most)  # type: ignore[arg-type]
    except (zlib.error, TypeError, ValueError, OverflowError) as error:
        raise CasebookError(_damaged(ref)) from error


def _unpacked(npy: bytes, what: str) -> np.ndarray:
    try:
        array = np.load(io.BytesIO(npy), allow_pickle=False)
    except (ValueError, EOFError, OSError, MemoryError) as error:
        raise CasebookError(f"{what} is not a plain array of numbers: {error}") from error
    if not isinstance(array, np.ndarray) or array.dtype.kind not in "biufcSU":
        raise CasebookError(f"{what} is not a plain array of numbers or texts.")
    return array


def _damaged(ref: ArrayRef) -> str:
    return f"The array {ref.blob} is damaged in the casebook; compute the task again to have it."
