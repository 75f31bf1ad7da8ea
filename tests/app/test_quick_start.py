"""What the start of the desktop loads and builds: only what shows first."""

from __future__ import annotations

import json
import os
import subprocess
import sys
from pathlib import Path

import pytest
from pytestqt.qtbot import QtBot

from app import preferences, recovery, start

ROOT = Path(__file__).parents[2]

#: What takes long to load, and what it is for; not before that is asked for.
LATER = {
    "reportlab": "the report",
    "ezdxf": "drawings to other programs",
    "openpyxl": "workbooks",
    "pypdfium2": "backing drawings from PDF",
    "OpenGL": "the view in space",
    "pyqtgraph": "plots",
}

STARTED = """
import json, sys
from PySide6.QtWidgets import QApplication
application = QApplication([])
from app.start import started
window = started(None)
window.show()
application.processEvents()
built = [name for owner in (window, window.view_pages, window.view_pages.why)
         for name in vars(owner) if not name.startswith("_")]
print(json.dumps({"loaded": sorted(sys.modules), "built": built,
                  "runs": len(window.document.layout.runs)}))
window.close()
"""


@pytest.fixture(scope="module")
def first_start(tmp_path_factory: pytest.TempPathFactory) -> dict[str, list[str]]:
    """Names of what was loaded and built by a first start that shows a sample."""
    folder = str(tmp_path_factory.mktemp("user"))
    places = dict.fromkeys(("XDG_CONFIG_HOME", "XDG_DATA_HOME", "APPDATA"), folder)
    done = subprocess.run(
        [sys.executable, "-c", STARTED],
        cwd=ROOT,
        env={**os.environ, **places, "LOCALAPPDATA": folder, "HOME": folder},
        capture_output=True,
        encoding="utf-8",
        timeout=120,
        check=False,
    )
    assert done.returncode == 0, done.stderr
    found: dict[str, list[str]] = json.loads(done.stdout.splitlines()[-1])
    assert found["runs"], "the sample is open"
    return found


@pytest.mark.parametrize("package", LATER)
def test_the_first_window_does_not_wait_for(
    package: str, first_start: dict[str, list[str]]
) -> None:
    found = [n for n in first_start["loaded"] if n.partition(".")[0] == package]
    assert not found, f"{LATER[package]} is not shown yet"


def test_pages_and_panels_behind_others_are_not_built(
    first_start: dict[str, list[str]],
) -> None:
    hidden = {
        "circuits", "load_cases", "levels", "new_page", "guide", "cautions", "about",
        "cycle", "space", "variants", "uncertainty", "profile",
    }  # fmt: skip
    assert not hidden & set(first_start["built"])
    assert {"item", "remarks", "drawings"} <= set(first_start["built"])


def test_plots_are_loaded_ahead_once_margins_are_there(
    qtbot: QtBot, monkeypatch: pytest.MonkeyPatch, tmp_path: Path
) -> None:
    monkeypatch.setattr(preferences, "folder", lambda: tmp_path)
    monkeypatch.setattr(recovery, "folder", lambda: tmp_path / "unsaved")
    monkeypatch.setattr(sys, "excepthook", sys.excepthook)
    loaded: list[str] = []
    monkeypatch.setattr(start, "import_module", loaded.append)
    window = start.started(None)
    qtbot.addWidget(window)
    start.load_ahead(window)
    assert not loaded
    window.show()
    qtbot.waitUntil(lambda: loaded == ["pyqtgraph"], timeout=30_000)
    window.recompute.wait_until_idle()
    assert loaded == ["pyqtgraph"], "once only"
    window.close()
