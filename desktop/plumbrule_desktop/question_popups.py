"""What opens under a clause of the question: one small editor for each key of the sentence."""

from collections.abc import Callable

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QComboBox, QDoubleSpinBox, QGridLayout, QHBoxLayout, QPushButton, QWidget

from plumbrule_core.documents.brief import Brief
from plumbrule_core.documents.edits import edited
from plumbrule_core.documents.findings import Edit
from plumbrule_core.documents.questions import BondQuestion, ReactionQuestion
from plumbrule_core.errors import Refused
from plumbrule_core.units import ENERGY_UNITS
from plumbrule_desktop.state import asking
from plumbrule_desktop.state.desk import Desk
from plumbrule_desktop.widgets.card import label
from plumbrule_desktop.widgets.popup import Popup

KIND_SAYS = {
    "energy": "One molecule as it stands",
    "reaction": "Products minus reactants",
    "bond": "Two fragments minus the molecule",
    "spin gap": "One molecule in two spin states",
    "ionisation": "One molecule with and without an electron",
}


class PlainSpin(QDoubleSpinBox):
    """A spin box that shows no more digits than there are."""

    def textFromValue(self, value: float) -> str:
        """`4`, `0.25`."""
        return self.locale().toString(round(value, self.decimals()), "g", 10)


def popup_for(key: str, desk: Desk, parent: QWidget) -> Popup | None:
    """The editor for one clause, or None while there is no molecule to ask about."""
    if not desk.brief.species:
        return None
    if key == "kind" or desk.brief.question is None:
        return KindPopup(desk, parent)
    make = _POPUPS.get(key)
    return make(desk, parent) if make else SpeciesPopup(key, desk, parent)


class KindPopup(Popup):
    """What is asked: one button for each kind."""

    def __init__(self, desk: Desk, parent: QWidget) -> None:
        super().__init__("What do you want to know?", parent)
        for kind, name in asking.kinds().items():
            button = QPushButton(f"{name[:1].upper()}{name[1:]}")
            button.setAccessibleDescription(KIND_SAYS.get(kind, ""))
            button.clicked.connect(lambda _=False, each=kind, word=name: self._choose(desk, each, word))
            row = QHBoxLayout()
            row.addWidget(button)
            row.addWidget(label(KIND_SAYS.get(kind, ""), "muted", wrap=False), 1)
            button.setMinimumWidth(160)
            self.column.addLayout(row)

    def _choose(self, desk: Desk, kind: str, word: str) -> None:
        self.close()
        desk.edit(asking.asked(desk.brief, kind), f"Ask for the {word}")


class SpeciesPopup(Popup):
    """Which species stands at this place."""

    def __init__(self, key: str, desk: Desk, parent: QWidget) -> None:
        super().__init__("Which species?", parent)
        for one in desk.brief.species:
            button = QPushButton(f"{one.name}  ({one.formula})")
            button.clicked.connect(lambda _=False, name=one.name: self._choose(desk, key, name))
            self.column.addWidget(button)

    def _choose(self, desk: Desk, key: str, name: str) -> None:
        self.close()
        changed: asking.Data = {key: name}
        if isinstance(desk.brief.question, BondQuestion) and key == "species":
            found = asking.cuttable(desk.brief.by_name[name])
            changed |= {"cut": [place + 1 for place in found[0]] if found else [1, 2], "fragments": None}
            changed |= {"fragment_multiplicities": None}
        desk.edit(asking.set_question(desk.brief, **changed), f"Ask about {name}")


class CutPopup(Popup):
    """Which bond is broken: a list of the bonds whose cut leaves two pieces, or two species of one's own."""

    def __init__(self, desk: Desk, parent: QWidget) -> None:
        super().__init__("Which bond is broken?", parent)
        question = desk.brief.question
        assert isinstance(question, BondQuestion)
        whole = desk.brief.by_name.get(question.species)
        self.bonds = QComboBox()
        self.bonds.setAccessibleName("Bond")
        found = asking.cuttable(whole) if whole else ()
        for bond in found:
            self.bonds.addItem(asking.bond_words(whole, bond) if whole else "", (bond[0] + 1, bond[1] + 1))
        if question.cut and tuple(sorted(question.cut)) in [tuple(sorted((i + 1, j + 1))) for i, j in found]:
            self.bonds.setCurrentIndex(
                [(i + 1, j + 1) for i, j in found].index((min(question.cut), max(question.cut)))
            )
        self.column.addWidget(self.bonds)
        if not found:
            self.bonds.setEnabled(False)
            self.column.addWidget(
                label("No bond of this molecule leaves two pieces when it is cut.", "muted")
            )
        self.add_done("Cut this bond").clicked.connect(lambda: self._cut(desk))
        if len(desk.brief.species) >= 3:
            self._offer_fragments(desk, question)

    def _offer_fragments(self, desk: Desk, question: BondQuestion) -> None:
        self.column.addWidget(label("Or fragments that you put in yourself", "muted", wrap=False))
        others = [one.name for one in desk.brief.species if one.name != question.species]
        row = QHBoxLayout()
        self.fragments = (QComboBox(), QComboBox())
        for place, box in enumerate(self.fragments):
            box.addItems(others)
            box.setAccessibleName(f"Fragment {place + 1}")
            box.setCurrentText(
                question.fragments[place] if question.fragments else others[min(place, len(others) - 1)]
            )
            row.addWidget(box)
        use = QPushButton("Use these")
        use.clicked.connect(lambda: self._use_fragments(desk))
        row.addWidget(use)
        self.column.addLayout(row)

    def _cut(self, desk: Desk) -> None:
        bond = self.bonds.currentData()
        self.close()
        if bond is not None:
            edits = asking.set_question(
                desk.brief, cut=list(bond), fragments=None, fragment_multiplicities=None
            )
            desk.edit(edits, "Choose the bond")

    def _use_fragments(self, desk: Desk) -> None:
        names = [box.currentText() for box in self.fragments]
        self.close()
        edits = asking.set_question(desk.brief, fragments=names, cut=None, fragment_multiplicities=None)
        desk.edit(edits, "Choose the fragments")


