"""What the report's page writes: the very pages, tables, and issued revisions."""

from __future__ import annotations

import base64
import io
from pathlib import Path

import pytest
from msgspec.structs import replace
from PIL import Image
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QApplication, QStackedWidget, QWidget

import engine
from app import chosen_file, report_pages
from app.document import Document
from app.jobs import Jobs
from app.logo import LARGEST, choose_logo
from app.main_window import MainWindow
from app.message_bar import JobBar
from app.messages import Messages
from app.pages.report_logo import ReportLogo
from app.reopened import Reopened
from app.report_pages import ReportPages
from engine import layout_file
from engine.assessment import assess
from engine.circuits import BalancedCurrent, Circuit
from engine.edits import replaced
from engine.errors import UserError
from engine.items import TitleData
from engine.layout import Layout
from engine.places import Receptor
from engine.report.choices import Choices
from engine.report.writing import report_bytes
from engine.revisions import as_issued, issued, issued_results
from engine.runs import CircuitShare, Flat, Run

FEEDER = Circuit(
    id="feeder", name="Feeder", demand=BalancedCurrent(rms=400.0), voltage=400
)
LAYOUT = Layout(
    title=TitleData(id="title", project="Hall 3", revision="A", date="2026-01-05"),
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
    receptors=(Receptor(id="desk", name="Desk <b>1</b>", at=(1, 1, 1)),),
)
LOUDER = replace(FEEDER, demand=BalancedCurrent(rms=800.0))


class Window(QWidget):
    """As much of a window as the report's page needs."""

    def __init__(self, document: Document) -> None:
        super().__init__()
        self.document, self.messages, self.jobs = document, Messages(), Jobs(self)
        self.pages = QStackedWidget(self)
        self.told: list[tuple[str, str]] = []
        self.messages.told.connect(lambda kind, text: self.told.append((kind, text)))
        self.jobs.refused.connect(self.messages.error)

    def with_page(self, page):
        self.pages.addWidget(page)
        return page

    def show_page(self, page):
        self.pages.setCurrentWidget(page)
        self.show()


@pytest.fixture
def window(qtbot, tmp_path):
    path = tmp_path / "hall.json"
    layout_file.write(path, LAYOUT)
    made = Window(Document(layout_file.read(path), path))
    qtbot.addWidget(made)
    made.resize(1000, 700)
    return made


@pytest.fixture
def reports(window):
    made = ReportPages(window)
    made.page.choices.kind.set_value("note")
    yield made
    window.jobs.wait()
    made.page.hide()
    made.close()


def opened(qtbot, reports):
    reports.open()
    qtbot.waitUntil(lambda: reports.page.made is not None, timeout=60_000)
    return reports.page


def issue(qtbot, reports, monkeypatch, folder, revision="B", date="2026-02-01"):
    """As a user does: the form, the button, the folder."""
    form = reports.page.issue
    form.refresh()
    form.revision.setText(revision)
    form.date.setText(date)
    form.note.setPlainText("Louder & <b>nearer</b>")
    monkeypatch.setattr(
        report_pages.QFileDialog, "getExistingDirectory", lambda *_: str(folder)
    )
    with qtbot.waitSignal(reports._window.jobs.ended, timeout=60_000):
        qtbot.mouseClick(form.issue, Qt.MouseButton.LeftButton)


def test_the_written_file_is_what_the_engine_writes(qtbot, window, reports, tmp_path):
    opened(qtbot, reports)
    reports.write_pdf(tmp_path / "note.pdf")
    written = (tmp_path / "note.pdf").read_bytes()
    assert written == reports.page.made.content
    assert written == report_bytes(window.document.whole, Choices(kind="note"))
    assert window.told[-1] == ("information", f"{tmp_path / 'note.pdf'} was written.")


