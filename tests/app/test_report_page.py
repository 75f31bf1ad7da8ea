"""The page of the report: its pages are the engine's, and say when they are old."""

from __future__ import annotations

import io

import pytest
from msgspec.structs import replace
from pypdf import PdfReader
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QComboBox

from app.document import Document
from app.pages.report_page import ReportPage
from app.report_maker import MadeReport, Maker, Wanted
from engine.circuits import BalancedCurrent, Circuit
from engine.edits import replaced
from engine.errors import ComputationCancelled, UserError
from engine.items import TitleData
from engine.layout import Layout
from engine.places import Receptor, Room, Zone
from engine.report.choices import Choices
from engine.report.writing import report_bytes
from engine.runs import CircuitShare, Flat, Run
from engine.variant import Variant, VariantItems

ROOM = ((0.0, 0.0), (4.0, 0.0), (4.0, 3.0), (0.0, 3.0))
FEEDER = Circuit(
    id="feeder", name="Feeder", demand=BalancedCurrent(rms=400.0), voltage=400
)
LAYOUT = Layout(
    title=TitleData(id="title", project="Hall 3", date="2026-01-05"),
    rooms=(Room(id="room", outline=ROOM, floor_level=0, ceiling_level=3),),
    circuits=(FEEDER,),
    runs=(
        Run(
            id="bars",
            name="Bars",
            kind="busbar",
            route=((0.5, 1.5, 2.5), (3.5, 1.5, 2.5)),
            section=Flat(circuits=(CircuitShare(circuit="feeder"),)),
        ),
    ),
    zones=(
        Zone(id="floor", name="Floor", outline=ROOM, floor_level=0, heights=(1.0,)),
    ),
    receptors=(Receptor(id="desk", name="Desk", at=(1, 1, 1)),),
    variants=(
        Variant(
            id="half",
            name="Half <b>load</b>",
            replaced=VariantItems(
                circuits=(replace(FEEDER, demand=BalancedCurrent(rms=200.0)),)
            ),
        ),
    ),
)


@pytest.fixture
def page(qtbot):
    made = ReportPage(Document(LAYOUT))
    qtbot.addWidget(made)
    made.choices.kind.set_value("note")
    made.resize(1000, 700)
    yield made
    made.hide()
    made.close_worker()


def shown(qtbot, page) -> MadeReport:
    page.show()
    qtbot.waitUntil(lambda: page.made is not None, timeout=60_000)
    return page.made


def choose(box: QComboBox, value) -> None:
    """As a click on the entry does."""
    box.set_value(value)
    box.activated.emit(box.currentIndex())


def text_of(content: bytes) -> str:
    return " ".join(
        page.extract_text() for page in PdfReader(io.BytesIO(content)).pages
    )


@pytest.mark.parametrize(
    "choices",
    [
        Choices(kind="note"),
        Choices(kind="note", variant="half"),
        Choices(kind="note", paper="A3", orientation="portrait"),
        Choices(validate=False),
    ],
)
def test_pages_are_the_bytes_of_the_engine(choices):
    made = Maker().made(Wanted(LAYOUT, choices))
    assert made.content == report_bytes(LAYOUT, choices)


def test_what_is_not_computed_again_gives_the_same_bytes():
    maker = Maker()
    maker.made(Wanted(LAYOUT, Choices(validate=False)))
    title = replace(LAYOUT.title, project="Hall 4", conclusions="None yet.")
    settings = replace(LAYOUT.settings, paper="Letter")
    other = replaced(LAYOUT, title, settings)
    for choices in (
        Choices(validate=False),
        Choices(kind="note"),
        Choices(kind="note", orientation="landscape"),
        Choices(kind="note", variant="half"),
    ):
        made = maker.made(Wanted(other, choices))
        assert made.content == report_bytes(other, choices)
    louder = replace(FEEDER, demand=BalancedCurrent(rms=800.0))
    moved = replaced(other, louder)
    again = maker.made(Wanted(moved, Choices(kind="note")))
    assert again.content == report_bytes(moved, Choices(kind="note"))


def test_a_report_stops_when_told():
    with pytest.raises(ComputationCancelled):
        Maker().made(Wanted(LAYOUT, Choices(kind="note")), lambda: True)


def test_the_preview_has_the_pages_of_the_document(qtbot, page):
    made = shown(qtbot, page)
    reader = PdfReader(io.BytesIO(made.content))
    assert page.sheets.count == len(reader.pages) == len(made.pages.sizes)
    assert page.bar.number.suffix() == f" of {len(reader.pages)}"
    qtbot.waitUntil(lambda: page.pictures.is_idle, timeout=20_000)
    assert page.state.text() == ""
    assert page.current() is made


