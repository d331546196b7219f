"""How molecules come in: pasted, from files, as SMILES, dropped. Every way ends at `take`."""

from functools import partial
from pathlib import Path

from PySide6.QtCore import QMimeData, QObject, Signal
from PySide6.QtGui import QGuiApplication
from PySide6.QtWidgets import QFileDialog, QWidget

from plumbrule_core.documents.species import Species
from plumbrule_desktop.state.desk import Desk

FILES = "Molecules (*.xyz *.mol *.sdf *.cml *.json);;All files (*)"


class Intake(QObject):
    """Reads in a thread and puts what it found into the question."""

    took = Signal(str)
    """The name of the last species that came in."""

    def __init__(self, desk: Desk, parent: QWidget) -> None:
        super().__init__(parent)
        self._desk = desk
        self._window = parent

    def paste(self) -> None:
        """What is on the clipboard."""
        self.take(QGuiApplication.clipboard().mimeData())

    def ask_files(self) -> None:
        """Choose files."""
        names, _ = QFileDialog.getOpenFileNames(self._window, "Molecules from files", "", FILES)
        self.files([Path(name) for name in names])

    def take(self, data: QMimeData) -> None:
        """Files or text, pasted or dropped."""
        paths = (
            [Path(url.toLocalFile()) for url in data.urls() if url.isLocalFile()] if data.hasUrls() else []
        )
        if paths:
            self.files(paths)
        elif data.hasText() and data.text().strip():
            self.text(data.text(), "Paste a molecule")
        else:
            self._desk.message.emit(
                "The clipboard holds no text and no file that could be a molecule.", "error"
            )

    def text(self, text: str, says: str) -> None:
        """Text in any format that is understood, SMILES included."""
        self._desk.read_text(text, "", lambda species: self._add(species, says))

    def files(self, paths: list[Path]) -> None:
        """Files, each read by its ending."""
        for path in paths:
            self._desk.read_file(path, partial(self._add, says=f"Put in {path.name}"))

    def _add(self, species: tuple[Species, ...], says: str) -> None:
        before = set(self._desk.brief.by_name)
        self._desk.add_species(species, says)
        new = [one.name for one in self._desk.brief.species if one.name not in before]
        if new:
            self.took.emit(new[-1])
