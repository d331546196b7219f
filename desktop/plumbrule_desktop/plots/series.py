"""What the plots show, as plain data: no widget, no colour. Each can say its numbers as a table."""

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from plumbrule_core.documents.findings import BudgetLine, Judgement
from plumbrule_core.documents.plan import Settings
from plumbrule_core.documents.run_state import TracePoint
from plumbrule_core.units import EnergyUnit
from plumbrule_desktop.state.amounts import energy, signed, unit_words

FLOOR = 1e-14
"""A change or residual below this is drawn here: a logarithm knows no zero."""


@dataclass(frozen=True, slots=True)
class Numbers:
    """A plot as a table: a header and rows of text."""

    header: tuple[str, ...]
    rows: tuple[tuple[str, ...], ...] = ()

    def text(self) -> str:
        """Tab-separated lines, for pasting into a sheet."""
        return "\n".join("\t".join(row) for row in (self.header, *self.rows))


@dataclass(frozen=True, slots=True, eq=False)
class Curve:
    """One quantity along the iterations; `y` and `goal` are decimal logarithms."""

    name: str
    unit: str
    x: np.ndarray
    y: np.ndarray
    goal: float | None = None

    @property
    def reached(self) -> bool:
        """Whether the last point lies at or below the goal."""
        return self.goal is not None and len(self.y) > 0 and bool(self.y[-1] <= self.goal)


@dataclass(frozen=True, slots=True, eq=False)
class Convergence:
    """How one task converges: the change of its energy, and its residual where the method has one."""

    change: Curve
    residual: Curve
    energies: tuple[float, ...] = ()
    """Total energies in hartree, one for each iteration."""

    def says(self) -> str:
        """The picture in one sentence."""
        if not self.energies:
            return "No iteration yet."
        parts = [f"{len(self.energies)} iterations, last energy {self.energies[-1]:.8f} hartree"]
        for curve in (self.change, self.residual):
            if len(curve.y):
                goal = f", goal {10**curve.goal:.0e}" if curve.goal is not None else ""
                parts.append(
                    f"{curve.name.lower()} {10 ** float(curve.y[-1]):.1e} {curve.unit}{goal}".strip()
                )
        return "; ".join(parts) + "."

    def numbers(self) -> Numbers:
        """One row for each iteration."""
        changes = dict(zip(self.change.x.tolist(), self.change.y.tolist(), strict=True))
        residuals = dict(zip(self.residual.x.tolist(), self.residual.y.tolist(), strict=True))
        rows = tuple(
            (str(n), f"{value:.10f}", _power(changes.get(n)), _power(residuals.get(n)))
            for n, value in enumerate(self.energies, start=1)
        )
        return Numbers(("Iteration", "Energy (hartree)", "Change (hartree)", "Residual"), rows)


def convergence(trace: Sequence[TracePoint], settings: Settings | None = None, rung: str = "") -> Convergence:
    """The curves of a trace; iterations are counted through, also where a task was carried on."""
    energies = tuple(point[1] for point in trace)
    steps = np.abs(np.diff(np.asarray(energies, dtype=float)))
    with_residual = [(place, point[2]) for place, point in enumerate(trace, start=1) if point[2] is not None]
    change_goal, residual_goal = _goals(settings, rung)
    return Convergence(
        Curve("Change of energy", "hartree", np.arange(2.0, len(energies) + 1), _log(steps), change_goal),
        Curve(
            "Residual norm",
            "",
            np.asarray([place for place, _ in with_residual], dtype=float),
            _log(np.asarray([abs(residual) for _, residual in with_residual], dtype=float)),
            residual_goal,
        ),
        energies,
    )


def _goals(settings: Settings | None, rung: str) -> tuple[float | None, float | None]:
    if settings is None:
        return None, None
    if rung == "HF":
        return math.log10(settings.scf_tolerance), None
    if "CC" in rung:
        return math.log10(settings.cc_tolerance), math.log10(settings.cc_residual)
    return None, None