class TermsPopup(Popup):
    """The reaction: a coefficient for each species, with the balance below."""

    def __init__(self, desk: Desk, parent: QWidget) -> None:
        super().__init__("The reaction", parent)
        question = desk.brief.question
        assert isinstance(question, ReactionQuestion)
        self._desk = desk
        self.column.addWidget(
            label("Reactants count negative, products positive, 0 leaves out.", "muted", wrap=False)
        )
        grid = QGridLayout()
        self.boxes: dict[str, QDoubleSpinBox] = {}
        for row, one in enumerate(desk.brief.species):
            box = PlainSpin(minimum=-1000, maximum=1000, decimals=2, singleStep=1)
            box.setValue(question.terms.get(one.name, 0.0))
            box.setAccessibleName(f"Coefficient of {one.name}")
            box.valueChanged.connect(self._weigh)
            self.boxes[one.name] = box
            grid.addWidget(label(one.name, wrap=False), row, 0)
            grid.addWidget(label(one.formula, "muted", wrap=False), row, 1)
            grid.addWidget(box, row, 2)
        self.column.addLayout(grid)
        self.balance = label("")
        self.balance.setMinimumWidth(320)
        self.column.addWidget(self.balance)
        self.add_done().clicked.connect(self._take)
        self._weigh()

    def _edits(self) -> tuple[Edit, ...]:
        terms = {name: box.value() for name, box in self.boxes.items() if box.value()}
        return asking.set_question(self._desk.brief, terms=terms)

    def _weigh(self) -> None:
        says = _faults_after(self._desk.brief, self._edits())
        self.balance.setText(says or "\u2713 Atoms and charge balance.")
        self.balance.setProperty("role", "fault" if says else "muted")
        self.balance.style().polish(self.balance)

    def _take(self) -> None:
        edits = self._edits()
        if self._desk.edit(edits, "Change the reaction"):
            self.close()


class WithinPopup(Popup):
    """The accuracy that is needed."""

    def __init__(self, desk: Desk, parent: QWidget) -> None:
        super().__init__("How accurate must it be?", parent)
        question = desk.brief.question
        assert question is not None
        row = QHBoxLayout()
        self.value = PlainSpin(minimum=0.0001, maximum=100_000, decimals=4)
        self.value.setValue(question.within)
        self.value.setAccessibleName("Accuracy needed")
        self.value.setStepType(QDoubleSpinBox.StepType.AdaptiveDecimalStepType)
        self.unit = QComboBox()
        self.unit.setAccessibleName("Unit")
        self.unit.addItems(list(ENERGY_UNITS))
        self.unit.setCurrentText(question.unit)
        row.addWidget(label("within", wrap=False))
        row.addWidget(self.value, 1)
        row.addWidget(self.unit)
        self.column.addLayout(row)
        hint = "4 kJ/mol is about 1 kcal/mol: often called chemical accuracy."
        self.column.addWidget(label(hint, "muted", wrap=False), 0, Qt.AlignmentFlag.AlignLeft)
        self.add_done().clicked.connect(lambda: self._take(desk))

    def _take(self, desk: Desk) -> None:
        edits = asking.set_question(desk.brief, within=self.value.value(), unit=self.unit.currentText())
        self.close()
        desk.edit(edits, "Change the accuracy")


def _faults_after(brief: Brief, edits: tuple[Edit, ...]) -> str:
    try:
        after = edited(brief, edits)
    except Refused as refused:
        return str(refused)
    return asking.side_words(after.question, after) if after.question else ""


_POPUPS: dict[str, Callable[[Desk, QWidget], Popup]] = {
    "cut": CutPopup,
    "terms": TermsPopup,
    "within": WithinPopup,
}
