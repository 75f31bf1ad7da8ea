"""Whether OpenGL can be had here, asked once and without a window."""

from __future__ import annotations

from functools import cache

from PySide6.QtGui import QGuiApplication, QOffscreenSurface, QOpenGLContext

#: Platforms of the toolkit that have none; asking them can end the program.
_WITHOUT = ("offscreen", "minimal", "vnc", "linuxfb")

_LEAST = (2, 1)


@cache
def opengl_obstacle() -> str:
    """Why there can be no picture in space, as a sentence; empty when there can.

    Nothing of OpenGL is touched on platforms that are known to have none.
    """
    if QGuiApplication.platformName() in _WITHOUT:
        return _sentence("this display offers no OpenGL")
    try:
        # Finds the system's library, or fails.
        import pyqtgraph.opengl  # noqa: F401
    except Exception as error:
        return _sentence(f"OpenGL could not be loaded ({type(error).__name__})")
    context, surface = QOpenGLContext(), QOffscreenSurface()
    surface.create()
    if not context.create() or not context.makeCurrent(surface):
        return _sentence("the display's driver offers no OpenGL")
    version = context.format().version()
    context.doneCurrent()
    if tuple(version) < _LEAST:
        found = ".".join(str(part) for part in version)
        return _sentence(
            f"the display's driver offers OpenGL {found}, and 2.1 is needed"
        )
    return ""


def _sentence(reason: str) -> str:
    return (
        f"The view in space cannot be shown: {reason}. Plan, elevations, results and "
        "reports work without it."
    )
