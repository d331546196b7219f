"""The ladder: a card for each rung, with what it is and what it will cost."""

from collections.abc import Iterable
from typing import TYPE_CHECKING

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QCheckBox, QHBoxLayout, QVBoxLayout, QWidget

from plumbrule_core.documents.plan import Forecast, Plan
from plumbrule_desktop.state import changes
from plumbrule_desktop.state.desk import Desk
from plumbrule_desktop.state.wording import forecast_details, forecast_words
from plumbrule_desktop.widgets.card import Card, label
from plumbrule_desktop.widgets.folded import Folded

if TYPE_CHECKING:
    from plumbrule_core.session import RungCard as Offered

FUNCTIONAL = "density functional"
DETECTION = "detection"
"""Kinds of rungs that the core offers."""
FUNCTIONALS = "Density functionals, to compare with"
SPACES = "Active spaces, where one determinant fails"


class RungCard(Card):
    """One rung: a check box puts it on the ladder or takes it off."""

    wanted = Signal(str, bool)

    def __init__(self, name: str, says: str, citation: str, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.name = name
        self.box = QCheckBox(name)
        self.box.setAccessibleDescription(says)
        self.box.setToolTip(citation)
        self.box.clicked.connect(lambda on: self.wanted.emit(name, on))
        self.cost = label("", "muted", wrap=False)
        top = QHBoxLayout()
        top.addWidget(self.box, 1)
        top.addWidget(self.cost)
        self.column.setSpacing(2)
        self.column.setContentsMargins(12, 8, 12, 8)
        self.column.addLayout(top)
        if says:
            self.column.addWidget(label(says, "muted"))

    def show_rung(self, on: bool, cost: Forecast | None, read_only: bool) -> None:
        """Whether it stands on the ladder, and its forecast over all species."""
        self.box.setChecked(on)
        self.box.setEnabled(not read_only)
        self.cost.setText(forecast_words(cost) if cost else "")
        self.cost.setToolTip(forecast_details(cost) if cost else "")
        self.mark(on)

    def mark(self, on: bool) -> None:
        """A rung on the ladder stands out."""
        font = self.box.font()
        if font.bold() != on:
            font.setBold(on)
            self.box.setFont(font)


class Ladder(QWidget):
    """The stack of rung cards, the dearest at the top as on a ladder."""

    def __init__(self, desk: Desk, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._desk = desk
        self.cards: dict[str, RungCard] = {}
        self._column = QVBoxLayout(self)
        self._column.setContentsMargins(0, 0, 0, 0)
        self._column.setSpacing(6)
        self._rebuild(())

    def refresh(self) -> None:
        """Show the rungs that are built and those that the recipe asks for, with their costs."""
        desk = self._desk
        # What finds an active space comes by need, so it is not offered.
        offered = {rung.name: rung for rung in desk.offer.rungs if rung.kind != DETECTION}
        chosen = desk.brief.recipe.rungs
        names = (*offered, *(name for name in chosen if name not in offered))
        if tuple(self.cards) != names:
            self._rebuild(names)
        costs = costs_by_rung(desk.plan)
        for name, card in self.cards.items():
            card.show_rung(name in chosen, costs.get(name), desk.casebook.read_only)
        for title, folded in self.folded.items():
            folded.show_count(len(self._groups[title].intersection(chosen)))

    def _rebuild(self, names: tuple[str, ...]) -> None:
        while (item := self._column.takeAt(0)) is not None:
            old = item.widget()
            if old is not None:
                old.hide()
                old.deleteLater()
        offered = {rung.name: rung for rung in self._desk.offer.rungs}
        self.cards = {}
        for name in names:
            rung = offered.get(name)
            card = RungCard(name, rung.says if rung else "", rung.citation if rung else "")
            card.wanted.connect(self._toggle)
            self.cards[name] = card
        self.folded = {title: Folded(title) for title in (SPACES, FUNCTIONALS)}
        self._groups = groups(self._desk.offer.rungs)
        inside = frozenset().union(*self._groups.values())
        for name in reversed([name for name in names if name not in inside]):
            self._column.addWidget(self.cards[name])
        for title, folded in self.folded.items():
            self._column.addWidget(folded)
            folded.setVisible(bool(self._groups[title]))
            for name in names:
                if name in self._groups[title]:
                    folded.column.addWidget(self.cards[name])

    def _toggle(self, name: str, on: bool) -> None:
        desk = self._desk
        if not on and desk.brief.recipe.rungs == (name,):
            desk.message.emit("A recipe needs at least one rung: add another before this one goes.", "error")
        else:
            order = tuple(rung.name for rung in desk.offer.rungs)
            says = f"{'Add' if on else 'Remove'} {name}"
            desk.edit(changes.with_rung(desk.brief, order, name, on), says)
        self.refresh()


def groups(rungs: "Iterable[Offered]") -> dict[str, frozenset[str]]:
    """The rungs that are folded away under each title: those in an active space, and the functionals."""
    spaces: set[str] = set()
    functionals: set[str] = set()
    for rung in rungs:
        if rung.kind == DETECTION or spaces.intersection(rung.needs):
            spaces.add(rung.name)
        elif rung.kind == FUNCTIONAL:
            functionals.add(rung.name)
    return {SPACES: frozenset(spaces), FUNCTIONALS: frozenset(functionals)}


def costs_by_rung(plan: Plan | None) -> dict[str, Forecast]:
    """The forecast of each rung, all species and basis sets together."""
    costs: dict[str, Forecast] = {}
    for task in plan.tasks if plan else ():
        name = task.spec.rung
        costs[name] = costs[name].plus(task.forecast) if name in costs else task.forecast
    return costs
