"""The right of the Build page: what can be said before the run, the ladder, and the rest of the recipe."""

from collections.abc import Mapping

from PySide6.QtCore import Qt
from PySide6.QtGui import QWheelEvent
from PySide6.QtWidgets import QComboBox, QLabel, QVBoxLayout, QWidget

from plumbrule_core.basis_sets import BASES
from plumbrule_desktop.findings_view import FindingsView
from plumbrule_desktop.pages.build.ladder import Ladder
from plumbrule_desktop.pages.build.recipe_space import SpaceControl
from plumbrule_desktop.state import changes
from plumbrule_desktop.state.desk import Desk
from plumbrule_desktop.widgets.card import Card, label
from plumbrule_desktop.widgets.scroll import column_in_scroll

CHOICES: Mapping[str, tuple[str, Mapping[str, str]]] = {
    "core": (
        "Core electrons",
        {"frozen": "left out of the correlation (usual)", "all": "correlated too"},
    ),
    "reference": (
        "Reference",
        {
            "auto": "chosen for each species",
            "RHF": "RHF: pairs share an orbital",
            "UHF": "UHF: each spin its own orbitals",
            "ROHF": "ROHF: shared orbitals, open shell",
        },
    ),
    "density_fitting": (
        "Density fitting",
        {"auto": "where it saves time", "yes": "always", "no": "never: exact integrals"},
    ),
    "relativity": ("Relativity", {"none": "not included", "X2C": "scalar, X2C"}),
}
"""Key of the recipe: what it is called, and its values in words."""


class CalmCombo(QComboBox):
    """A combo box that scrolling past does not change."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setSizeAdjustPolicy(QComboBox.SizeAdjustPolicy.AdjustToMinimumContentsLengthWithIcon)
        self.setMinimumContentsLength(12)

    def wheelEvent(self, event: QWheelEvent) -> None:
        """Leave the wheel to the page."""
        event.ignore()


class Field(QWidget):
    """A caption, a control, and the faults that stand at it."""

    def __init__(self, caption: str, control: QWidget, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.control = control
        self.fault = label("", "fault")
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(3)
        words = label(caption, "muted", wrap=False)
        words.setBuddy(control)
        control.setAccessibleName(caption)
        for part in (words, control, self.fault):
            column.addWidget(part)
        self.show_fault("")

    def show_fault(self, says: str) -> None:
        """Show a fault beneath the control, or none."""
        self.fault.setText(says)
        self.fault.setVisible(bool(says))
        self.control.setProperty("faulty", "true" if says else "false")
        self.control.setAccessibleDescription(says)
        self.control.style().unpolish(self.control)
        self.control.style().polish(self.control)


class RecipePanel(QWidget):
    """The recipe as controls in plain words; every change is an edit of the desk's brief."""

    def __init__(self, desk: Desk, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._desk = desk
        self.findings = FindingsView()
        self.remarks = FindingsView()
        for view in (self.findings, self.remarks):
            view.remedy_chosen.connect(desk.apply)
        self.ladder = Ladder(desk)
        self.rung_fault = label("", "fault")
        self.basis = CalmCombo()
        self.basis.activated.connect(lambda _: self._set_basis())
        self.pair = CalmCombo()
        self.pair.activated.connect(lambda _: self._set_basis())
        self.combos = {key: self._combo(key, words) for key, (_, words) in CHOICES.items()}
        self.fields = {"basis": Field("Basis set", self.basis)}
        self.fields |= {key: Field(CHOICES[key][0], combo) for key, combo in self.combos.items()}
        self.space = SpaceControl(desk)
        self.notes = label("", "muted")
        self._arrange()

    def _combo(self, key: str, words: Mapping[str, str]) -> CalmCombo:
        combo = CalmCombo()
        for value, text in words.items():
            combo.addItem(text, value)
        says = f"Change the {CHOICES[key][0].lower()}"
        combo.activated.connect(
            lambda _, key=key, combo=combo: self._desk.edit(
                changes.set_recipe(key, combo.currentData()), says
            )
        )
        return combo

    def _arrange(self) -> None:
        scroll, column = column_in_scroll()
        self._pair_field = Field("Extrapolation", self.pair)
        basis, settings = Card(), Card()
        for card, fields in (
            (basis, (self.fields["basis"], self._pair_field)),
            (settings, (*(self.fields[key] for key in CHOICES), self.space)),
        ):
            card.column.setSpacing(9)
            for field in fields:
                card.column.addWidget(field)
        self._before = label("Before the run", "heading")
        self._also = label("Good to know", "heading")
        parts: tuple[QWidget, ...] = (
            self._before,
            self.findings,
            basis,
            label("Ladder", "heading"),
            self.rung_fault,
            self.ladder,
            label("How", "heading"),
            settings,
            self.notes,
            self._also,
            self.remarks,
        )
        for place, part in enumerate(parts):
            column.insertWidget(place, part)
        own = QVBoxLayout(self)
        own.setContentsMargins(0, 0, 0, 0)
        own.addWidget(scroll)

    def refresh(self) -> None:
        """Show the recipe, its faults, its costs and the findings before the run."""
        desk, recipe = self._desk, self._desk.brief.recipe
        grave = tuple(finding for finding in desk.check if finding.severity != "note")
        light = tuple(finding for finding in desk.check if finding.severity == "note")
        for heading, view, found in ((self._before, self.findings, grave), (self._also, self.remarks, light)):
            view.show_findings(found)
            view.setVisible(bool(found))
            heading.setVisible(bool(found))
        self.ladder.refresh()
        self._show_basis(recipe.basis)
        for key, combo in self.combos.items():
            combo.setCurrentIndex(combo.findData(getattr(recipe, key)))
        for control in (self.basis, self.pair, *self.combos.values()):
            control.setEnabled(not desk.casebook.read_only)
        for key, field in self.fields.items():
            field.show_fault(self._faults_at(key))
        self.space.refresh(self._faults_at("active_space"))
        _say(self.rung_fault, self._faults_at("rungs"))
        _say(self.notes, "\n".join(desk.plan.notes) if desk.plan and not desk.faults else "")

    def _faults_at(self, key: str) -> str:
        where = f"recipe.{key}"
        found = (f.says for f in self._desk.faults if f.where == where or f.where.startswith(f"{where}."))
        return "\n".join(dict.fromkeys(found))

    def _show_basis(self, basis: tuple[str, ...]) -> None:
        if self.basis.count() != len(BASES) + (self.basis.findText(basis[0]) < 0):
            self.basis.clear()
            self.basis.addItems(list(BASES))
        if self.basis.findText(basis[0]) < 0:
            self.basis.addItem(basis[0])
        self.basis.setCurrentText(basis[0])
        larger = BASES[basis[0]].larger if basis[0] in BASES else None
        self.pair.clear()
        self.pair.addItem("none: this set alone", None)
        for partner in dict.fromkeys(name for name in (larger, *basis[1:]) if name):
            self.pair.addItem(f"with {partner}, to the limit", partner)
        self.pair.setCurrentIndex(self.pair.findData(basis[1]) if len(basis) == 2 else 0)
        self._pair_field.setVisible(self.pair.count() > 1)

    def _set_basis(self) -> None:
        first, partner = self.basis.currentText(), self.pair.currentData()
        same = self._desk.brief.recipe.basis[0] == first
        value = [first, partner] if partner and same else [first]
        self._desk.edit(changes.set_recipe("basis", value), "Change the basis set")


def _say(line: QLabel, text: str) -> None:
    line.setText(text)
    line.setVisible(bool(text))
