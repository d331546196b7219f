"""How many determinants a space has, and whether this machine can hold them; said before the start."""

from math import comb, log10

from plumbrule_core.errors import PlumbruleError

VECTORS = 36
"""Vectors of the length of the wave function that the exact solver holds at once (`correlation.solvers`)."""
TABLE_BYTES = 16
"""A link between two strings in the library's tables: four small integers."""
STATES, CHEAP = 3, 1e9
"""States followed at once where a product with the Hamiltonian takes no more than CHEAP operations."""
WORDS = ((9, "thousand million"), (6, "million"), (3, "thousand"))


def determinants(orbitals: int, alpha: int, beta: int) -> int:
    """The number of determinants with these spins."""
    return comb(orbitals, alpha) * comb(orbitals, beta)


def in_words(count: int) -> str:
    """`213 thousand`, `4.5 thousand million`, and powers of ten beyond."""
    if count < 1000:
        return str(count)
    power = log10(count)
    if power >= 12:
        return f"about 10 to the power of {round(power)}"
    size, word = next((size, word) for size, word in WORDS if power >= size)
    return f"{count / 10**size:.3g} {word}"


def exact_memory_mb(orbitals: int, alpha: int, beta: int) -> float:
    """Peak memory of the exact diagonalisation in MB: its vectors, and the tables of single replacements."""
    strings = {comb(orbitals, n): n for n in (alpha, beta)}
    tables = sum(count * (n * (orbitals - n) + n) for count, n in strings.items())
    numbers = VECTORS * determinants(orbitals, alpha, beta) + orbitals**4
    return _float(8 * numbers + TABLE_BYTES * tables) * 1e-6


def exact_operations(orbitals: int, alpha: int, beta: int) -> float:
    """Operations of one product of the Hamiltonian with a vector: every pair of replacements."""
    pairs = orbitals * (orbitals + 1) // 2
    return _float(determinants(orbitals, alpha, beta) * (2 * pairs * pairs + 20 * pairs))


def states_followed(orbitals: int, alpha: int, beta: int) -> int:
    """States followed at once: several where that is cheap, lest one of another symmetry is missed."""
    return STATES if exact_operations(orbitals, alpha, beta) <= CHEAP else 1


def refuse_beyond(orbitals: int, alpha: int, beta: int, memory_mb: float, what: str, instead: str) -> None:
    """Raise PlumbruleError, with the count in words, where the wave function does not fit into memory."""
    needed = exact_memory_mb(orbitals, alpha, beta)
    if needed <= memory_mb:
        return
    raise PlumbruleError(
        f"{what} has {in_words(determinants(orbitals, alpha, beta))} determinants and needs "
        f"{_gigabytes(needed)}, but {_gigabytes(memory_mb)} are allowed: {instead}"
    )


def _float(count: int) -> float:
    """A count as a number that is still finite where the count is beyond all machines."""
    return float(min(count, 10**200))


def _gigabytes(mb: float) -> str:
    if mb > 1e9:
        return f"{in_words(round(mb / 1000))} GB of memory"
    return f"{mb / 1000:.3g} GB of memory"
