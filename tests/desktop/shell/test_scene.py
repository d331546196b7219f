"""The picture held against plain geometry, and against itself: projection and rendering must agree."""

import math
import os
import subprocess
import sys
from collections.abc import Iterator

import numpy as np
import pytest
from PySide6.QtCore import QPoint, QPointF, Qt
from PySide6.QtGui import QColor
from PySide6.QtTest import QTest

from plumbrule_core.documents.species import Atom, Species
from plumbrule_desktop import look
from plumbrule_desktop.scene import probe
from plumbrule_desktop.scene import three_d as module
from plumbrule_desktop.scene.build import Scene, build, element_colours
from plumbrule_desktop.scene.camera import Camera, turn_about
from plumbrule_desktop.scene.three_d import YES, ThreeD
from plumbrule_desktop.scene.view import MoleculeView
from plumbrule_desktop.settings import Settings


@pytest.fixture
def triangle() -> Scene:
    """Three atoms far apart, of three colours."""
    places = (("O", 0.0, 0.0, 0.0), ("N", 3.0, 0.0, 0.5), ("S", 0.0, 3.0, -0.5))
    atoms = tuple(Atom(symbol=s, x=x, y=y, z=z) for s, x, y, z in places)
    return build(Species(name="three", atoms=atoms))


@pytest.fixture
def vtk_errors() -> Iterator[list[str]]:
    """What VTK complains of; a test fails for it."""
    from vtkmodules.vtkCommonCore import vtkOutputWindow

    said: list[str] = []
    out = vtkOutputWindow.GetInstance()
    tags = [
        out.AddObserver(kind, lambda _, kind: said.append(kind)) for kind in ("ErrorEvent", "WarningEvent")
    ]
    yield said
    for tag in tags:
        out.RemoveObserver(tag)
    assert said == []


def test_water_has_three_balls_two_sticks_and_symbols(water: Species) -> None:
    scene = build(water)
    assert scene.symbols == ("O", "H", "H")
    assert scene.sticks == ((0, 1), (0, 2))
    assert tuple(scene.colours[0]) == element_colours()["O"]
    assert scene.radii[0] > scene.radii[1]


def test_turning_changes_no_distance_and_a_quarter_turn_is_a_quarter_turn(triangle: Scene) -> None:
    camera = Camera().turned(0.7, -1.1).rolled(0.3)
    seen = camera.seen(triangle.centres)
    for i, j in ((0, 1), (0, 2), (1, 2)):
        before = math.dist(triangle.centres[i], triangle.centres[j])
        assert math.dist(seen[i], seen[j]) == pytest.approx(before)
    quarter = turn_about((0.0, 1.0, 0.0), math.pi / 2)
    assert quarter @ np.array([0.0, 0.0, 1.0]) == pytest.approx([1.0, 0.0, 0.0])


def test_dragging_to_the_right_brings_the_front_to_the_right() -> None:
    front = np.array([[0.0, 0.0, 1.0]])
    camera = Camera(turn=np.eye(3)).turned(0.2, 0.0)
    assert camera.seen(front)[0][0] > 0
    down = Camera(turn=np.eye(3)).turned(0.0, 0.2)
    assert down.seen(front)[0][1] < 0


@pytest.mark.parametrize("aspect", [0.4, 1.0, 2.5])
def test_a_fitted_camera_shows_every_ball_whatever_the_window_and_the_turn(
    triangle: Scene, aspect: float
) -> None:
    for angle in np.linspace(0, 6, 7):
        camera = Camera().turned(angle, angle / 2).fitted(triangle, aspect)
        at = camera.on_screen(triangle.centres, 400 * aspect, 400)
        radius = triangle.radii * 400 / (2 * camera.half_height)
        assert (at[:, 0] - radius >= 0).all()
        assert (at[:, 0] + radius <= 400 * aspect).all()
        assert (at[:, 1] - radius >= 0).all()
        assert (at[:, 1] + radius <= 400).all()


def test_of_two_atoms_behind_each_other_the_one_in_front_is_picked() -> None:
    atoms = (Atom(symbol="C", x=0.0, y=0.0, z=-2.0), Atom(symbol="H", x=0.0, y=0.0, z=2.0))
    scene = build(Species(name="two", atoms=atoms))
    front = Camera(turn=np.eye(3)).fitted(scene, 1.0)
    assert front.pick(scene, 200, 200, 400, 400) == 1
    behind = Camera(turn=turn_about((0.0, 1.0, 0.0), math.pi)).fitted(scene, 1.0)
    assert behind.pick(scene, 200, 200, 400, 400) == 0
    assert front.pick(scene, 2, 2, 400, 400) is None


@pytest.mark.parametrize("size", [(300, 200), (200, 300)])
def test_the_rendered_picture_has_every_atom_where_the_camera_says(
    triangle: Scene, vtk_errors: list[str], size: tuple[int, int]
) -> None:
    from plumbrule_desktop.scene.picture import Picture

    picture = Picture()
    try:
        picture.show(triangle)
        for step in range(4):
            camera = Camera().turned(0.8 * step, 0.3 * step).fitted(triangle, size[0] / size[1])
            pixels = picture.render(camera, size, (255, 255, 255))[::-1]
            for i, (x, y, _) in enumerate(camera.on_screen(triangle.centres, *size)):
                if camera.pick(triangle, x, y, *size) == i:
                    seen = QColor(*(int(v) for v in pixels[int(y), int(x), :3])).hsvHue()
                    own = QColor(*(int(v) for v in triangle.colours[i])).hsvHue()
                    assert abs((seen - own + 180) % 360 - 180) < 12
    finally:
        picture.finish()


