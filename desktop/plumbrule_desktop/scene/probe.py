"""Whether this computer can draw 3-D: asked in a child process, which a computer without GL ends."""

import sys


def draw_one_frame() -> int:
    """Render one small frame; 0 where it holds what was drawn."""
    import numpy as np
    from vtkmodules.util.numpy_support import vtk_to_numpy
    from vtkmodules.vtkCommonCore import vtkUnsignedCharArray
    from vtkmodules.vtkFiltersSources import vtkSphereSource
    from vtkmodules.vtkRenderingCore import vtkActor, vtkPolyDataMapper, vtkRenderer, vtkRenderWindow

    import vtkmodules.vtkRenderingOpenGL2  # noqa: F401  isort: skip - registers the renderer

    ball, mapper, actor = vtkSphereSource(radius=1.0), vtkPolyDataMapper(), vtkActor()
    mapper.SetInputConnection(ball.GetOutputPort())
    actor.SetMapper(mapper)
    renderer, window, pixels = vtkRenderer(), vtkRenderWindow(), vtkUnsignedCharArray()
    renderer.AddActor(actor)
    window.SetOffScreenRendering(True)
    window.SetMultiSamples(0)
    window.AddRenderer(renderer)
    window.SetSize(32, 32)
    window.Render()
    window.GetRGBACharPixelData(0, 0, 31, 31, 1, pixels, 0)
    window.Finalize()
    drawn = np.asarray(vtk_to_numpy(pixels)).reshape(32, 32, 4)
    return 0 if drawn[16, 16, :3].max() > 60 else 1


if __name__ == "__main__":
    sys.exit(draw_one_frame())
