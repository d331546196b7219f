"""One species as a card: picture, name, formula, charge, multiplicity in words, and their faults."""

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QFocusEvent, QKeyEvent, QMouseEvent, QWheelEvent
from PySide6.QtWidgets import (
    QGridLayout,
    QHBoxLayout,
    QLineEdit,
    QMenu,
    QSpinBox,
    QToolButton,
    QVBoxLayout,
    QWidget,
)

from plumbrule_core.documents.faults import Fault
from plumbrule_core.documents.species import Species, spin_words
from plumbrule_desktop.pages.build.thumbnail import Thumbnail
from plumbrule_desktop.widgets.card import Card, label


class SpeciesCard(Card):
    """Shows a species and asks for changes; it holds none itself."""

    change_wanted = Signal(str, str, object)
    """Name of the species, key (`charge`, `multiplicity`, `name`), new value."""
    remove_wanted = Signal(str)
    copy_wanted = Signal(str)
    chosen = Signal(str)

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._name = ""
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.picture = Thumbnail()
        self.name = QLineEdit()
        self.name.setMaxLength(80)
        self.name.setAccessibleName("Name of the species")
        self.name.editingFinished.connect(self._renamed)
        self.more = self._menu_button()
        self.formula = label("", "muted")
        self.charge = _box(-20, 20, "Charge")
        self.charge.valueChanged.connect(lambda value: self.change_wanted.emit(self._name, "charge", value))
        self.multiplicity = _box(1, 40, "Multiplicity")
        self.multiplicity.valueChanged.connect(
            lambda value: self.change_wanted.emit(self._name, "multiplicity", value)
        )
        self.words = label("", "muted")
        self.faults = {key: label("", "fault") for key in ("", "charge", "multiplicity")}
        self._arrange()

    def _arrange(self) -> None:
        names = QHBoxLayout()
        names.setSpacing(2)
        names.addWidget(self.name, 1)
        names.addWidget(self.more)
        titles = QVBoxLayout()
        titles.setSpacing(4)
        titles.addLayout(names)
        titles.addWidget(self.formula)
        titles.addStretch(1)
        top = QHBoxLayout()
        top.setSpacing(10)
        top.addWidget(self.picture)
        top.addLayout(titles, 1)
        self.column.addLayout(top)
        self.column.addWidget(self.faults[""])
        fields = QGridLayout()
        fields.setHorizontalSpacing(10)
        fields.setVerticalSpacing(2)
        for column, (words, field) in enumerate(
            (("Charge", self.charge), ("Multiplicity", self.multiplicity))
        ):
            caption = label(words, "muted", wrap=False)
            caption.setBuddy(field)
            fields.addWidget(caption, 0, column)
            fields.addWidget(field, 1, column)
            fields.setColumnStretch(column, 1)
        self.column.addLayout(fields)
        for line in (self.words, self.faults["charge"], self.faults["multiplicity"]):
            self.column.addWidget(line)

    def _menu_button(self) -> QToolButton:
        button = QToolButton()
        button.setText("\u22ef")
        button.setProperty("role", "quiet")
        button.setPopupMode(QToolButton.ToolButtonPopupMode.InstantPopup)
        button.setToolTip("Copy or remove this species")
        button.setAccessibleName("Copy or remove this species")
        menu = QMenu(button)
        menu.addAction("Copy").triggered.connect(lambda: self.copy_wanted.emit(self._name))
        menu.addAction("Remove").triggered.connect(lambda: self.remove_wanted.emit(self._name))
        button.setMenu(menu)
        return button

    def show_species(self, species: Species, faults: tuple[Fault, ...], read_only: bool) -> None:
        """Show this species with the faults that stand at it."""
        self._name = species.name
        self.picture.show_species(species)
        for field, value in ((self.charge, species.charge), (self.multiplicity, species.multiplicity)):
            field.blockSignals(True)
            field.setValue(value)
            field.blockSignals(False)
            field.setReadOnly(read_only)
        if self.name.text() != species.name and not self.name.hasFocus():
            self.name.setText(species.name)
        self.name.setReadOnly(read_only)
        atoms = len(species.atoms)
        self.formula.setText(f"{species.formula} \u00b7 {atoms} atom{'s' if atoms != 1 else ''}")
        self.formula.setToolTip(species.origin)
        self.words.setText(spin_words(species.multiplicity))
        self.setAccessibleName(f"{species.name}, {species.formula}, {spin_words(species.multiplicity)}")
        self._show_faults(faults)

    def _show_faults(self, faults: tuple[Fault, ...]) -> None:
        prefix = f"species.{self._name}"
        fields: dict[str, QWidget] = {"": self.name, "charge": self.charge, "multiplicity": self.multiplicity}
        for key, line in self.faults.items():
            where = f"{prefix}.{key}" if key else prefix
            says = [fault.says for fault in faults if fault.where == where]
            line.setText("\n".join(says))
            line.setVisible(bool(says))
            field = fields[key]
            field.setProperty("faulty", "true" if says else "false")
            field.setAccessibleDescription("; ".join(says))
            field.style().unpolish(field)
            field.style().polish(field)

    def mark(self, chosen: bool) -> None:
        """Show that this is the species in the picture."""
        if self.property("chosen") != str(chosen).lower():
            self.setProperty("chosen", str(chosen).lower())
            self.style().unpolish(self)
            self.style().polish(self)

    def _renamed(self) -> None:
        text = self.name.text().strip()
        if text and text != self._name:
            self.change_wanted.emit(self._name, "name", text)
        elif not text:
            self.name.setText(self._name)

    def mousePressEvent(self, event: QMouseEvent) -> None:
        """A click anywhere on the card chooses it."""
        super().mousePressEvent(event)
        self.chosen.emit(self._name)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Delete removes the species of the card that has the keyboard."""
        if event.key() == Qt.Key.Key_Delete and not self.name.isReadOnly():
            self.remove_wanted.emit(self._name)
        else:
            super().keyPressEvent(event)

    def focusInEvent(self, event: QFocusEvent) -> None:
        """Reaching the card by keyboard chooses it."""
        super().focusInEvent(event)
        self.chosen.emit(self._name)


class _Calm(QSpinBox):
    """A spin box that a wheel over the list does not change by accident."""

    def wheelEvent(self, event: QWheelEvent) -> None:
        """Leave the wheel to the list."""
        event.ignore()


def _box(low: int, high: int, name: str) -> QSpinBox:
    box = _Calm(minimum=low, maximum=high)
    box.setKeyboardTracking(False)
    box.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
    box.setAccessibleName(name)
    box.setMinimumWidth(70)
    return box
