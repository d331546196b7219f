"""The one file that knows VTK: a scene rendered off-screen into an array of pixels."""

import numpy as np
from vtkmodules.util.numpy_support import numpy_to_vtk, vtk_to_numpy
from vtkmodules.vtkCommonCore import VTK_UNSIGNED_CHAR, vtkPoints, vtkUnsignedCharArray
from vtkmodules.vtkCommonDataModel import vtkCellArray, vtkPolyData
from vtkmodules.vtkFiltersCore import vtkTubeFilter
from vtkmodules.vtkFiltersSources import vtkSphereSource
from vtkmodules.vtkRenderingCore import (
    vtkActor,
    vtkGlyph3DMapper,
    vtkMapper,
    vtkPolyDataMapper,
    vtkRenderer,
    vtkRenderWindow,
)

import vtkmodules.vtkRenderingOpenGL2  # noqa: F401  isort: skip - registers the renderer

from plumbrule_desktop.scene.build import STICK_RADIUS, Scene
from plumbrule_desktop.scene.camera import Camera


class Picture:
    """An off-screen window of its own; `finish` gives its memory back."""

    def __init__(self) -> None:
        self._renderer = vtkRenderer()
        self._window = vtkRenderWindow()
        self._window.SetOffScreenRendering(True)
        self._window.SetMultiSamples(0)
        self._window.AddRenderer(self._renderer)
        self._renderer.GetActiveCamera().ParallelProjectionOn()
        self._renderer.SetUseFXAA(True)
        self._pixels = vtkUnsignedCharArray()

    def show(self, scene: Scene) -> None:
        """Replace what is drawn."""
        self._renderer.RemoveAllViewProps()
        if len(scene.centres):
            self._renderer.AddActor(_balls(scene))
            if scene.sticks:
                self._renderer.AddActor(_sticks(scene))

    def render(self, camera: Camera, size: tuple[int, int], ground: tuple[int, int, int]) -> np.ndarray:
        """RGBA (height, width, 4), bottom row first, valid until the next call; `size` in device pixels."""
        width, height = size
        self._renderer.SetBackground(*(part / 255 for part in ground))
        self._window.SetSize(width, height)
        self._aim(camera)
        self._window.Render()
        self._window.GetRGBACharPixelData(0, 0, width - 1, height - 1, 1, self._pixels, 0)
        return vtk_to_numpy(self._pixels).reshape(height, width, 4)

    def _aim(self, camera: Camera) -> None:
        view = self._renderer.GetActiveCamera()
        towards, up = camera.turn[2], camera.turn[1]
        far = 1000.0
        view.SetFocalPoint(*camera.middle)
        view.SetPosition(*(camera.middle + towards * far))
        view.SetViewUp(*up)
        view.SetParallelScale(camera.half_height)
        self._renderer.ResetCameraClippingRange()

    def finish(self) -> None:
        """Give the graphics memory back; the picture cannot be used afterwards."""
        self._renderer.RemoveAllViewProps()
        self._window.RemoveRenderer(self._renderer)
        self._window.Finalize()


def _balls(scene: Scene) -> vtkActor:
    points = vtkPoints()
    points.SetData(numpy_to_vtk(np.ascontiguousarray(scene.centres, dtype=np.float32), deep=True))
    data = vtkPolyData()
    data.SetPoints(points)
    radii = numpy_to_vtk(np.ascontiguousarray(scene.radii, dtype=np.float32), deep=True)
    radii.SetName("radii")
    data.GetPointData().AddArray(radii)
    data.GetPointData().SetScalars(_colours(scene.colours))
    ball = vtkSphereSource(radius=1.0, theta_resolution=32, phi_resolution=24)
    mapper = vtkGlyph3DMapper()
    mapper.SetInputData(data)
    mapper.SetSourceConnection(ball.GetOutputPort())
    mapper.SetScaleModeToScaleByMagnitude()
    mapper.SetScaleArray("radii")
    mapper.ScalarVisibilityOn()
    return _actor(mapper)


def _sticks(scene: Scene) -> vtkActor:
    """Each stick is two halves, each in the colour of its atom."""
    places, lines, shades = vtkPoints(), vtkCellArray(), []
    for i, j in scene.sticks:
        half = (scene.centres[i] + scene.centres[j]) / 2
        for atom in (i, j):
            ends = [places.InsertNextPoint(*scene.centres[atom]), places.InsertNextPoint(*half)]
            lines.InsertNextCell(2, ends)
            shades.append(scene.colours[atom])
    data = vtkPolyData()
    data.SetPoints(places)
    data.SetLines(lines)
    data.GetCellData().SetScalars(_colours(np.array(shades, dtype=np.uint8)))
    tube = vtkTubeFilter(radius=STICK_RADIUS, number_of_sides=18)
    tube.SetInputData(data)
    mapper = vtkPolyDataMapper()
    mapper.SetInputConnection(tube.GetOutputPort())
    return _actor(mapper)


def _colours(shades: np.ndarray) -> vtkUnsignedCharArray:
    return numpy_to_vtk(np.ascontiguousarray(shades), deep=True, array_type=VTK_UNSIGNED_CHAR)


def _actor(mapper: vtkMapper) -> vtkActor:
    actor = vtkActor()
    actor.SetMapper(mapper)
    look = actor.GetProperty()
    look.SetAmbient(0.22)
    look.SetDiffuse(0.82)
    look.SetSpecular(0.22)
    look.SetSpecularPower(28)
    return actor
