"""What is exported says whether base or variant is shown."""

from __future__ import annotations

from pathlib import Path

import pytest
from PySide6.QtWidgets import QWidget

from app.document import Document
from app.exports import Exports
from app.jobs import Jobs
from app.messages import Messages
from app.view_state import ViewState
from engine import layout_file

SAMPLE = Path(__file__).parents[2] / "sample_layouts" / "imaging-corridor.json"


@pytest.mark.parametrize(
    ("variant", "said"),
    [(None, "Base."), ("bond-removed", "Variant Second bond removed.")],
)
def test_an_exported_map_says_what_it_shows(qtbot, tmp_path, variant, said):
    window = QWidget()
    qtbot.addWidget(window)
    document, jobs = Document(layout_file.read(SAMPLE)), Jobs(window)
    document.choose(variant)
    exports = Exports(document, ViewState(), jobs, Messages(), window)
    with qtbot.waitSignal(jobs.ended, timeout=60_000):
        exports.map(tmp_path / "map.svg")
    assert said in (tmp_path / "map.svg").read_text(encoding="utf-8")