def test_the_print_key_writes_what_the_page_asks_for(
    qtbot, window, reports, tmp_path, monkeypatch
):
    reports.page.choices.refresh()
    reports.page.choices.paper.set_value("A3")
    monkeypatch.setattr(
        chosen_file.QFileDialog,
        "getSaveFileName",
        lambda *_: (str(tmp_path / "printed"), ""),
    )
    with qtbot.waitSignal(window.jobs.ended, timeout=60_000):
        reports.choose_report()
    written = (tmp_path / "printed.pdf").read_bytes()
    choices = Choices(kind="note", paper="A3")
    assert written == report_bytes(window.document.whole, choices)
    assert window.told[-1][1].endswith("printed.pdf was written, the note of the base.")


def test_old_pages_are_not_written(qtbot, window, reports, tmp_path):
    page = opened(qtbot, reports)
    page.choices.keep.click()
    path = tmp_path / "kept.pdf"
    path.write_bytes(b"kept")
    window.document.edit("Louder", replaced(window.document.committed, LOUDER))
    for write in (reports.write_pdf, reports.write_tables):
        with pytest.raises(UserError, match="out of date"):
            write(path)
    assert path.read_bytes() == b"kept"
    page.write.click()
    assert window.told[-1][0] == "error"
    assert "out of date" in window.told[-1][1]


def test_tables_are_written_as_workbook_and_as_folder(qtbot, reports, tmp_path):
    opened(qtbot, reports)
    reports.write_tables(tmp_path / "tables.xlsx")
    assert (tmp_path / "tables.xlsx").read_bytes()[:2] == b"PK"
    reports.write_tables(tmp_path / "tables")
    assert len(list((tmp_path / "tables").glob("*.csv"))) > 3


def test_a_revision_is_two_files_and_one_step(
    qtbot, window, reports, tmp_path, monkeypatch
):
    reports.open_issue()
    document = window.document
    steps = document.undo_stack.count()
    issue(qtbot, reports, monkeypatch, tmp_path)
    frozen, printed = tmp_path / "hall-rev-B.json", tmp_path / "hall-rev-B.pdf"
    assert printed.read_bytes().startswith(b"%PDF")
    assert document.undo_stack.count() == steps + 1
    # The newest stands first.
    listed = [row[0] for row in reports.page.issue.list.contents.rows]
    assert listed == ["B"]
    assert document.undo_stack.undoText() == "Issue revision B"
    assert layout_file.read(frozen) == document.whole
    listed = document.whole.revisions[-1]
    assert (listed.revision, listed.date) == ("B", "2026-02-01")
    assert listed.note == "Louder & <b>nearer</b>"
    assert as_issued(document.whole, listed)
    # What was said of this revision is not said of the next.
    assert reports.page.issue.note.toPlainText() == ""
    assert "Save the layout" in window.told[-1][1]
    document.undo_stack.undo()
    assert document.whole == LAYOUT


def test_a_revision_is_refused_in_words(qtbot, window, reports, tmp_path, monkeypatch):
    reports.open_issue()
    form = reports.page.issue
    form.refresh()
    for field, text, said in (
        (form.revision, "", "no name"),
        (form.date, " ", "no date"),
        (form.name, "a/b", "name of a file"),
    ):
        before = field.text()
        field.setText(text)
        qtbot.mouseClick(form.issue, Qt.MouseButton.LeftButton)
        assert said in form.reason.text()
        field.setText(before)
    assert not window.jobs.is_running
    (tmp_path / "hall-rev-B.pdf").write_bytes(b"older")
    issue(qtbot, reports, monkeypatch, tmp_path)
    assert "there already" in window.told[-1][1]
    assert (tmp_path / "hall-rev-B.pdf").read_bytes() == b"older"
    assert not (tmp_path / "hall-rev-B.json").exists()
    assert window.document.undo_stack.count() == 0
    issue(qtbot, reports, monkeypatch, tmp_path, "C")
    form.revision.setText("C")
    qtbot.mouseClick(form.issue, Qt.MouseButton.LeftButton)
    assert "issued before" in form.reason.text()


