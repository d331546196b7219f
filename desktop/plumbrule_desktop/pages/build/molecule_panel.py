"""The middle of the Build page: the picture of the chosen species, or the invitation while there is none."""

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import (
    QFrame,
    QHBoxLayout,
    QPushButton,
    QStackedWidget,
    QToolButton,
    QVBoxLayout,
    QWidget,
)

from plumbrule_core.documents.bonding import distance
from plumbrule_core.documents.species import Species
from plumbrule_desktop.scene.build import build
from plumbrule_desktop.scene.three_d import YES, ThreeD
from plumbrule_desktop.scene.view import MoleculeView
from plumbrule_desktop.state import asking
from plumbrule_desktop.widgets.card import Card, label

HINT = "Drag to turn, wheel to zoom, click atoms to measure"


class Invitation(QWidget):
    """What an empty question shows."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.paste = QPushButton("Paste a molecule")
        self.paste.setProperty("role", "primary")
        self.files = QPushButton("Open file\u2026")
        self.demo = QPushButton("Open demo")
        heading = label("Paste a molecule, or open a demo", "title")
        says = label(
            "XYZ, bare atom lines, molfile, SDF, CML, QCSchema or SMILES are understood. "
            "You can also drop files here.",
            "muted",
        )
        column = QVBoxLayout(self)
        column.setSpacing(12)
        column.addStretch(2)
        for line in (heading, says):
            line.setAlignment(Qt.AlignmentFlag.AlignHCenter)
            column.addWidget(line)
        row = QHBoxLayout()
        row.addStretch(1)
        for button in (self.paste, self.files, self.demo):
            row.addWidget(button)
        row.addStretch(1)
        column.addLayout(row)
        column.addStretch(3)


class MoleculePanel(Card):
    """Picture, title above, a line about the chosen atoms below. The seam for an editor is `view`."""

    cut_wanted = Signal(str, int, int)
    """Ask for the energy of this bond: species, atoms from 1."""

    def __init__(self, three_d: ThreeD, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._three_d = three_d
        self._species: Species | None = None
        self._closed = False
        self.title = label("", "title")
        self.view = MoleculeView()
        self.view.picked.connect(self._say_chosen)
        self.says = label(HINT, "muted")
        self.cut = QPushButton("Ask for this bond")
        self.cut.clicked.connect(self._ask_cut)
        self.fit = QToolButton()
        self.fit.setText("Show all")
        self.fit.setProperty("role", "button")
        self.fit.setToolTip("Bring the whole molecule into view (Home)")
        self.fit.clicked.connect(self.view.fit)
        self.why_flat = label("", "muted")
        self.why_flat.hide()
        self.invitation = Invitation()
        self.column.setContentsMargins(8, 8, 8, 8)
        self.stack = QStackedWidget()
        self.stack.addWidget(self.invitation)
        self.stack.addWidget(self._picture_page())
        self.column.addWidget(self.stack)
        self.cut.hide()
        three_d.known.connect(self._three_d_known)
        if three_d.answer is not None:
            self._three_d_known(three_d.answer)

    def _picture_page(self) -> QWidget:
        page = QFrame()
        column = QVBoxLayout(page)
        column.setContentsMargins(6, 2, 6, 2)
        top = QHBoxLayout()
        top.addWidget(self.title, 1)
        top.addWidget(self.fit)
        column.addLayout(top)
        column.addWidget(self.view, 1)
        below = QHBoxLayout()
        below.addWidget(self.says, 1)
        below.addWidget(self.cut)
        column.addLayout(below)
        column.addWidget(self.why_flat)
        return page

    def show_species(self, species: Species | None) -> None:
        """Show a species; the view keeps its turn while only charge or spin changes."""
        old, self._species = self._species, species
        self.stack.setCurrentIndex(0 if species is None else 1)
        if species is None:
            self.view.show_scene(None)
            return
        self.title.setText(species.name)
        self.view.setAccessibleName(f"Picture of {species.name}, {species.formula}")
        if old is None or old.atoms != species.atoms:
            self.view.show_scene(build(species))

    def _three_d_known(self, answer: str) -> None:
        if self._closed or self.view.three_d:
            return
        if answer != YES:
            self.why_flat.setText(
                f"This is a plain picture, since 3-D cannot be drawn on this computer: {answer}."
            )
            self.why_flat.show()
            return
        from plumbrule_desktop.scene.picture import Picture

        self.view.use_picture(Picture())

    def _say_chosen(self, chosen: tuple[int, ...]) -> None:
        self.cut.hide()
        if self._species is None or not chosen:
            self.says.setText(HINT)
            return
        atoms = [(place, self._species.atoms[place]) for place in chosen]
        names = " \u2013 ".join(f"{atom.symbol}{place + 1}" for place, atom in atoms)
        if len(atoms) == 2:
            bond = (min(chosen), max(chosen))
            self.says.setText(f"{names}: {distance(atoms[0][1], atoms[1][1]):.3f} \u00c5 apart")
            self.cut.setVisible(bond in asking.cuttable(self._species))
        else:
            atom = atoms[0][1]
            self.says.setText(f"{names} at {atom.x:.3f}, {atom.y:.3f}, {atom.z:.3f} \u00c5")

    def _ask_cut(self) -> None:
        if self._species is not None and len(self.view.chosen) == 2:
            first, second = self.view.chosen
            self.cut_wanted.emit(self._species.name, first + 1, second + 1)

    def finish(self) -> None:
        """Give the graphics memory back."""
        self._closed = True
        self.view.close_picture()
