"""The active space of the recipe: proposed for each molecule, or set by electrons and orbitals."""

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QComboBox, QFormLayout, QSpinBox, QVBoxLayout, QWidget

from plumbrule_core.documents.recipe import ActiveSpace
from plumbrule_desktop.pages.build.ladder import DETECTION
from plumbrule_desktop.state import changes
from plumbrule_desktop.state.desk import Desk
from plumbrule_desktop.widgets.card import label

WORDS = {"propose": "proposed for each molecule", "set": "set: the same size for all", "none": "none"}
USUAL = 2
"""Electrons, and orbitals, that setting begins with: one pair in two orbitals."""
MOST = 100


class SpaceControl(QWidget):
    """Shown while the ladder has a rung that works in an active space."""

    def __init__(self, desk: Desk, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._desk = desk
        self.choice = QComboBox()
        self.choice.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.choice.setAccessibleName("Active space")
        for value, words in WORDS.items():
            self.choice.addItem(words, value)
        self.choice.activated.connect(lambda _: self._choose())
        self.electrons, self.orbitals = _box("Active electrons"), _box("Active orbitals")
        for box in (self.electrons, self.orbitals):
            box.valueChanged.connect(lambda _: self._set())
        self.counts = QWidget()
        form = QFormLayout(self.counts)
        form.setContentsMargins(0, 0, 0, 0)
        form.addRow("Electrons", self.electrons)
        form.addRow("Orbitals around the gap", self.orbitals)
        self.fault = label("", "fault")
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(3)
        for part in (label("Active space", "muted", wrap=False), self.choice, self.counts, self.fault):
            column.addWidget(part)

    def refresh(self, fault: str) -> None:
        """Show the recipe's space and what is wrong with it."""
        recipe = self._desk.brief.recipe
        asked = recipe.active_space or ActiveSpace()
        self.choice.setCurrentIndex(self.choice.findData(asked.choice))
        for box, value in ((self.electrons, asked.electrons), (self.orbitals, _count(asked))):
            box.blockSignals(True)
            box.setValue(value or USUAL)
            box.blockSignals(False)
        self.counts.setVisible(asked.choice == "set")
        self.setEnabled(not self._desk.casebook.read_only)
        self.fault.setText(fault)
        self.fault.setVisible(bool(fault))
        self.setVisible(_works_in_one(self._desk) or bool(fault))

    def _choose(self) -> None:
        value = self.choice.currentData()
        if value == "set":
            self._set()
        else:
            self._change({"choice": value, "electrons": None, "orbitals": None, "count": None})

    def _set(self) -> None:
        counts = {"electrons": self.electrons.value(), "count": self.orbitals.value()}
        self._change({"choice": "set", "orbitals": None, **counts})

    def _change(self, values: dict[str, object]) -> None:
        before = self._desk.brief.recipe.active_space
        kept = dict(before.to_data()) if before is not None else {}
        after = {key: value for key, value in {**kept, **values}.items() if value is not None}
        self._desk.edit(changes.set_recipe("active_space", after), "Change the active space")


def _count(asked: ActiveSpace) -> int | None:
    return len(asked.orbitals) if asked.orbitals is not None else asked.count


def _works_in_one(desk: Desk) -> bool:
    finders = {rung.name for rung in desk.offer.rungs if rung.kind == DETECTION}
    return any(
        finders.intersection(rung.needs) for rung in desk.offer.rungs if rung.name in desk.brief.recipe.rungs
    )


def _box(name: str) -> QSpinBox:
    box = QSpinBox(minimum=1, maximum=MOST)
    box.setKeyboardTracking(False)
    box.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
    box.setAccessibleName(name)
    return box
