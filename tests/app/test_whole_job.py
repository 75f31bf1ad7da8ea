"""One job from an empty layout to the printed report, by mouse and keyboard alone."""

from __future__ import annotations

import pytest
from hands import Hands
from pypdf import PdfReader
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QFileDialog, QPushButton

from app import preferences, recovery
from app.document import Document
from app.files import empty_layout
from app.main_window import MainWindow
from app.messages import Messages
from engine import layout_file
from engine.assessment import assess
from engine.circuits import BalancedCurrent
from engine.decisions import worst_comparisons
from engine.levels import level_at
from engine.report.wording import STATE_SENTENCES
from engine.runs import Trefoil
from engine.units import significant

Key = Qt.Key
CONTROL_SHIFT = Qt.KeyboardModifier.ControlModifier | Qt.KeyboardModifier.ShiftModifier


@pytest.fixture
def settings(monkeypatch, tmp_path):
    monkeypatch.setattr(preferences, "folder", lambda: tmp_path / "settings")
    monkeypatch.setattr(recovery, "folder", lambda: tmp_path / "unsaved")


@pytest.fixture
def new_window(qtbot, settings):
    def made():
        start = empty_layout(preferences.Preferences())
        window = MainWindow(Document(start), Messages())
        qtbot.addWidget(
            window, before_close_func=lambda w: w.document.undo_stack.setClean()
        )
        with qtbot.waitActive(window):
            window.show()
            window.activateWindow()
        return window

    return made


def draw_room(hands):
    hands.key(Key.Key_2)
    hands.say("to 0 0")
    hands.say("size 8 6")
    hands.window.drawings.take_keyboard()
    hands.key(Key.Key_Home)


def draw_bars(hands):
    hands.key(Key.Key_5)
    strip = hands.window.strip
    hands.choose(strip._combos["kind"], "busbar")
    for place in ((1, 1), (5, 1), (5, 4)):
        hands.point(*place)
    hands.choose(strip._combos["next leg"], "riser up")
    hands.point(5, 4)
    hands.key(Key.Key_Return)


def draw_tray(hands):
    """A cable tray along the wall, its cables in trefoil."""
    window = hands.window
    hands.key(Key.Key_5)
    hands.choose(window.strip._combos["kind"], "cable tray")
    hands.say("to 1 5 z 2.2")
    hands.say("go 6 toward 0")
    window.drawings.take_keyboard()
    hands.key(Key.Key_Return)
    hands.key(Key.Key_F6)
    assert window.pages.currentWidget() is window.section
    form = window.section.form
    hands.choose(form.editor("section.formation").box, "trefoil")
    hands.key(Key.Key_Escape)
    assert window.pages.currentWidget() is window.drawings


def draw_zone(hands):
    """Where people are: dragged from corner to corner, then its category."""
    hands.key(Key.Key_6)
    hands.drag((2, 2), (4, 4))
    hands.tab("Item")
    form = hands.window.item.form
    hands.choose(form.editor("category").box, "workers")
    hands.write(form.editor("heights").field.line, "1.0 1.5 m")


def enter_level(hands):
    """A reference level with source, category and value, and where it holds."""
    panel = hands.window.levels
    hands.tab("Ref. levels")
    hands.click(button(panel, "Add"))
    hands.type("House rule")
    hands.key(Key.Key_Return)
    hands.write(panel.source.line, "Invented for this test, clause 1")
    hands.choose(panel.category, "workers")
    hands.show(panel.values.add_button)
    hands.click(panel.values.add_button)
    for title, text in (("From Hz", "1"), ("To Hz", "1000"), ("c", "50")):
        hands.cell(panel.values.ranges, 0, title, text)
    hands.tick(panel.uses.list, 0)


def enter_currents(hands):
    hands.tab("Circuits")
    table = hands.window.circuits.table
    hands.cell(table, 0, "Current", "800 A 0.9 lag")


def button(panel, text):
    return next(b for b in panel.findChildren(QPushButton) if b.text() == text)


def figures(comparison):
    """Value and reference level of a comparison as they are printed."""
    value = significant(comparison.value / 1e-6)
    return f"{value} µT", f"{comparison.level_value / 1e-6:g} µT"


@pytest.mark.qt_log_ignore("This plugin does not support", extend=True)
def test_the_whole_job(qtbot, new_window, tmp_path, monkeypatch):
    window = new_window()
    hands = Hands(qtbot, window)
    document, stack = window.document, window.document.undo_stack
    empty = document.committed
    draw_room(hands)
    draw_bars(hands)
    draw_tray(hands)
    draw_zone(hands)
    enter_level(hands)
    enter_currents(hands)
    drawn = document.committed
    check_drawn(drawn)

    assert window.recompute.wait_until_idle(60)
    shown = window.margins.tile.accessibleName()
    [comparison] = worst_comparisons(assess(drawn))
    value, level = figures(comparison)
    assert f"against House rule {level}: {value}" in shown
    assert STATE_SENTENCES[comparison.state] in shown

    steps = stack.count()
    assert all(stack.text(i) for i in range(steps))
    for _ in range(steps):
        hands.control(Key.Key_Z)
    assert document.committed == empty
    assert not stack.canUndo()
    for _ in range(steps):
        hands.key(Key.Key_Z, CONTROL_SHIFT)
    assert document.committed == drawn

    path = tmp_path / "job.json"
    monkeypatch.setattr(
        QFileDialog, "getSaveFileName", lambda *_: (str(path), "Layouts (*.json)")
    )
    hands.control(Key.Key_S)
    assert layout_file.read(path) == drawn
    assert not document.is_modified

    again = new_window()
    other = Hands(qtbot, again)
    monkeypatch.setattr(QFileDialog, "getOpenFileName", lambda *_: (str(path), ""))
    other.control(Key.Key_O)
    assert again.document.committed == drawn
    assert again.recompute.wait_until_idle(60)
    assert again.margins.tile.accessibleName() == shown

    printed = tmp_path / "job.pdf"
    monkeypatch.setattr(QFileDialog, "getSaveFileName", lambda *_: (str(printed), ""))
    with qtbot.waitSignal(again.jobs.ended, timeout=60_000):
        other.control(Key.Key_P)
    text = " ".join(page.extract_text() for page in PdfReader(printed).pages)
    assert value in text
    assert level in text
    assert "House rule" in text
    assert "Invented for this test, clause 1" in text


def check_drawn(layout):
    """What was drawn is what was meant, to the millimetre."""
    [room], [zone], [level] = layout.rooms, layout.zones, layout.levels
    bars, tray = layout.runs
    [circuit] = layout.circuits
    assert room.outline == ((0, 0), (8, 0), (8, 6), (0, 6))
    assert bars.kind == "busbar"
    assert bars.route == ((1, 1, 2.5), (5, 1, 2.5), (5, 4, 2.5), (5, 4, 6))
    assert tray.kind == "cable tray"
    assert tray.route == ((1, 5, 2.2), (7, 5, 2.2))
    assert isinstance(tray.section, Trefoil)
    assert zone.outline == ((2, 2), (4, 2), (4, 4), (2, 4))
    assert zone.heights == (1, 1.5)
    assert zone.category == level.category == "workers"
    assert zone.levels == (level.id,)
    assert level_at(level, 50) == pytest.approx(50e-6, rel=1e-12)
    assert circuit.demand == BalancedCurrent(rms=800, cos_phi=0.9)