def test_a_cancelled_revision_leaves_nothing(
    qtbot, window, reports, tmp_path, monkeypatch
):
    reports.open_issue()
    window.jobs.started.connect(lambda _: window.jobs.cancel())
    issue(qtbot, reports, monkeypatch, tmp_path)
    assert [p.name for p in tmp_path.iterdir()] == ["hall.json"]
    assert window.document.undo_stack.count() == 0


def test_edits_while_a_revision_is_written_are_edits_since(
    qtbot, window, reports, tmp_path, monkeypatch
):
    reports.open_issue()
    document = window.document

    def edit(_title):
        document.edit("Louder", replaced(document.committed, LOUDER))

    window.jobs.started.connect(edit)
    issue(qtbot, reports, monkeypatch, tmp_path)
    listed = document.whole.revisions[-1]
    assert not as_issued(document.whole, listed)
    assert LOUDER in document.whole.circuits
    assert as_issued(layout_file.read(tmp_path / "hall-rev-B.json"), listed)


def test_changes_since_a_revision_tell_edits_and_results(
    qtbot, window, reports, tmp_path, monkeypatch
):
    reports.open_issue()
    issue(qtbot, reports, monkeypatch, tmp_path)
    document = window.document
    document.edit("Louder", replaced(document.committed, LOUDER))
    page = reports.page
    assert page.issue.changes.text() == "Changes since B"
    with qtbot.waitSignal(window.jobs.ended, timeout=60_000):
        qtbot.mouseClick(page.issue.changes, Qt.MouseButton.LeftButton)
    qtbot.waitUntil(lambda: page.changes.found is not None)
    assert page.right.currentWidget() is page.changes
    rows = page.changes.table.contents.rows
    assert any(row[:3] == ("changed", "Feeder", "current or power") for row in rows)
    (moved,) = [row for row in rows if row[0] == "result"]
    assert moved[1] == "Desk <b>1</b>"
    # Twice the current is twice the field.
    assert moved[3] == "+100 %"
    assert "every result is the same" in page.changes.again.text()
    page.changes.table.copy()
    copied = QApplication.clipboard().text().splitlines()
    assert copied[0].split("\t")[0] == "What"
    assert len(copied) == len(rows) + 1
    document.undo_stack.undo()
    assert page.changes.head.text().startswith("Out of date.")


def test_without_the_issued_layout_results_alone_are_compared(
    qtbot, window, reports, tmp_path
):
    document = window.document
    old = issued(LAYOUT, assess(LAYOUT, certify=True), "A", "2026-01-05")
    document.edit_whole("Issue", replaced(old, LOUDER), None)
    reports.open()
    revision = document.whole.revisions[-1]
    with qtbot.waitSignal(window.jobs.ended, timeout=60_000):
        reports.find_changes(revision, None)
    found = reports.page.changes.found
    assert [row[0] for row in found.rows()] == ["result"]
    assert "Edits are not told" in reports.page.changes.head.text()
    other = tmp_path / "other.json"
    layout_file.write(other, replaced(old, LOUDER))
    with pytest.raises(UserError, match="not the layout that was issued"):
        reports.find_changes(revision, other)


