"""The little picture on a species' card."""

from PySide6.QtCore import QSize
from PySide6.QtGui import QPainter, QPaintEvent
from PySide6.QtWidgets import QSizePolicy, QWidget

from plumbrule_core.documents.species import Species
from plumbrule_desktop.scene.build import Scene, build
from plumbrule_desktop.scene.camera import Camera
from plumbrule_desktop.scene.flat import paint_flat

SIDE = 72


class Thumbnail(QWidget):
    """A species from a fixed direction, painted by Qt alone."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setSizePolicy(QSizePolicy.Policy.Fixed, QSizePolicy.Policy.Fixed)
        self._scene: Scene | None = None

    def sizeHint(self) -> QSize:
        """A small square."""
        return QSize(SIDE, SIDE)

    def show_species(self, species: Species) -> None:
        """Show this one."""
        self._scene = build(species)
        self.setAccessibleName(f"Picture of {species.name}")
        self.update()

    def paintEvent(self, event: QPaintEvent) -> None:
        """The plain picture, without symbols."""
        if self._scene is None:
            return
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        camera = Camera().fitted(self._scene, 1.0)
        paint_flat(painter, self._scene, camera, (self.width(), self.height()))
        painter.end()
