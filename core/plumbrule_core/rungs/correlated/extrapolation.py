"""Direct inversion in the iterative subspace, with a memory that can be put on the shelf.

P. Pulay, Chem. Phys. Lett. 73, 393 (1980); for coupled cluster G. E. Scuseria, T. J. Lee and H. F. Schaefer,
Chem. Phys. Lett. 130, 236 (1986). Kept apart from the library's because a run that is carried on must have
the same memory as one that was never interrupted, else it needs more iterations.
"""

from collections.abc import Mapping

import numpy as np
from numpy.typing import NDArray

Vector = NDArray[np.float64]
SPACE = 6
SMALLEST_SPACE = 3
SHARE_OF_MEMORY = 0.2


class Extrapolation:
    """The last vectors with their errors; each new vector is replaced by their best combination."""

    def __init__(self, start: Vector, space: int = SPACE) -> None:
        self.space = space
        self.previous = start
        self.vectors: list[Vector] = []
        self.errors: list[Vector] = []
        self._products = np.zeros((0, 0))

    def __call__(self, vector: Vector) -> Vector:
        """Take in a new vector, whose error is its distance from the last result; return the next result."""
        self._add(vector, vector - self.previous)
        result = np.zeros_like(vector)
        for weight, kept in zip(_weights(self._products), self.vectors, strict=True):
            result += weight * kept
        self.previous = result
        return result

    def state(self) -> dict[str, np.ndarray]:
        """What is needed to carry on; the memory in single precision, which its use does not feel."""
        return {
            "amplitudes": self.previous,
            "vectors": np.array(self.vectors, dtype=np.float32),
            "errors": np.array(self.errors, dtype=np.float32),
        }

    @classmethod
    def carried_on(cls, state: Mapping[str, np.ndarray], space: int = SPACE) -> "Extrapolation":
        """The extrapolation as it was when `state` was taken."""
        restored = cls(np.array(state["amplitudes"], dtype=float), space)
        for vector, error in zip(state["vectors"], state["errors"], strict=True):
            restored._add(vector.astype(float), error.astype(float))
        return restored

    def _add(self, vector: Vector, error: Vector) -> None:
        self.vectors.append(vector)
        self.errors.append(error)
        del self.vectors[: -self.space], self.errors[: -self.space]
        count = len(self.errors)
        products = np.zeros((count, count))
        products[:-1, :-1] = self._products[-(count - 1) :, -(count - 1) :] if count > 1 else 0
        products[-1] = products[:, -1] = [error @ other for other in self.errors]
        self._products = products


def space_for(size: int, memory_mb: float) -> int:
    """How many vectors of this size are kept: six, fewer where they would fill a fifth of the memory."""
    fitting = int(SHARE_OF_MEMORY * memory_mb * 1e6 / (16 * max(size, 1)))
    return max(SMALLEST_SPACE, min(SPACE, fitting))


def _weights(products: Vector) -> Vector:
    """Weights that sum to one and make the combined error smallest, from the products of the errors."""
    count = len(products)
    system = np.ones((count + 1, count + 1))
    system[-1, -1] = 0
    system[:-1, :-1] = products / max(products.diagonal().max(), np.finfo(float).tiny)
    wanted = np.zeros(count + 1)
    wanted[-1] = 1
    return np.asarray(np.linalg.lstsq(system, wanted, rcond=1e-14)[0][:-1], dtype=np.float64)
