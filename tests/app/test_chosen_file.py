"""Files are written under an ending that opens again, and never over one unasked."""

from __future__ import annotations

from pathlib import Path

import pytest
from PySide6.QtCore import QTimer
from PySide6.QtWidgets import QApplication, QFileDialog, QMessageBox, QWidget

from app.chosen_file import ask_where_to_write, with_ending

KINDS = "Picture (*.png);;Vectors (*.svg);;Numbers (*.csv)"


@pytest.mark.parametrize(
    ("typed", "kind", "written"),
    [
        ("map", "Vectors (*.svg)", "map.svg"),
        ("map.svg", "Picture (*.png)", "map.svg"),
        ("Board 2.1", "Picture (*.png)", "Board 2.1.png"),
        ("room.PNG", "Picture (*.png)", "room.PNG"),
        # The proposed name, kept under another kind.
        ("room.png", "Numbers (*.csv)", "room.csv"),
        ("map", "", "map.png"),
    ],
)
def test_every_file_gets_an_ending_that_opens_again(typed, kind, written):
    found = with_ending(Path(typed), Path("folder/room.png"), kind, KINDS)
    assert found == Path(written)


def answered(monkeypatch, typed: Path, press: str) -> Path | None:
    """What is written when `typed` is chosen, and `press` is the answer."""
    monkeypatch.setattr(
        QFileDialog, "getSaveFileName", lambda *_: (str(typed), "Layouts (*.json)")
    )

    def answer() -> None:
        box = QApplication.activeModalWidget()
        assert isinstance(box, QMessageBox)
        next(b for b in box.buttons() if b.text() == press).click()

    QTimer.singleShot(0, answer)
    return ask_where_to_write(QWidget(), "Save", "room.json", "Layouts (*.json)")


def test_a_file_that_the_ending_makes_is_not_written_over_unasked(
    qtbot, monkeypatch, tmp_path
):
    (tmp_path / "kept.json").write_text("{}")
    assert answered(monkeypatch, tmp_path / "kept", "Go back") is None
    over = answered(monkeypatch, tmp_path / "kept", "Write over it")
    assert over == tmp_path / "kept.json"