def test_what_an_older_version_issued_is_computed_again(qtbot):
    old = issued(LAYOUT, assess(LAYOUT, certify=True), "A", "2026-01-05")
    (entry,) = old.revisions
    (result,) = [r for r in entry.results if r.place == "desk"]
    lower = replace(result, value=result.value / 1.25)
    aged = replace(entry, program_version="0.0.1", results=(lower,))
    document = Document()
    reopened = Reopened(document)
    try:
        with qtbot.waitSignal(reopened.found, timeout=60_000) as told:
            document.open(replace(old, revisions=(aged,)), None)
        sentence, moved = told.args
        assert moved
        assert "issued with Lodestead 0.0.1" in sentence
        assert "+25 %" in sentence
        assert sentence == reopened.sentence
        same = replace(aged, results=issued_results(assess(LAYOUT, certify=True)))
        with qtbot.waitSignal(reopened.found, timeout=60_000) as told:
            document.open(replace(old, revisions=(same,)), None)
        assert told.args[1] is False
        assert "every result is the same" in told.args[0]
        with qtbot.waitSignal(reopened.found, timeout=60_000) as told:
            document.open(replaced(old, LOUDER), None)
        assert told.args[1] is False
        assert "edited after revision A was issued" in told.args[0]
        # By this version, there is nothing to tell.
        document.open(old, None)
        assert reopened.sentence == ""
        assert entry.program_version == engine.__version__
    finally:
        reopened.close()


def picture(path: Path) -> Path:
    Image.new("RGB", (40, 20), "navy").save(path)
    return path


def test_a_logo_is_taken_whole_and_can_be_undone(qtbot, tmp_path):
    document = Document(LAYOUT)
    row = ReportLogo(document)
    qtbot.addWidget(row)
    document.changed.connect(lambda *_: row.refresh())
    row.refresh()
    row.take(picture(tmp_path / "logo.png"))
    kept = base64.b64decode(document.layout.title.logo)
    assert Image.open(io.BytesIO(kept)).size == (40, 20)
    assert row.words.text() == "40 × 20 pixels"
    assert document.undo_stack.undoText() == "Set the logo"
    row.remove.click()
    assert document.layout.title.logo == ""
    document.undo_stack.undo()
    assert document.layout.title.logo


def test_a_logo_that_cannot_be_is_refused_in_words(qtbot, tmp_path):
    document = Document(LAYOUT)
    whole = picture(tmp_path / "whole.png").read_bytes()
    for name, content, said in (
        ("cut.png", whole[: len(whole) // 2], "damaged"),
        ("text.jpg", b"no picture", "no PNG or JPEG"),
        ("large.png", b"\0" * (LARGEST + 1), "larger than"),
    ):
        path = tmp_path / name
        path.write_bytes(content)
        with pytest.raises(UserError, match=said):
            choose_logo(document, path)
    with pytest.raises(UserError, match="is there"):
        choose_logo(document, tmp_path / "gone.png")
    assert document.undo_stack.count() == 0
    document.open(replace(LAYOUT, title=replace(LAYOUT.title, logo="AAAA")), None)
    row = ReportLogo(document)
    qtbot.addWidget(row)
    row.refresh()
    assert "damaged" in row.words.text()


def test_progress_shows_what_users_typed_as_text(qtbot, window):
    bar = JobBar(window.jobs)
    qtbot.addWidget(bar)
    window.jobs.started.emit("Issuing revision <b>B</b>")
    assert bar._text.text() == "Issuing revision <b>B</b>"
    assert bar._text.textFormat() == Qt.TextFormat.PlainText


def test_the_window_opens_the_page_by_key_and_escape_leaves_it(qtbot):
    window = MainWindow(Document(LAYOUT), Messages())
    qtbot.addWidget(window)
    window.show()
    actions = {a.text(): a for a in window.actions()}
    assert actions["Report …"].shortcut().toString() == "Ctrl+Shift+R"
    shortcuts = [a.shortcut().toString() for a in window.actions()]
    assert shortcuts.count("Ctrl+Shift+R") == 1
    actions["Report …"].trigger()
    page = window.view_pages.report.page
    assert window.pages.currentWidget() is page
    assert page.maker.is_making or page._soon.isActive()
    qtbot.keyClick(page.sheets, Qt.Key.Key_Escape)
    assert window.pages.currentWidget() is window.drawings
    assert not page.maker.is_making
    actions["Issue revision …"].trigger()
    assert page.tabs.tabText(page.tabs.currentIndex()) == "Issued"
    assert page.issue.revision.text() == "A"
    window.files.may_leave = lambda: True
    window.close()