@pytest.mark.parametrize("three_d", [True, False])
def test_the_view_draws_the_molecule_in_3d_and_without(qtbot, triangle: Scene, three_d: bool) -> None:
    view = MoleculeView()
    qtbot.addWidget(view)
    view.resize(300, 300)
    if three_d:
        from plumbrule_desktop.scene.picture import Picture

        view.use_picture(Picture())
    view.show_scene(triangle)
    view.show()
    image = view.grab().toImage()
    ground = QColor(look.colours(view).surface).rgb()
    ratio = image.width() / 300
    drawn = sum(image.pixel(x, y) != ground for x in range(image.width()) for y in range(image.height()))
    assert drawn > 1500 * ratio**2
    for x, y, _ in view.camera.on_screen(triangle.centres, 300, 300):
        assert image.pixel(int(x * ratio), int(y * ratio)) != ground
    view.close_picture()


def test_the_picture_can_be_used_by_mouse_alone(qtbot, triangle: Scene) -> None:
    view = MoleculeView()
    qtbot.addWidget(view)
    view.resize(300, 300)
    view.show_scene(triangle)
    view.show()
    before = view.camera.turn
    QTest.mousePress(view, Qt.MouseButton.LeftButton, pos=QPoint(150, 150))
    QTest.mouseMove(view, QPoint(190, 150))
    QTest.mouseRelease(view, Qt.MouseButton.LeftButton, pos=QPoint(190, 150))
    assert not np.allclose(view.camera.turn, before)
    assert view.chosen == ()
    picked: list[tuple[int, ...]] = []
    view.picked.connect(picked.append)
    for x, y, _ in view.camera.on_screen(triangle.centres, 300, 300):
        qtbot.mouseClick(view, Qt.MouseButton.LeftButton, pos=QPointF(x, y).toPoint())
    assert picked == [(0,), (0, 1), (1, 2)]
    qtbot.mouseClick(view, Qt.MouseButton.LeftButton, pos=QPoint(3, 3))
    assert view.chosen == ()


def test_the_picture_can_be_used_by_keyboard_alone(qtbot, triangle: Scene) -> None:
    view = MoleculeView()
    qtbot.addWidget(view)
    view.resize(300, 300)
    view.show_scene(triangle)
    start = view.camera
    qtbot.keyClick(view, Qt.Key.Key_Right)
    qtbot.keyClick(view, Qt.Key.Key_Left)
    assert view.camera.turn == pytest.approx(start.turn)
    qtbot.keyClick(view, Qt.Key.Key_Plus)
    assert view.camera.half_height < start.half_height
    qtbot.keyClick(view, Qt.Key.Key_Home)
    assert view.camera.half_height == pytest.approx(start.half_height)
    seen = []
    for _ in range(4):
        qtbot.keyClick(view, Qt.Key.Key_N)
        seen.append(view.chosen)
    assert seen == [(0,), (1,), (2,), (0,)]
    qtbot.keyClick(view, Qt.Key.Key_P)
    assert view.chosen == (2,)


def test_the_probe_draws_one_frame_in_a_child_process_and_its_answer_is_remembered(
    qtbot, monkeypatch
) -> None:
    settings = Settings()
    three_d = ThreeD(settings)
    with qtbot.waitSignal(three_d.known, timeout=60_000) as known:
        three_d.ask()
    environment = {**os.environ}
    direct = subprocess.run([sys.executable, probe.__file__], env=environment, check=False, timeout=120)
    assert (known.args[0] == YES) == (direct.returncode == 0)
    monkeypatch.setattr(module, "_command", lambda: [sys.executable, "-c", "raise SystemExit(1)"])
    again = ThreeD(Settings())
    with qtbot.waitSignal(again.known, timeout=60_000) as remembered:
        again.ask()
    assert (remembered.args[0] == YES) == (known.args[0] == YES)
    three_d.close()
    again.close()


def test_a_computer_whose_probe_ends_abruptly_gets_a_reason_and_is_asked_again_next_time(
    qtbot, monkeypatch
) -> None:
    crash = [sys.executable, "-c", "import os, signal; os.kill(os.getpid(), signal.SIGKILL)"]
    monkeypatch.setattr(module, "_command", lambda: crash)
    three_d = ThreeD(Settings())
    with qtbot.waitSignal(three_d.known, timeout=60_000) as known:
        three_d.ask()
    assert "abruptly" in known.args[0]
    monkeypatch.setattr(module, "_command", lambda: [sys.executable, "-c", "pass"])
    again = ThreeD(Settings())
    with qtbot.waitSignal(again.known, timeout=60_000) as known:
        again.ask()
    assert known.args[0] == YES
    three_d.close()
    again.close()
