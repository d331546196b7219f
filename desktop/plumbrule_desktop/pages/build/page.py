"""The Build page itself: three columns over the desk."""

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QCloseEvent, QDragEnterEvent, QDropEvent
from PySide6.QtWidgets import QHBoxLayout, QSplitter, QWidget

from plumbrule_core.documents.findings import Edit
from plumbrule_desktop.pages.build.intake import Intake
from plumbrule_desktop.pages.build.molecule_panel import MoleculePanel
from plumbrule_desktop.pages.build.recipe_panel import RecipePanel
from plumbrule_desktop.pages.build.species_list import SpeciesList
from plumbrule_desktop.scene.three_d import ThreeD
from plumbrule_desktop.state.desk import Desk


class BuildPage(QWidget):
    """Species left, the picture in the middle, the recipe right. Molecules can be dropped on it."""

    demo_wanted = Signal()

    def __init__(self, desk: Desk, three_d: ThreeD, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._desk = desk
        self.setAcceptDrops(True)
        self.intake = Intake(desk, self)
        self.species = SpeciesList(desk, self.intake)
        self.molecule = MoleculePanel(three_d)
        self.recipe = RecipePanel(desk)
        self.splitter = QSplitter(Qt.Orientation.Horizontal)
        self.splitter.setHandleWidth(12)
        self.splitter.setChildrenCollapsible(False)
        for part, least, stretch in ((self.species, 236, 0), (self.molecule, 220, 1), (self.recipe, 252, 0)):
            self.splitter.addWidget(part)
            self.splitter.setStretchFactor(self.splitter.count() - 1, stretch)
            part.setMinimumWidth(least)
        self.splitter.setSizes([272, 480, 316])
        row = QHBoxLayout(self)
        row.setContentsMargins(14, 6, 2, 12)
        row.addWidget(self.splitter)
        self._connect()
        self.refresh()

    def _connect(self) -> None:
        desk, invitation = self._desk, self.molecule.invitation
        for signal in (desk.brief_changed, desk.plan_changed, desk.casebook_changed):
            signal.connect(self.refresh)
        self.species.chosen.connect(self._show_chosen)
        self.molecule.cut_wanted.connect(self._ask_bond)
        invitation.paste.clicked.connect(self.intake.paste)
        invitation.files.clicked.connect(self.intake.ask_files)
        invitation.demo.clicked.connect(lambda: self.demo_wanted.emit())

    def paste(self) -> None:
        """Put in the molecule on the clipboard."""
        self.intake.paste()

    def ask_files(self) -> None:
        """Put in molecules from files."""
        self.intake.ask_files()

    def refresh(self) -> None:
        """Show the chosen question."""
        self.species.refresh()
        self._show_chosen(self.species.current)
        empty = not self._desk.brief.species
        self.recipe.setVisible(not empty)
        self.recipe.refresh()

    def _show_chosen(self, name: str) -> None:
        self.molecule.show_species(self._desk.brief.by_name.get(name))

    def _ask_bond(self, species: str, first: int, second: int) -> None:
        old = self._desk.brief.question
        shared = {"within": old.within, "unit": old.unit} if old else {"within": 4.0, "unit": "kJ/mol"}
        question = {"kind": "bond", "species": species, "cut": [first, second], **shared}
        self._desk.edit((Edit(path="question", value=question),), "Ask for the bond energy")

    def dragEnterEvent(self, event: QDragEnterEvent) -> None:
        """Files and text are welcome."""
        if not self._desk.casebook.read_only and (event.mimeData().hasUrls() or event.mimeData().hasText()):
            event.acceptProposedAction()

    def dropEvent(self, event: QDropEvent) -> None:
        """Put in what was dropped."""
        self.intake.take(event.mimeData())
        event.acceptProposedAction()

    def closeEvent(self, event: QCloseEvent) -> None:
        """The window closes: give the graphics memory back."""
        self.molecule.finish()
        super().closeEvent(event)
