"""Starts the desktop: `python -m app [LAYOUT]`, or `lodestead`."""

from __future__ import annotations

import sys
from pathlib import Path

from PySide6.QtCore import QCoreApplication, Qt
from PySide6.QtWidgets import QApplication


def main() -> int:
    """Open the window, with the layout named on the command line; the exit code."""
    # A second OpenGL view draws nothing unless contexts are shared from the start.
    QCoreApplication.setAttribute(Qt.ApplicationAttribute.AA_ShareOpenGLContexts)
    application = QApplication(sys.argv)
    application.setApplicationName("Lodestead")
    application.setStyle("Fusion")
    from app import preferences, theme

    # Before anything takes its sizes from there.
    theme.set_text_size(preferences.load().text_size)
    from app.collection import Collection
    from app.focus_mark import FocusMark
    from app.start import load_ahead, started

    Collection(application)
    FocusMark(application)

    paths = [Path(name) for name in application.arguments()[1:2]]
    window = started(paths[0] if paths else None)
    window.show()
    load_ahead(window)
    return application.exec()


if __name__ == "__main__":
    sys.exit(main())
