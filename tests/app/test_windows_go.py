"""A window that is closed and deleted leaves nothing of itself in memory."""

from __future__ import annotations

import gc
import weakref
from pathlib import Path

from PySide6.QtCore import QCoreApplication, QEvent

from app import preferences, recovery
from app.document import Document
from app.main_window import MainWindow
from app.messages import Messages
from engine import layout_file

SAMPLE = Path(__file__).parents[2] / "sample_layouts" / "small-switch-room.json"


def test_a_window_that_goes_takes_its_parts_along(qtbot, monkeypatch, tmp_path):
    monkeypatch.setattr(preferences, "folder", lambda: tmp_path / "settings")
    monkeypatch.setattr(recovery, "folder", lambda: tmp_path / "unsaved")
    window = MainWindow(Document(layout_file.read(SAMPLE)), Messages())
    window.show()
    assert window.recompute.wait_until_idle(60)
    # A connection to what belongs to the document would keep what listens.
    window.drawings.show_view("Looking +y")
    assert window.drawings.elevation_map.wait_until_idle(60)
    pages = window.view_pages
    for show in (pages.open_space, pages.open_variants, pages.open_uncertainty):
        show()
    window.show_page(window.guide)
    parts = (window, window.document, window.view_state, window.remarks, window.rail)
    left = [weakref.ref(part) for part in parts]
    assert window.close()
    window.deleteLater()
    del window, parts, pages, show
    for _ in range(2):
        QCoreApplication.sendPostedEvents(None, QEvent.Type.DeferredDelete)
        gc.collect()
    assert [reference() for reference in left] == [None] * len(left)
