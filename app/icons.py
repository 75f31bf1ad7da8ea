"""The program's own icons: line drawings that follow the theme's text colour."""

from __future__ import annotations

from functools import cache
from importlib.resources import files

from PySide6.QtCore import QByteArray, QRectF, Qt
from PySide6.QtGui import QIcon, QPainter, QPixmap
from PySide6.QtSvg import QSvgRenderer

#: Side of an icon's drawing grid. [logical pixels]
SIDE = 24

#: What the drawings are stroked with, replaced by the theme's colour.
_INK = "#000000"


@cache
def icon(name: str, colour: str, muted: str) -> QIcon:
    """The icon `name`, drawn in `colour`, and in `muted` where it is disabled.

    Raises
    ------
    FileNotFoundError
        When there is no such drawing.
    """
    drawing = (files("app") / "resources" / "icons" / f"{name}.svg").read_text("utf-8")
    found = QIcon()
    for ink, mode in ((colour, QIcon.Mode.Normal), (muted, QIcon.Mode.Disabled)):
        renderer = QSvgRenderer(QByteArray(drawing.replace(_INK, ink).encode()))
        for ratio in (1, 2, 3):
            pixmap = QPixmap(SIDE * ratio, SIDE * ratio)
            pixmap.fill(Qt.GlobalColor.transparent)
            painter = QPainter(pixmap)
            renderer.render(painter, QRectF(0, 0, SIDE * ratio, SIDE * ratio))
            painter.end()
            pixmap.setDevicePixelRatio(ratio)
            found.addPixmap(pixmap, mode)
    return found
