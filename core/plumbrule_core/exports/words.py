"""How the report puts numbers and names: every number with as many digits as it deserves, and its unit."""

from collections.abc import Mapping

from plumbrule_core.documents.findings import Level, Remedy, Severity
from plumbrule_core.documents.results import ReadingValue
from plumbrule_core.judgement.wording import bar

PLACES: Mapping[str, int] = {"kJ/mol": 1, "kcal/mol": 2, "eV": 3, "cm-1": 0, "hartree": 6}
"""Digits after the point of an energy in each unit: about 0.1 kJ/mol everywhere, hartree finer."""

SEVERITY_WORDS: Mapping[Severity, str] = {"note": "Note", "care": "Take care", "stop": "Stop"}
LEVEL_WORDS: Mapping[Level, str] = {
    "unknown": "Not judged yet",
    "sound": "Sound",
    "take care": "Take care",
    "do not rely on it": "Do not rely on it",
}

READING_WORDS: Mapping[str, str] = {
    "s2": "<S^2> of the reference",
    "s2_ideal": "<S^2> of the pure spin state",
    "s2_excess": "<S^2> above the pure spin state",
    "stable": "Reference among solutions of its kind",
    "stable_external": "Reference among unrestricted solutions",
    "instability_depth": "Unrestricted solution lies lower by",
    "uhf_natural_occupations": "Natural occupations, unrestricted",
    "uhf_fractional": "Largest share of an unpaired electron",
    "homo_lumo_gap": "Gap between occupied and virtual orbitals",
    "overlap_condition": "Smallest eigenvalue of the overlap",
    "removed_functions": "Basis functions removed as dependent",
    "natural_occupations": "Natural occupations, MP2",
    "M": "M of the natural occupations",
    "mp2_largest_t2": "Largest doubles amplitude, MP2",
    "c0_squared": "Weight of the reference determinant",
    "T1": "T1",
    "D1": "D1",
    "D2": "D2",
    "largest_t1": "Largest singles amplitude",
    "largest_t2": "Largest doubles amplitude",
    "share_of_triples": "Share of (T) in the correlation energy",
    "triples": "(T) correction",
    "%TAE[(T)]": "Share of (T) in the atomisation energy",
}


STATEMENTS: Mapping[str, tuple[str, str]] = {
    "stable": ("a minimum", "not a minimum"),
    "stable_external": ("a minimum", "not a minimum: an unrestricted solution lies lower"),
}
"""What a reading that is true or false says: where it is true, where it is not."""


def said(name: str, value: ReadingValue | str, unit: str = "") -> str:
    """The value of a reading in words where it is true or false, else as a number with its unit."""
    yes, no = STATEMENTS.get(name, ("yes", "no"))
    if isinstance(value, bool) or value in ("yes", "no"):
        return yes if value in (True, "yes") else no
    return reading(value, unit)


def source(text: str) -> str:
    """Where a limit or an estimate comes from, as far as a reader can look it up or repeat it."""
    parts = (part.strip().removeprefix("arithmetic").removeprefix(":").strip() for part in text.split(";"))
    known = (part.replace("common practice, no source", "common practice") for part in parts)
    return "; ".join(part for part in known if part and "from memory" not in part)


def remedy(one: Remedy) -> str:
    """What can be done, as a sentence on paper; on the screen the same words stand on a button."""
    done = one.label.removesuffix(" and run")
    return f"{done}, and compute again." if one.then_run else f"{done}."


def difference(value: float, unit: str) -> str:
    """An energy difference with the digits of its unit, for a column that names it; a true minus sign."""
    return minus(f"{value:.{PLACES[unit]}f}")


def energy(value: float, unit: str) -> str:
    """An energy difference with its unit, as `−40.4 kJ/mol`."""
    return f"{difference(value, unit)} {unit}"


def answer(value: float, uncertainty: float | None, unit: str) -> str:
    """`941.2 ± 6.3 kJ/mol`: the value to the last digit of its bar, or without a bar where there is none."""
    if uncertainty is None or uncertainty <= 0:
        return energy(value, unit)
    size = bar(uncertainty)
    places = len(size.partition(".")[2])
    return f"{minus(f'{value:.{places}f}')} ± {size} {unit}"


def minus(text: str) -> str:
    """A leading hyphen as a minus sign; a zero has no sign."""
    if text.startswith("-") and not text.strip("-0."):
        return text[1:]
    return text.replace("-", "−", 1) if text.startswith("-") else text


def hartree(value: float) -> str:
    """A total energy in hartree, eight digits after the point."""
    return minus(f"{value:.8f}")


def reading(value: ReadingValue | str, unit: str = "") -> str:
    """The value of a reading with its unit; long lists are cut after eight entries."""
    if isinstance(value, str):
        return value
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, tuple):
        shown = ", ".join(f"{one:.3f}" for one in value[:8])
        text = f"{shown}, … ({len(value)} in all)" if len(value) > 8 else shown
    else:
        text = minus(_digits(value))
    return f"{text} {unit}".strip()


def _digits(value: float) -> str:
    """Four digits that count; no power of ten where none is needed; the residue of rounding is 0."""
    if abs(value) < 1e-12:
        return "0"
    if abs(value) >= 1000:
        return f"{value:.1f}"
    return f"{value:.4g}" if abs(value) >= 1e-3 else f"{value:.1e}"


def duration(seconds: float) -> str:
    """`0.4 s`, `75 s`, `12 min`, `3.5 h`."""
    if seconds < 10:
        return f"{seconds:.1f} s"
    if seconds < 120:
        return f"{seconds:.0f} s"
    return f"{seconds / 60:.0f} min" if seconds < 7200 else f"{seconds / 3600:.1f} h"
