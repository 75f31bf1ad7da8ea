"""Tests of the desktop run without a screen unless one is chosen."""

from __future__ import annotations

import gc
import os
from collections.abc import Iterator

os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")

import pytest
from PySide6.QtCore import QCoreApplication, QEvent, Qt

from app.collection import due

# A second OpenGL view draws nothing unless contexts are shared from the start.
QCoreApplication.setAttribute(Qt.ApplicationAttribute.AA_ShareOpenGLContexts)


@pytest.fixture(autouse=True)
def _collected_on_this_thread(request: pytest.FixtureRequest) -> Iterator[None]:
    """As in the program, see `app.collection`: what a test leaves goes after it."""
    gc.disable()
    if not gc.get_freeze_count():
        # Modules stay: to look through them each time would take most of the time.
        gc.collect()
        gc.freeze()
    yield
    # Outside of a running loop Qt keeps what is to be deleted later.
    QCoreApplication.sendPostedEvents(None, QEvent.Type.DeferredDelete)
    # A window with its maps is some 200 MB: it does not wait for Python's thresholds.
    generation = 2 if "window" in request.fixturenames else due()
    if generation is not None:
        gc.collect(generation)
    gc.enable()
