"""Round numbers for an axis."""

import math


def step(span: float, most: int) -> float:
    """The smallest of 1, 2 or 5 times a power of ten that divides `span` into at most `most` parts."""
    if span <= 0:
        return 1.0
    rough = span / max(most, 1)
    power = 10.0 ** math.floor(math.log10(rough))
    for factor in (1, 2, 5, 10):
        if factor * power >= rough * (1 - 1e-9):
            return factor * power
    return 10 * power


def ticks(low: float, high: float, most: int = 6) -> tuple[float, ...]:
    """Round values from `low` to `high`."""
    if not high > low:
        return (low,)
    size = step(high - low, most)
    first, last = math.ceil(low / size - 1e-9), math.floor(high / size + 1e-9)
    return tuple(n * size for n in range(first, last + 1))


def tick_text(value: float, size: float) -> str:
    """A tick's label with the places its step needs."""
    places = max(0, -math.floor(math.log10(size) + 1e-9))
    text = f"{value:.{places}f}"
    return text.replace("-", "\u2212") if text.strip("-0.") else text.removeprefix("-")
