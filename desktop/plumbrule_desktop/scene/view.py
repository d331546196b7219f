"""The molecule that can be turned: one widget over the 3-D picture, or over the plain one."""

from typing import TYPE_CHECKING

import numpy as np
from PySide6.QtCore import QPoint, QPointF, QRectF, QSize, Qt, Signal
from PySide6.QtGui import (
    QColor,
    QFocusEvent,
    QImage,
    QKeyEvent,
    QMouseEvent,
    QPainter,
    QPaintEvent,
    QPen,
    QResizeEvent,
    QWheelEvent,
)
from PySide6.QtWidgets import QSizePolicy, QWidget

from plumbrule_desktop.look import colours
from plumbrule_desktop.scene.build import Scene
from plumbrule_desktop.scene.camera import Camera
from plumbrule_desktop.scene.flat import paint_flat, paint_symbols

if TYPE_CHECKING:
    from plumbrule_desktop.scene.picture import Picture

RADIANS_PER_PIXEL = 0.009
CLICK_PIXELS = 4
STEP = 0.12
ZOOM = 1.15

_KEYS = {
    Qt.Key.Key_Left: lambda c: c.turned(-STEP, 0),
    Qt.Key.Key_Right: lambda c: c.turned(STEP, 0),
    Qt.Key.Key_Up: lambda c: c.turned(0, -STEP),
    Qt.Key.Key_Down: lambda c: c.turned(0, STEP),
    Qt.Key.Key_Comma: lambda c: c.rolled(STEP),
    Qt.Key.Key_Period: lambda c: c.rolled(-STEP),
    Qt.Key.Key_Plus: lambda c: c.zoomed(ZOOM),
    Qt.Key.Key_Equal: lambda c: c.zoomed(ZOOM),
    Qt.Key.Key_Minus: lambda c: c.zoomed(1 / ZOOM),
}


