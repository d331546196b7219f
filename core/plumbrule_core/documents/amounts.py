"""Amounts of memory and disk, said the same way everywhere: 1 GB = 1000 MB."""

MB_PER_GB = 1000.0
"""Decimal, as the International System of Units has it."""


def memory(megabytes: float) -> str:
    """`120 MB`, `1.2 GB`."""
    return f"{megabytes:.0f} MB" if megabytes < 999.5 else f"{gigabytes(megabytes)} GB"


def gigabytes(megabytes: float) -> float:
    """The same amount in GB, to one decimal."""
    return round(megabytes / MB_PER_GB, 1)