def test_an_edit_makes_the_pages_old_and_undo_makes_them_new(qtbot, page):
    page.choices.keep.click()
    page.show()
    page.make()
    made = shown(qtbot, page)
    document = page._document
    louder = replace(FEEDER, demand=BalancedCurrent(rms=500.0))
    document.edit("Set the current", replaced(document.committed, louder))
    assert page.is_stale
    assert page.state.text() == "out of date"
    assert page.sheets.accessibleDescription() == "out of date"
    with pytest.raises(UserError, match="out of date"):
        page.current()
    document.undo_stack.undo()
    assert not page.is_stale
    assert page.current() is made
    document.undo_stack.redo()
    qtbot.mouseClick(page.again, Qt.MouseButton.LeftButton)
    with pytest.raises(UserError, match="still being made"):
        page.current()
    qtbot.waitUntil(lambda: page.made is not made, timeout=60_000)
    assert page.current().wanted.layout is document.whole


def test_pages_follow_edits_while_that_is_wanted(qtbot, page):
    made = shown(qtbot, page)
    page.tabs.setCurrentIndex(1)
    field = page.title.editor("project").field.line
    field.setFocus()
    field.setText("<b>Hall</b> & yard")
    field.editingFinished.emit()
    assert page._document.whole.title.project == "<b>Hall</b> & yard"
    qtbot.waitUntil(lambda: page.made is not made, timeout=60_000)
    assert "<b>Hall</b> & yard" in text_of(page.current().content)


def test_cancelled_pages_are_not_there(qtbot, page):
    page.show()
    page.make()
    assert page.maker.is_making
    assert page.working.isVisible()
    page.cancel()
    assert not page.maker.is_making
    assert not page.working.isVisible()
    qtbot.waitUntil(lambda: page.maker._worker.is_idle, timeout=60_000)
    qtbot.wait(20)
    assert page.made is None
    assert page.state.text() == "no pages yet"
    with pytest.raises(UserError, match="no report yet"):
        page.current()


def test_a_variant_is_named_and_its_name_stays_text(qtbot, page):
    page.show()
    assert page.choices.variant.itemText(1) == "Half <b>load</b>"
    choose(page.choices.variant, "half")
    qtbot.waitUntil(lambda: page.made is not None and not page.is_stale, timeout=60_000)
    assert page.current().wanted.choices.variant == "half"
    assert "Half <b>load</b>" in text_of(page.current().content)


def test_a_variant_that_goes_gives_way_to_the_base(qtbot, page):
    page.show()
    choose(page.choices.variant, "half")
    document = page._document
    document.edit_whole("Drop it", replace(document.whole, variants=()), None)
    assert page.choices.choices.variant is None
    assert not page.choices.variant.isEnabled()


def test_the_keyboard_walks_and_sections_lead_to_their_pages(qtbot, page):
    choose(page.choices.kind, "report")
    page.choices.checks.click()
    made = shown(qtbot, page)
    sheets = page.sheets
    qtbot.keyClick(sheets, Qt.Key.Key_PageDown)
    assert sheets.page == 1
    assert page.bar.number.value() == 2
    qtbot.keyClick(sheets, Qt.Key.Key_End)
    assert sheets.page == sheets.count - 1
    qtbot.keyClick(sheets, Qt.Key.Key_Home)
    assert sheets.page == 0
    titles = [s.title for s in made.pages.sections]
    row = titles.index("Contents")
    page.bar.sections.activated.emit(row)
    assert sheets.page == made.pages.sections[row].page
    assert page.bar.sections.currentText().strip() == "Contents"
    sheets.set_zoom(2.0)
    before = sheets.page
    qtbot.keyClick(sheets, Qt.Key.Key_Minus)
    assert sheets.zoom == pytest.approx(1.6)
    assert sheets.page == before


def test_pages_need_little_room(qtbot, page):
    shown(qtbot, page)
    page.resize(640, 420)
    assert not page.options.isChecked()
    assert page.right.isVisible()
    assert not page.tabs.isVisible()
    qtbot.mouseClick(page.options, Qt.MouseButton.LeftButton)
    assert page.tabs.isVisible()
    assert not page.right.isVisible()


def test_another_layout_starts_with_no_pages(qtbot, page):
    shown(qtbot, page)
    page._document.open(Layout(), None)
    assert page.made is None
    assert page.sheets.count == 0
