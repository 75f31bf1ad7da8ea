"""The OpenGL picture of a scene. Imported only where OpenGL was found to work."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Any

import numpy as np
import pyqtgraph.opengl as gl
from OpenGL import GL
from pyqtgraph import Transform3D
from PySide6.QtGui import QImage, QMatrix4x4, QPainter
from PySide6.QtWidgets import QWidget

from app.space_maps import SpaceMap
from app.theme import Theme
from app.views.space_camera import SpaceCamera
from app.views.space_drawn import Drawn, Faces, Lines, outline, rgba

#: Depth is tested and written.
_OPAQUE: dict[Any, Any] = {
    GL.GL_DEPTH_TEST: True,
    GL.GL_BLEND: False,
    GL.GL_CULL_FACE: False,
    "glDepthMask": (True,),
}
#: Depth is tested only: what is clear hides nothing.
_CLEAR: dict[Any, Any] = {
    GL.GL_DEPTH_TEST: True,
    GL.GL_BLEND: True,
    GL.GL_CULL_FACE: False,
    "glDepthMask": (False,),
    "glBlendFuncSeparate": (
        GL.GL_SRC_ALPHA, GL.GL_ONE_MINUS_SRC_ALPHA,
        GL.GL_ONE, GL.GL_ONE_MINUS_SRC_ALPHA,
    ),
}  # fmt: skip
_ON_TOP: dict[Any, Any] = {**_CLEAR, GL.GL_DEPTH_TEST: False}

#: Order of drawing: solids, maps from the farthest, clear faces, lines, on top.
_ORDER = {"opaque": 0, "maps": 10, "clear": 50, "lines": 60, "on top": 90}


class SpaceCanvas(gl.GLViewWidget):
    """Draws solids, maps and letters as a camera sees them; knows no document.

    Attributes
    ----------
    paint_over : callable
        Gets a painter after the scene is drawn: letters and dimension lines.
    """

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.camera = SpaceCamera()
        self.reach = 100.0
        self.paint_over: Callable[[QPainter], None] | None = None
        self._solid = _mesh(_OPAQUE, _ORDER["opaque"])
        self._clear = _mesh(_CLEAR, _ORDER["clear"])
        self._lines: list[gl.GLLinePlotItem] = []
        self._outlines: list[gl.GLLinePlotItem] = []
        self._maps: list[tuple[np.ndarray, gl.GLImageItem]] = []
        for item in (self._solid, self._clear):
            self.addItem(item)

    def show_theme(self, theme: Theme) -> None:
        """Take the paper of a theme."""
        self.setBackgroundColor(theme.paper)

    def show_drawn(self, drawn: Drawn) -> None:
        """Draw another scene."""
        _fill(self._solid, drawn.opaque)
        _fill(self._clear, drawn.clear)
        self._lines = self._with_lines(self._lines, drawn.lines)
        self.update()

    def show_maps(self, maps: Sequence[SpaceMap], theme: Theme) -> None:
        """Draw other maps, each with its outline."""
        for _, item in self._maps:
            self.removeItem(item)
        self._maps = []
        for one in maps:
            plane = one.place.plane
            rows, columns = one.rgba.shape[:2]
            data = np.ascontiguousarray(one.rgba.transpose(1, 0, 2))
            item = gl.GLImageItem(data, smooth=True, glOptions="translucent")
            item.setGLOptions(dict(_CLEAR))
            matrix = np.eye(4)
            matrix[:3, 0] = np.array(plane.first) / columns
            matrix[:3, 1] = np.array(plane.second) / rows
            matrix[:3, 2] = np.cross(plane.first, plane.second) / (rows * columns)
            matrix[:3, 3] = plane.origin
            item.setTransform(Transform3D(matrix.tolist()))
            middle = np.array(plane.origin) + 0.5 * (
                np.array(plane.first) + np.array(plane.second)
            )
            self._maps.append((middle, item))
            self.addItem(item)
        outlines = [outline(one.place.plane) for one in maps]
        ink = rgba(theme.line)
        self._outlines = self._with_lines(
            self._outlines, [Lines(ends, ink) for ends in outlines]
        )
        self._sort_maps()
        self.update()

    def look(self, camera: SpaceCamera) -> None:
        """See the scene with another camera."""
        self.camera = camera.sized(self.width(), self.height())
        self._sort_maps()
        self.update()

    def image(self) -> QImage:
        """What is seen, as a picture; letters too, which a widget's grab loses."""
        return self.grabFramebuffer()

    # -- what the base class asks -------------------------------------------------

    def viewMatrix(self) -> QMatrix4x4:
        return QMatrix4x4(self.camera.view_matrix().ravel().tolist())

    def projectionMatrix(self, region: object, viewport: object) -> QMatrix4x4:
        camera = self.camera.sized(self.width(), self.height())
        return QMatrix4x4(camera.projection_matrix(self.reach).ravel().tolist())

    def paintGL(self) -> None:
        # A map before may have left depth closed, and clearing needs it open.
        GL.glDepthMask(True)
        super().paintGL()
        GL.glDepthMask(True)
        GL.glDisable(GL.GL_DEPTH_TEST)
        if self.paint_over is not None:
            painter = QPainter(self)
            painter.setRenderHint(QPainter.RenderHint.Antialiasing)
            painter.setRenderHint(QPainter.RenderHint.TextAntialiasing)
            self.paint_over(painter)
            painter.end()

    def _with_lines(
        self, old: list[gl.GLLinePlotItem], lines: Sequence[Lines]
    ) -> list[gl.GLLinePlotItem]:
        for item in old:
            self.removeItem(item)
        made = []
        for line in lines:
            if not len(line.ends):
                continue
            item = gl.GLLinePlotItem(
                pos=np.ascontiguousarray(line.ends), color=line.colour,
                width=line.width, mode="lines", antialias=True, glOptions="opaque",
            )  # fmt: skip
            item.setGLOptions(dict(_ON_TOP if line.on_top else _CLEAR))
            item.setDepthValue(_ORDER["on top" if line.on_top else "lines"])
            self.addItem(item)
            made.append(item)
        return made

    def _sort_maps(self) -> None:
        """Far maps are drawn before near ones."""
        back = self.camera.axes[2]
        order = sorted(self._maps, key=lambda pair: float(pair[0] @ back))
        for place, (_, item) in enumerate(order):
            item.setDepthValue(_ORDER["maps"] + place)


def _mesh(options: dict[Any, Any], order: int) -> gl.GLMeshItem:
    # An empty mesh cannot be drawn: a point stands for it until there is one.
    item = gl.GLMeshItem(
        vertexes=np.zeros((1, 3, 3), np.float32),
        faceColors=np.zeros((1, 3, 4), np.float32),
        smooth=False, computeNormals=False, shader=None,
    )  # fmt: skip
    item.setGLOptions(dict(options))
    item.setDepthValue(order)
    return item


def _fill(item: gl.GLMeshItem, faces: Faces) -> None:
    item.setVisible(len(faces.corners) > 0)
    if len(faces.corners):
        # Without a list of vertices a colour is wanted for every corner.
        item.setMeshData(
            vertexes=faces.corners,
            faceColors=np.repeat(faces.colours[:, None], 3, axis=1),
            smooth=False, computeNormals=False,
        )  # fmt: skip
