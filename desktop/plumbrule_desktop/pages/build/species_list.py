"""The left of the Build page: the ways in, and a card for each species."""

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QHBoxLayout, QLineEdit, QPushButton, QVBoxLayout, QWidget

from plumbrule_desktop.pages.build.intake import Intake
from plumbrule_desktop.pages.build.species_card import SpeciesCard
from plumbrule_desktop.state import changes
from plumbrule_desktop.state.desk import Desk
from plumbrule_desktop.widgets.card import label
from plumbrule_desktop.widgets.scroll import column_in_scroll


class SpeciesList(QWidget):
    """Cards for the species of the chosen question; `chosen` carries the name of the one to show."""

    chosen = Signal(str)

    def __init__(self, desk: Desk, intake: Intake, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._desk = desk
        self._current = ""
        self.cards: list[SpeciesCard] = []
        self.smiles = QLineEdit()
        self.smiles.setPlaceholderText("SMILES, then Enter")
        self.smiles.setAccessibleName("SMILES of a molecule")
        self.smiles.setToolTip(
            "A molecule as SMILES, for instance NN for hydrazine; its shape is built for you"
        )
        self.smiles.returnPressed.connect(lambda: self._from_smiles(intake))
        self.paste_button = QPushButton("Paste")
        self.paste_button.setToolTip("Put in the molecule on the clipboard (Ctrl+V)")
        self.paste_button.clicked.connect(intake.paste)
        self.file_button = QPushButton("Open file\u2026")
        self.file_button.setToolTip("Put in molecules from files (Ctrl+M)")
        self.file_button.clicked.connect(intake.ask_files)
        buttons = QHBoxLayout()
        buttons.setSpacing(6)
        buttons.addWidget(self.paste_button)
        buttons.addWidget(self.file_button)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(8)
        column.addWidget(label("Molecules", "heading"))
        column.addLayout(buttons)
        column.addWidget(self.smiles)
        self._scroll, self._column = column_in_scroll()
        column.addWidget(self._scroll, 1)
        intake.took.connect(self.choose)

    @property
    def current(self) -> str:
        """The name of the species in the picture; empty while there is none."""
        return self._current

    def refresh(self) -> None:
        """Show the species; cards are kept where they are, so that no field loses the keyboard."""
        species, faults = self._desk.brief.species, self._desk.faults
        while len(self.cards) > len(species):
            card = self.cards.pop()
            self._column.removeWidget(card)
            card.hide()
            card.deleteLater()
        while len(self.cards) < len(species):
            self.cards.append(self._new_card())
        for card, one in zip(self.cards, species, strict=True):
            card.show_species(one, faults, self._desk.casebook.read_only)
        names = [one.name for one in species]
        if self._current not in names:
            self.choose(names[0] if names else "")
        self._mark()
        for control in (self.smiles, self.paste_button, self.file_button):
            control.setEnabled(not self._desk.casebook.read_only)

    def choose(self, name: str) -> None:
        """Show another species."""
        if name != self._current and (not name or name in self._desk.brief.by_name):
            self._current = name
            self._mark()
            self.chosen.emit(name)

    def _mark(self) -> None:
        for card, one in zip(self.cards, self._desk.brief.species, strict=False):
            card.mark(one.name == self._current)

    def _new_card(self) -> SpeciesCard:
        card = SpeciesCard()
        card.change_wanted.connect(self._change)
        card.remove_wanted.connect(self._remove)
        card.copy_wanted.connect(self._copy)
        card.chosen.connect(self.choose)
        self._column.insertWidget(len(self.cards), card)
        return card

    def _change(self, name: str, key: str, value: object) -> None:
        if key == "name":
            if self._current == name:
                self._current = str(value)
            edits, says = changes.renamed(self._desk.brief, name, str(value)), f"Rename {name}"
        else:
            edits, says = changes.set_species(name, key, value), f"Change the {key} of {name}"
        if not self._desk.edit(edits, says):
            self.refresh()

    def _remove(self, name: str) -> None:
        self._desk.edit(changes.without_species(self._desk.brief, name), f"Remove {name}")

    def _copy(self, name: str) -> None:
        self._desk.edit(changes.duplicated(self._desk.brief, name), f"Copy {name}")

    def _from_smiles(self, intake: Intake) -> None:
        text = self.smiles.text().strip()
        if text:
            intake.text(text, f"Build {text[:40]}")
            self.smiles.clear()
