"""How a scene is looked at: a turn, a middle and a scale, without perspective. Values, no widget."""

from dataclasses import dataclass, field, replace

import numpy as np

from plumbrule_desktop.scene.build import Scene

MARGIN = 1.12
"""How much more than the scene is shown."""


def _tilted() -> np.ndarray:
    return turn_about((1, 0, 0), -0.30) @ turn_about((0, 1, 0), 0.45)


def turn_about(axis: tuple[float, float, float], angle: float) -> np.ndarray:
    """The rotation matrix about a unit axis by an angle in radians (Rodrigues)."""
    x, y, z = axis
    cross = np.array([[0, -z, y], [z, 0, -x], [-y, x, 0]])
    return np.eye(3) + np.sin(angle) * cross + (1 - np.cos(angle)) * cross @ cross


@dataclass(frozen=True, slots=True)
class Camera:
    """Looks along -z of the turned scene; `half_height` is half the height shown, in angstrom."""

    middle: np.ndarray = field(default_factory=lambda: np.zeros(3))
    turn: np.ndarray = field(default_factory=_tilted)
    half_height: float = 3.0

    def fitted(self, scene: Scene, aspect: float) -> "Camera":
        """The same turn with the whole scene in view; `aspect` is width over height."""
        half = max(scene.reach, 1.2) * MARGIN
        return replace(self, middle=scene.middle, half_height=half / min(1.0, aspect))

    def turned(self, right: float, down: float) -> "Camera":
        """Turned as by dragging: radians about the screen's upright and level axes."""
        turn = turn_about((1, 0, 0), down) @ turn_about((0, 1, 0), right) @ self.turn
        u, _, v = np.linalg.svd(turn)
        return replace(self, turn=u @ v)

    def rolled(self, angle: float) -> "Camera":
        """Turned in the plane of the screen, in radians."""
        return replace(self, turn=turn_about((0, 0, 1), angle) @ self.turn)

    def zoomed(self, factor: float) -> "Camera":
        """Nearer for a factor above 1, within 0.3 to 300 angstrom."""
        return replace(self, half_height=float(np.clip(self.half_height / factor, 0.3, 300)))

    def moved(self, right: float, up: float) -> "Camera":
        """The scene shifted on the screen, in angstrom."""
        return replace(self, middle=self.middle - self.turn.T @ np.array([right, up, 0.0]))

    def seen(self, points: np.ndarray) -> np.ndarray:
        """Points (n, 3) as seen: x to the right, y up, z towards the viewer, in angstrom."""
        return (points - self.middle) @ self.turn.T

    def on_screen(self, points: np.ndarray, width: float, height: float) -> np.ndarray:
        """Points (n, 3) in pixels from the top left, with their depth towards the viewer in angstrom."""
        seen = self.seen(points)
        scale = height / (2 * self.half_height)
        return np.column_stack((width / 2 + seen[:, 0] * scale, height / 2 - seen[:, 1] * scale, seen[:, 2]))

    def pick(self, scene: Scene, x: float, y: float, width: float, height: float) -> int | None:
        """The foremost atom under a pixel, or None."""
        if not len(scene.centres):
            return None
        scale = height / (2 * self.half_height)
        seen = self.seen(scene.centres)
        at = np.array([(x - width / 2) / scale, (height / 2 - y) / scale])
        room = scene.radii**2 - ((seen[:, :2] - at) ** 2).sum(axis=1)
        if not (room >= 0).any():
            return None
        front = np.where(room >= 0, seen[:, 2] + np.sqrt(np.maximum(room, 0)), -np.inf)
        return int(front.argmax())
