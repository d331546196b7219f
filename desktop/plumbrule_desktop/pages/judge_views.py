"""The views below the answer: methods, budget, readings, species. Further views are added to one list."""

from PySide6.QtWidgets import QTabBar, QTableView, QVBoxLayout, QWidget

from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.findings import Judgement, SpeciesJudgement
from plumbrule_desktop.models.grid import GridModel
from plumbrule_desktop.models.readings import readings_table
from plumbrule_desktop.pages.judge_answer import LEVEL_WORDS, said_once
from plumbrule_desktop.plots.budget import BudgetPlot
from plumbrule_desktop.plots.comparison import ComparisonPlot
from plumbrule_desktop.plots.panel import PlotPanel, fit_columns, numbers_table
from plumbrule_desktop.plots.series import budget, comparison
from plumbrule_desktop.state.amounts import MINUS
from plumbrule_desktop.state.answer_text import within
from plumbrule_desktop.widgets.card import Card, label, tint

MOST_HEIGHT = 460
"""A table higher than this, in points, scrolls by itself."""


class MethodsView(QWidget):
    """The answers of all rungs beside each other."""

    title = "Methods"

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.plot = ComparisonPlot()
        self.panel = PlotPanel("The rungs beside each other", self.plot)
        self._legend = label("", "muted")
        _column(self, self.panel, self._legend)

    def show_judgement(self, brief: Brief, judgement: Judgement) -> None:
        """Show the comparison."""
        answer = judgement.answer
        unit = answer.unit if answer else brief.question.unit if brief.question else "kJ/mol"
        needed = within(brief, answer) if answer else None
        self.plot.show_data(comparison(judgement, unit, needed))
        self.panel.refresh()
        self.panel.setVisible(bool(judgement.comparison))
        self._legend.setText(
            "Shaded: the accuracy needed. Filled: the rung the answer stands on. Cross: do not rely on it."
            if judgement.comparison
            else "No rung has an answer yet."
        )


class BudgetView(QWidget):
    """The causes of uncertainty."""

    title = "Budget"

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.plot = BudgetPlot()
        self.panel = PlotPanel("What the uncertainty is made of", self.plot)
        self._legend = label("", "muted")
        _column(self, self.panel, self._legend)

    def show_judgement(self, brief: Brief, judgement: Judgement) -> None:
        """Show the budget."""
        answer = judgement.answer
        unit = answer.unit if answer else brief.question.unit if brief.question else "kJ/mol"
        data = budget(judgement, unit)
        self.plot.show_data(data)
        self.panel.refresh()
        self.panel.setVisible(bool(judgement.budget))
        legend = (
            "Bars add in quadrature; the dashed line is their sum. Arrow: a known shift, not part of the bar."
        )
        self._legend.setText(
            legend if judgement.budget else "No budget: there is no number that one could stand for."
        )


class ReadingsView(QWidget):
    """Every reading of every species beside its limit."""

    title = "Readings"

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.model = GridModel(self)
        self.table = numbers_table(self.model, "Readings of all species")
        self._empty = label("Nothing has been measured yet.", "muted")
        _column(self, self._empty, self.table)

    def show_judgement(self, brief: Brief, judgement: Judgement) -> None:
        """Show the readings."""
        fresh = readings_table(brief, judgement)
        another = fresh.header != self.model.numbers.header
        self.model.show(fresh)
        if another or fresh.rows:
            fit_columns(self.table)
        self.table.setMinimumHeight(min(MOST_HEIGHT, height_of(self.table)))
        self._empty.setVisible(not fresh.rows)
        self.table.setVisible(bool(fresh.rows))


class SpeciesView(QWidget):
    """One card a species: its verdict with reasons, its energies."""

    title = "Species"

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._column = _column(self)
        self._shown: tuple[SpeciesJudgement, ...] | None = None
        self._cards: list[Card] = []

    def show_judgement(self, brief: Brief, judgement: Judgement) -> None:
        """Show every species."""
        if judgement.species == self._shown:
            return
        self._shown = judgement.species
        for card in self._cards:
            self._column.removeWidget(card)
            card.hide()
            card.deleteLater()
        self._cards = [_species_card(one) for one in judgement.species]
        for place, card in enumerate(self._cards):
            self._column.insertWidget(place, card)


def _species_card(one: SpeciesJudgement) -> Card:
    card = Card()
    verdict = one.verdict
    card.column.addWidget(label(f"{one.name} \u00b7 {one.formula}", "heading"))
    headline, reasons = said_once(verdict)
    level = label(LEVEL_WORDS[verdict.level] + (f": {headline}" if headline else ""))
    tint(level, verdict.level)
    card.column.addWidget(level)
    if reasons:
        card.column.addWidget(label("\n".join(f"\u2022 {reason}" for reason in reasons)))
    energies = "\n".join(
        f"{rung}: {value:.8f} hartree".replace(": -", f": {MINUS}") for rung, value in one.energies.items()
    )
    if energies:
        card.column.addWidget(label(energies, "muted"))
    return card


def _column(home: QWidget, *parts: QWidget) -> QVBoxLayout:
    column = QVBoxLayout(home)
    column.setContentsMargins(10, 10, 10, 10)
    column.setSpacing(8)
    for part in parts:
        column.addWidget(part)
    column.addStretch(1)
    return column


def height_of(table: QTableView) -> int:
    """As high as the header and all rows."""
    rows = sum(table.rowHeight(row) for row in range(table.model().rowCount()))
    return rows + table.horizontalHeader().height() + 24


VIEWS = (MethodsView, BudgetView, ReadingsView, SpeciesView)
"""The one list of views, in the order of their tabs."""


class JudgeViews(QWidget):
    """The views under tabs. Only the one that is seen takes room, so that the page alone scrolls."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.tabs = QTabBar()
        self.tabs.setExpanding(False)
        self.tabs.setAccessibleName("Views of the judgement")
        self.views = tuple(view() for view in VIEWS)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(0)
        column.addWidget(self.tabs)
        for view in self.views:
            self.tabs.addTab(view.title)
            column.addWidget(view)
        column.addStretch(1)
        self.tabs.currentChanged.connect(self.turn_to)
        self.turn_to(0)

    def turn_to(self, place: int) -> None:
        """Show one view."""
        self.tabs.setCurrentIndex(place)
        for each, view in enumerate(self.views):
            view.setVisible(each == place)

    def show_judgement(self, brief: Brief, judgement: Judgement) -> None:
        """Hand the judgement to every view."""
        for view in self.views:
            view.show_judgement(brief, judgement)
