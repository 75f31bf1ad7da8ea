"""Pages of Help: the guide, the cautions in full, and what a layout adds to them."""

from __future__ import annotations

import re
from pathlib import Path

import pytest
from msgspec.structs import replace
from PySide6.QtCore import Qt

import app
import engine
from app.document import Document
from app.guide import AboutPage, CautionsPage, GuidePage
from engine.circuits import LoadCase
from engine.layout import Layout
from engine.open_boards import open_board_sentences
from engine.places import Enclosure, Zone
from engine.report.wording import CAUTIONS

BOARD = Enclosure(
    id="board",
    name="Main *board* <b>",
    footprint=((0.0, 0.0), (1.0, 0.0), (1.0, 1.0), (0.0, 1.0)),
    z_from=0.0,
    z_to=2.0,
    state="open for work",
)
WORK = Zone(
    id="work",
    name="Work at the board",
    outline=((0.0, 1.5), (1.0, 1.5), (1.0, 3.0), (0.0, 3.0)),
    category="workers",
)


def test_the_guide_leads_from_an_empty_room_to_a_report(qtbot):
    page = GuidePage()
    qtbot.addWidget(page)
    text = page.text.toPlainText()
    for word in ("Room", "Run", "Zone", "Reference levels", "margins", "report"):
        assert word in text
    assert "**" not in text
    assert page.accessibleName() == "From an empty room to a report"


def test_the_guide_names_the_keys_that_the_menus_have(qtbot):
    page = GuidePage()
    qtbot.addWidget(page)
    text = page.text.toPlainText()
    for name in ("view_pages", "why_pages", "window_menus"):
        source = (Path(app.__file__).parent / f"{name}.py").read_text(encoding="utf-8")
        for key in re.findall(r'"(F\d+|Ctrl\+Shift\+[UV])"', source):
            assert re.search(rf"{re.escape(key)}\b", text), key


@pytest.mark.parametrize("page_of", [lambda d: CautionsPage(d), lambda d: AboutPage()])
def test_every_caution_is_shown_in_full(qtbot, page_of):
    page = page_of(Document())
    qtbot.addWidget(page)
    text = page.text.toPlainText()
    for caution in CAUTIONS:
        assert caution in text


def test_about_says_version_and_licence(qtbot):
    page = AboutPage()
    qtbot.addWidget(page)
    text = page.text.toPlainText()
    assert engine.__version__ in text
    assert "MIT License" in text


def test_a_zone_of_workers_at_an_open_board_is_told_first(qtbot):
    document = Document()
    page = CautionsPage(document)
    qtbot.addWidget(page)
    page.show()
    assert "arc" not in page.text.toPlainText()
    document.edit("Draw", Layout(enclosures=(BOARD,), zones=(WORK,)))
    first = page.text.toPlainText().partition("\n")[0]
    # What users typed is shown as it is.
    assert first.startswith("Zone “Work at the board” is for workers at “Main *board* ")
    for word in ("<b>", "shock", "arc", "live parts", "implants"):
        assert word in first


def test_who_works_at_an_open_board():
    layout = Layout(enclosures=(BOARD,), zones=(WORK,))
    assert len(open_board_sentences(layout)) == 1
    closed = replace(BOARD, state="closed")
    assert open_board_sentences(replace(layout, enclosures=(closed,))) == ()
    case = LoadCase(id="service", open_enclosures=("board",))
    in_case = replace(layout, enclosures=(closed,), load_cases=(case,))
    assert len(open_board_sentences(in_case)) == 1
    others = replace(WORK, category="general public, short stay")
    assert open_board_sentences(replace(layout, zones=(others,))) == ()
    away = tuple((x, y + 5.0) for x, y in WORK.outline)
    far = replace(layout, zones=(replace(WORK, outline=away),))
    assert open_board_sentences(far) == ()


def test_escape_closes_a_page(qtbot):
    page = GuidePage()
    qtbot.addWidget(page)
    page.show()
    with qtbot.waitSignal(page.closed):
        qtbot.keyClick(page.text, Qt.Key.Key_Escape)