def _log(values: np.ndarray) -> np.ndarray:
    return np.log10(np.maximum(values, FLOOR))


def _power(logarithm: float | None) -> str:
    return "" if logarithm is None else f"{10**logarithm:.2e}"


@dataclass(frozen=True, slots=True)
class Point:
    """One rung's answer in the question's unit."""

    rung: str
    basis: str
    value: float
    from_best: float
    bar: float | None
    stopped: bool
    best: bool


@dataclass(frozen=True, slots=True)
class Comparison:
    """The answers of all rungs beside each other, relative to the one the answer stands on."""

    unit: EnergyUnit
    points: tuple[Point, ...] = ()
    within: float | None = None
    """The accuracy needed."""

    def says(self) -> str:
        """The picture in one sentence."""
        if not self.points:
            return "No rung has an answer yet."
        return (
            "; ".join(f"{_named(point)} {energy(point.value, self.unit, point.bar)}" for point in self.points)
            + "."
        )

    def numbers(self) -> Numbers:
        """One row for each rung."""
        header = ("Rung", "Basis", f"Answer ({unit_words(self.unit)})", "From the best rung", "Remark")
        return Numbers(
            header,
            tuple(
                (
                    point.rung,
                    point.basis,
                    energy(point.value, self.unit, point.bar).rsplit(" ", 1)[0],
                    signed(point.from_best, self.unit),
                    remark(point),
                )
                for point in self.points
            ),
        )


def remark(point: Point) -> str:
    """What is to be said of a rung beside its number."""
    if point.stopped:
        return "do not rely on it"
    return "the answer stands on this" if point.best else ""


def _named(point: Point) -> str:
    name = f"{point.rung}/{point.basis}" if point.basis else point.rung
    note = remark(point)
    return f"{name} ({note}):" if note else f"{name}:"


def comparison(judgement: Judgement, unit: EnergyUnit, within: float | None = None) -> Comparison:
    """The comparison in the order of the ladder; a stopped rung or answer has no bar."""
    answer = judgement.answer
    trusted = judgement.verdict.level != "do not rely on it"
    points = tuple(
        Point(
            rung=one.rung,
            basis=one.basis,
            value=one.value,
            from_best=one.from_best,
            bar=one.uncertainty if trusted and not one.stopped else None,
            stopped=one.stopped,
            best=answer is not None and (one.rung, one.basis or answer.basis) == (answer.rung, answer.basis),
        )
        for one in judgement.comparison
    )
    return Comparison(unit, points, within)


@dataclass(frozen=True, slots=True)
class Budget:
    """The causes of uncertainty, largest first, and their sum in quadrature as the answer carries it."""

    unit: EnergyUnit
    lines: tuple[BudgetLine, ...] = ()
    total: float | None = None

    def says(self) -> str:
        """The picture in one sentence."""
        if not self.lines:
            return "No cause of uncertainty is known yet."
        parts = [f"{line.cause} {energy(line.size, line.unit)}{shift_words(line)}" for line in self.lines]
        whole = f" Together {energy(self.total, self.unit)}." if self.total is not None else ""
        return "; ".join(parts) + "." + whole

    def numbers(self) -> Numbers:
        """One row for each cause."""
        rows = tuple(
            (
                line.cause,
                energy(line.size, line.unit),
                signed(line.shift, line.unit) if line.shift is not None else "",
                line.how,
                line.source,
            )
            for line in self.lines
        )
        return Numbers(("Cause", "Size", "Known shift", "How it was found", "Source"), rows)


def shift_words(line: BudgetLine) -> str:
    """`, known shift +3.1 kJ/mol`, or nothing."""
    return f", known shift {signed(line.shift, line.unit)}" if line.shift is not None else ""


def budget(judgement: Judgement, unit: EnergyUnit) -> Budget:
    """The budget, the largest cause first."""
    lines = tuple(sorted(judgement.budget, key=lambda line: -line.size))
    total = judgement.answer.uncertainty if judgement.answer else None
    return Budget(unit, lines, total)
