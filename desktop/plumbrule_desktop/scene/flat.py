"""A plain picture of a scene by Qt alone: for the cards, and where there is no 3-D."""

import numpy as np
from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QBrush, QColor, QPainter, QPen, QRadialGradient

from plumbrule_desktop.scene.build import STICK_RADIUS, Scene
from plumbrule_desktop.scene.camera import Camera


def paint_flat(painter: QPainter, scene: Scene, camera: Camera, size: tuple[float, float]) -> None:
    """Balls and sticks from the back to the front."""
    width, height = size
    if not len(scene.centres):
        return
    scale = height / (2 * camera.half_height)
    at = camera.on_screen(scene.centres, width, height) * (1, 1, scale)
    pieces: list[tuple[float, int, int]] = [(at[i, 2], i, -1) for i in range(len(at))]
    for i, j in scene.sticks:
        pieces += [(float(at[[a, a, b], 2].mean()) - 1e-3, a, b) for a, b in ((i, j), (j, i))]
    for _, atom, other in sorted(pieces):
        shade = QColor(*(int(part) for part in scene.colours[atom]))
        radius = scene.radii[atom] * scale
        if other < 0:
            _ball(painter, at[atom], radius, shade)
        else:
            _half_stick(painter, at[atom], at[other], radius, STICK_RADIUS * scale, shade)


def _ball(painter: QPainter, at: np.ndarray, radius: float, shade: QColor) -> None:
    centre = QPointF(at[0], at[1])
    glow = QRadialGradient(centre - QPointF(radius, radius) * 0.35, radius * 1.5)
    glow.setColorAt(0, shade.lighter(125))
    glow.setColorAt(1, shade.darker(125))
    painter.setPen(QPen(shade.darker(175), max(0.7, radius * 0.07)))
    painter.setBrush(QBrush(glow))
    painter.drawEllipse(centre, radius, radius)


def _half_stick(
    painter: QPainter, start: np.ndarray, end: np.ndarray, ball: float, radius: float, shade: QColor
) -> None:
    """From the surface of the ball to the middle of the bond."""
    along = end - start
    length = float(np.linalg.norm(along))
    first = start + along * min(0.5, 0.85 * ball / max(length, 1e-9))
    half = (start + end) / 2
    for colour, width in ((shade.darker(175), 2 * radius + 1.4), (shade, 2 * radius)):
        painter.setPen(QPen(colour, width, Qt.PenStyle.SolidLine, Qt.PenCapStyle.FlatCap))
        painter.drawLine(QPointF(first[0], first[1]), QPointF(half[0], half[1]))


def paint_symbols(
    painter: QPainter,
    scene: Scene,
    camera: Camera,
    size: tuple[float, float],
    chosen: tuple[int, ...],
    accent: QColor,
) -> None:
    """The symbol (and for chosen atoms the number, in a ring) on each atom that is not hidden."""
    width, height = size
    if not len(scene.centres):
        return
    scale = height / (2 * camera.half_height)
    at = camera.on_screen(scene.centres, width, height)
    for i in range(len(at)):
        radius = scene.radii[i] * scale
        if i in chosen:
            painter.setPen(QPen(accent, 2.5))
            painter.setBrush(Qt.BrushStyle.NoBrush)
            painter.drawEllipse(QPointF(at[i, 0], at[i, 1]), radius + 3, radius + 3)
        if radius > 6 and camera.pick(scene, at[i, 0], at[i, 1], width, height) == i:
            _symbol(painter, scene, i, at[i], radius, i in chosen)


def _symbol(painter: QPainter, scene: Scene, i: int, at: np.ndarray, radius: float, numbered: bool) -> None:
    font = painter.font()
    font.setPixelSize(max(8, min(26, round(radius * (0.75 if numbered else 0.95)))))
    font.setBold(True)
    painter.setFont(font)
    dark = np.dot(scene.colours[i], (0.299, 0.587, 0.114)) < 135
    painter.setPen(QColor(255, 255, 255) if dark else QColor(20, 20, 20))
    box = QRectF(at[0] - 2 * radius, at[1] - radius, 4 * radius, 2 * radius)
    text = f"{scene.symbols[i]}{i + 1}" if numbered else scene.symbols[i]
    painter.drawText(box, Qt.AlignmentFlag.AlignCenter, text)