class MoleculeView(QWidget):
    """Shows a scene; drag turns, Shift and drag moves, the wheel zooms, a click picks, keys do all of it."""

    picked = Signal(object)
    """The chosen atoms as a tuple, from 0, in the order of choosing (at most two)."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Expanding)
        self.setAccessibleName("Picture of the molecule")
        self.setAccessibleDescription(
            "Arrow keys turn, comma and full stop roll, plus and minus zoom, Home shows all"
        )
        self._scene: Scene | None = None
        self._camera = Camera()
        self._chosen: tuple[int, ...] = ()
        self._picture: Picture | None = None
        self._image: QImage | None = None
        self._pixels: np.ndarray | None = None
        self._press: QPoint | None = None
        self._last = QPointF()

    @property
    def camera(self) -> Camera:
        """How the scene is looked at."""
        return self._camera

    @property
    def three_d(self) -> bool:
        """Whether the 3-D picture is in use."""
        return self._picture is not None

    @property
    def chosen(self) -> tuple[int, ...]:
        """The chosen atoms, from 0."""
        return self._chosen

    def sizeHint(self) -> QSize:
        """A comfortable picture."""
        return QSize(420, 420)

    def show_scene(self, scene: Scene | None, fit: bool = True) -> None:
        """Show another scene; `fit` brings all of it into view."""
        self._scene = scene
        self._choose(())
        if self._picture is not None and scene is not None:
            self._picture.show(scene)
        if fit:
            self.fit()
        self._stale()

    def use_picture(self, picture: "Picture") -> None:
        """Draw in 3-D from now on; the view finishes the picture when it goes."""
        self._picture = picture
        if self._scene is not None:
            picture.show(self._scene)
        self._stale()

    def fit(self) -> None:
        """Bring the whole scene into view."""
        if self._scene is not None:
            self._look(self._camera.fitted(self._scene, self.width() / max(1, self.height())))

    def close_picture(self) -> None:
        """Give the graphics memory back."""
        picture, self._picture = self._picture, None
        self._image = self._pixels = None
        if picture is not None:
            picture.finish()

    def _look(self, camera: Camera) -> None:
        self._camera = camera
        self._stale()

    def _stale(self) -> None:
        self._image = None
        self.update()

    def _choose(self, chosen: tuple[int, ...]) -> None:
        if chosen != self._chosen:
            self._chosen = chosen
            self.picked.emit(chosen)
            self.update()

    def paintEvent(self, event: QPaintEvent) -> None:
        """Draw the picture, then symbols, rings and the focus frame on top."""
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        c = colours(self)
        box = QRectF(self.rect())
        size = (float(self.width()), float(self.height()))
        painter.fillRect(box, QColor(c.surface))
        if self._scene is not None:
            if self._picture is not None:
                self._paint_picture(painter, QColor(c.surface))
            else:
                paint_flat(painter, self._scene, self._camera, size)
            paint_symbols(painter, self._scene, self._camera, size, self._chosen, QColor(c.accent))
        if self.hasFocus():
            painter.setPen(QPen(QColor(c.accent), 2))
            painter.setBrush(Qt.BrushStyle.NoBrush)
            painter.drawRoundedRect(box.adjusted(1, 1, -1, -1), 6, 6)
        painter.end()

    def _paint_picture(self, painter: QPainter, ground: QColor) -> None:
        if self._image is None and self._picture is not None:
            ratio = self.devicePixelRatioF()
            size = (max(1, round(self.width() * ratio)), max(1, round(self.height() * ratio)))
            shade = (ground.red(), ground.green(), ground.blue())
            self._pixels = self._picture.render(self._camera, size, shade)
            self._image = QImage(self._pixels.data, *size, QImage.Format.Format_RGBX8888)
        if self._image is not None:
            painter.save()
            painter.translate(0, self.height())
            painter.scale(1, -1)
            painter.drawImage(QRectF(0, 0, self.width(), self.height()), self._image)
            painter.restore()

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Keep the whole scene in view."""
        super().resizeEvent(event)
        self.fit()

    def focusInEvent(self, event: QFocusEvent) -> None:
        """Show the focus frame."""
        super().focusInEvent(event)
        self.update()

    def focusOutEvent(self, event: QFocusEvent) -> None:
        """Hide the focus frame."""
        super().focusOutEvent(event)
        self.update()

    def mousePressEvent(self, event: QMouseEvent) -> None:
        """Begin a drag, or a click."""
        self._press, self._last = event.position().toPoint(), event.position()

    def mouseMoveEvent(self, event: QMouseEvent) -> None:
        """Turn, or move with Shift or the middle button."""
        if self._press is None:
            return
        step = event.position() - self._last
        self._last = event.position()
        shifted = event.modifiers() & Qt.KeyboardModifier.ShiftModifier
        if shifted or event.buttons() & Qt.MouseButton.MiddleButton:
            angstrom = 2 * self._camera.half_height / max(1, self.height())
            self._look(self._camera.moved(step.x() * angstrom, -step.y() * angstrom))
        else:
            self._look(self._camera.turned(step.x() * RADIANS_PER_PIXEL, step.y() * RADIANS_PER_PIXEL))

    def mouseReleaseEvent(self, event: QMouseEvent) -> None:
        """A press that did not move is a click: it picks the atom under it, or none."""
        press, self._press = self._press, None
        if press is None or self._scene is None:
            return
        at = event.position()
        if (at.toPoint() - press).manhattanLength() <= CLICK_PIXELS:
            atom = self._camera.pick(self._scene, at.x(), at.y(), self.width(), self.height())
            self._choose(_chosen_after(self._chosen, atom))

    def wheelEvent(self, event: QWheelEvent) -> None:
        """Zoom."""
        self._look(self._camera.zoomed(ZOOM ** (event.angleDelta().y() / 120)))
        event.accept()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Turn, roll, zoom, show all; N and P walk through the atoms."""
        key = Qt.Key(event.key())
        if key in _KEYS:
            self._look(_KEYS[key](self._camera))
        elif key == Qt.Key.Key_Home:
            self.fit()
        elif key in (Qt.Key.Key_N, Qt.Key.Key_P) and self._scene is not None:
            self._walk(1 if key == Qt.Key.Key_N else -1)
        else:
            super().keyPressEvent(event)

    def _walk(self, step: int) -> None:
        count = len(self._scene.symbols) if self._scene is not None else 0
        if count:
            start = self._chosen[-1] if self._chosen else (-1 if step > 0 else 0)
            self._choose(((start + step) % count,))


def _chosen_after(chosen: tuple[int, ...], atom: int | None) -> tuple[int, ...]:
    if atom is None:
        return ()
    if atom in chosen:
        return tuple(each for each in chosen if each != atom)
    return (*chosen[-1:], atom)
