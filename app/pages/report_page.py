"""The page of the report: what is asked and entered, beside the very pages."""

from __future__ import annotations

from PySide6.QtCore import Qt, QTimer, Signal
from PySide6.QtGui import QHideEvent, QResizeEvent, QShowEvent
from PySide6.QtWidgets import (
    QHBoxLayout,
    QProgressBar,
    QSplitter,
    QStackedWidget,
    QTabWidget,
    QVBoxLayout,
    QWidget,
)

from app.document import EVERYTHING, Document
from app.page import Page
from app.page_pictures import PagePictures
from app.pages.report_bar import ReportBar
from app.pages.report_changes import ReportChangesView
from app.pages.report_choices import ReportChoices
from app.pages.report_issue import ReportIssue
from app.pages.report_logo import ReportLogo
from app.pages.report_sheets import ReportSheets
from app.panels.form import Form
from app.panels.panel import Words, button, scrolled
from app.panels.title_forms import text_groups, title_groups
from app.report_maker import MadeReport, ReportMaker, Wanted
from app.report_revisions import FoundChanges
from app.theme import STEP
from app.wrapping import WrappingRow
from engine.errors import UserError
from engine.exchange.pdf_pages import PdfPages

#: Under this width the options stand instead of the pages. [logical pixels]
NARROW = 200 * STEP

#: The layout rests for so long before its pages are made again. [ms]
PATIENCE = 700

OUT_OF_DATE = "out of date"


class ReportPage(Page):
    """Follows the document while it shows; makes the report in a thread.

    Signals
    -------
    write_wanted(), tables_wanted()
        The PDF, or the tables, are to be written.
    """

    write_wanted = Signal()
    tables_wanted = Signal()

    def __init__(self, document: Document) -> None:
        super().__init__("Report")
        self._document = document
        self.made: MadeReport | None = None
        self.pictures = PagePictures(self)
        self.maker = ReportMaker(self)
        self._soon = QTimer(self, singleShot=True, interval=PATIENCE)
        self._soon.timeout.connect(self.make)
        self._build()
        self._connect()
        self.setFocusProxy(self.sheets)
        self._tell()

    # -- building -------------------------------------------------------------------

    def _build(self) -> None:
        controls = QWidget()
        row = WrappingRow(controls, 2 * STEP, 0)
        self.options = button(
            "Options", "Show or hide what is asked and entered", self._arrange
        )
        self.options.setCheckable(True)
        self.again = button(
            "Make again", "Make the pages of the layout as it is now", self.make
        )
        self.write = button(
            "Write PDF …", "Exactly the pages that are shown", self.write_wanted.emit
        )
        self.tables = button(
            "Write tables …",
            "The report's tables as a workbook, or as CSV files in a folder",
            self.tables_wanted.emit,
        )
        for widget in (self.options, self.again, self.write, self.tables):
            row.addWidget(widget)
        self.state = Words("", "warning")
        self.state.setWordWrap(False)
        self.put_beside_title(controls, self.state)
        self.tabs = QTabWidget()
        self.tabs.setDocumentMode(True)
        self.tabs.setMinimumWidth(80 * STEP)
        self._build_tabs()
        split = QSplitter(Qt.Orientation.Horizontal)
        split.setChildrenCollapsible(False)
        split.addWidget(self.tabs)
        split.addWidget(self._built_pages())
        split.setStretchFactor(1, 1)
        split.setSizes([84 * STEP, 160 * STEP])
        self.column.addWidget(split, 1)

    def _build_tabs(self) -> None:
        self.choices = ReportChoices(self._document)
        self.title, self.texts = Form(self._document), Form(self._document)
        self.logo = ReportLogo(self._document)
        self.issue = ReportIssue(self._document)
        house = QWidget()
        box = QVBoxLayout(house)
        box.setContentsMargins(0, 0, 0, 0)
        box.addWidget(self.texts)
        box.addWidget(self.logo)
        box.addStretch(1)
        for name, widget, tip in (
            ("Options", self.choices, "Which document, on which paper"),
            ("Title", self.title, "What stands in the title block, and who signs"),
            ("Texts", house, "Texts of the author and of the house, and its logo"),
            ("Issued", self.issue, "Issue a revision; what changed since one"),
        ):
            held = QWidget()
            column = QVBoxLayout(held)
            column.setContentsMargins(0, 2 * STEP, 2 * STEP, 2 * STEP)
            column.addWidget(widget)
            column.addStretch(1)
            self.tabs.addTab(scrolled(held), name)
            self.tabs.setTabToolTip(self.tabs.count() - 1, tip)

    def _built_pages(self) -> QWidget:
        self.sheets = ReportSheets(self.pictures)
        self.bar = ReportBar(self.sheets)
        self.reason = Words("", "warning")
        self.reason.hide()
        self.progress = QProgressBar()
        self.progress.setRange(0, 1000)
        self.progress.setTextVisible(False)
        self.progress.setFixedWidth(40 * STEP)
        self.progress.setAccessibleName("Progress of the report")
        self.doing = Words("")
        self.doing.setWordWrap(False)
        self.working = QWidget()
        row = QHBoxLayout(self.working)
        row.setContentsMargins(0, 0, 0, 0)
        row.setSpacing(2 * STEP)
        row.addWidget(self.progress)
        row.addWidget(self.doing, 1)
        row.addWidget(button("Cancel", "Stop making the pages", self.cancel))
        self.working.hide()
        self.changes = ReportChangesView()
        shown = QWidget()
        column = QVBoxLayout(shown)
        column.setContentsMargins(2 * STEP, 0, 0, 0)
        column.setSpacing(STEP)
        column.addWidget(self.bar)
        column.addWidget(self.reason)
        column.addWidget(self.sheets, 1)
        # Beneath: coming and going, it moves nothing that is read.
        column.addWidget(self.working)
        self.right = QStackedWidget()
        self.right.addWidget(shown)
        self.right.addWidget(self.changes)
        return self.right

    def _connect(self) -> None:
        document, maker = self._document, self.maker
        document.changed.connect(self._on_changed)
        document.whole_changed.connect(self._on_whole)
        document.path_changed.connect(self._on_path)
        self.choices.changed.connect(self._on_asked)
        self.choices.keep_changed.connect(self._on_keep)
        self.changes.left.connect(self.show_pages)
        self.pictures.refused.connect(self._say)
        maker.began.connect(self._on_began)
        maker.progressed.connect(self._on_progress)
        maker.made.connect(self._on_made)
        maker.refused.connect(self._on_refused)
        maker.ended.connect(self._on_ended)

    # -- what others ask ------------------------------------------------------------

    @property
    def is_stale(self) -> bool:
        """There are pages, of another layout or of other options than now."""
        return self.made is not None and not self._wanted().is_same(self.made.wanted)

    def current(self) -> MadeReport:
        """The report that is shown, where it is of the layout as it is.

        Raises
        ------
        UserError
            When there is none, or it is out of date.
        """
        opening = "Nothing was written: "
        if self.maker.is_making:
            raise UserError(
                f"{opening}the report is still being made. Wait until its pages are "
                "there."
            )
        if self.made is None:
            raise UserError(f"{opening}there is no report yet. Press Make again.")
        if self.is_stale:
            raise UserError(
                f"{opening}the pages are out of date; the layout or the options "
                "changed since. Press Make again, look at the pages, then write them."
            )
        return self.made

    def make(self) -> None:
        """Make the pages of the layout as it is."""
        self._soon.stop()
        if self.made is not None and not self.is_stale:
            self.maker.cancel()
            self._tell()
            return
        self.maker.make(self._wanted())

    def cancel(self) -> None:
        """Make no pages now."""
        self._soon.stop()
        self.maker.cancel()

    def show_issue(self) -> None:
        """Show the form of a revision."""
        self.tabs.setCurrentIndex(self.tabs.count() - 1)
        self.options.setChecked(True)
        self._arrange()
        self.issue.begin()

    def show_changes(self, found: FoundChanges) -> None:
        """Show what changed since a revision in the place of the pages."""
        self.changes.show_changes(found)
        self.issue.tell_again(found.again_sentence())
        if self.width() < NARROW:
            self.options.setChecked(False)
            self._arrange()
        self.right.setCurrentWidget(self.changes)
        self.changes.setFocus(Qt.FocusReason.OtherFocusReason)

    def show_pages(self) -> None:
        """Show the pages again."""
        self.right.setCurrentIndex(0)
        self.sheets.setFocus(Qt.FocusReason.OtherFocusReason)

    def close_worker(self) -> None:
        """Stop the threads, before the window goes."""
        self._document.changed.disconnect(self._on_changed)
        self._document.whole_changed.disconnect(self._on_whole)
        self._document.path_changed.disconnect(self._on_path)
        self._soon.stop()
        self.maker.close()
        self.pictures.close()

    # -- following ------------------------------------------------------------------

    def _wanted(self) -> Wanted:
        return Wanted(self._document.whole, self.choices.choices)

    def _fill(self) -> None:
        """Show what is entered."""
        layout = self._document.layout
        self.choices.refresh()
        self.title.show_groups(title_groups(layout))
        self.texts.show_groups(text_groups(layout))
        self.logo.refresh()
        self.issue.refresh()

    def showEvent(self, event: QShowEvent) -> None:
        self._fill()
        self._tell()
        if self.made is None or (self.is_stale and self.choices.keep.isChecked()):
            self._soon.start(0)
        super().showEvent(event)

    def hideEvent(self, event: QHideEvent) -> None:
        self.cancel()
        super().hideEvent(event)

    def _on_changed(self, _layout: object, ids: object) -> None:
        if ids == EVERYTHING:
            self.cancel()
            self.made = None
            self.issue.tell_again("")
            self.issue.start_over()
            self.choices.choose_variant(None)
            self.right.setCurrentIndex(0)
            self._show_made()

    def _on_path(self, _path: object) -> None:
        if self.isVisible():
            self.issue.refresh()

    def _on_whole(self) -> None:
        if not self.isVisible():
            return
        self._fill()
        self.changes.set_stale()
        self._on_asked()

    def _on_asked(self) -> None:
        """Another report is asked for, by an edit or an option."""
        self._say("")
        if self.maker.is_making:
            self.maker.cancel()
        if self.choices.keep.isChecked():
            self._soon.start(PATIENCE)
        self._tell()

    def _on_keep(self, on: bool) -> None:
        if on and (self.made is None or self.is_stale):
            self.make()
        elif not on:
            self._soon.stop()
        self._tell()

    # -- making ---------------------------------------------------------------------

    def _on_began(self) -> None:
        self._say("")
        self.progress.setValue(0)
        self.doing.setText("Making the report")
        self.working.show()
        self._tell()

    def _on_progress(self, share: float, doing: str) -> None:
        self.progress.setValue(round(1000 * share))
        self.doing.setText(doing or "Making the report")

    def _on_made(self, made: MadeReport) -> None:
        self.made = made
        self._show_made()

    def _on_refused(self, sentence: str) -> None:
        self.made = None
        self._show_made()
        self._say(sentence)

    def _on_ended(self) -> None:
        self.working.hide()
        self._tell()

    def _show_made(self) -> None:
        made = self.made
        pages = PdfPages((), ()) if made is None else made.pages
        self.pictures.show_pdf(b"" if made is None else made.content)
        self.sheets.show_pages(pages)
        self.bar.show_sections(pages.sections)
        self._tell()

    def _say(self, sentence: str) -> None:
        self.reason.setText(sentence)
        self.reason.setVisible(bool(sentence))

    def _tell(self) -> None:
        """Say whether the pages are those of the layout."""
        stale = self.is_stale
        self.sheets.set_note(OUT_OF_DATE if stale else "")
        being_made = self.maker.is_making or self._soon.isActive()
        self.state.set_style("muted" if being_made else "warning")
        if being_made:
            self.state.setText("being made")
        elif stale:
            self.state.setText(OUT_OF_DATE)
        else:
            self.state.setText("" if self.made else "no pages yet")
        self.again.setEnabled(stale or self.made is None)

    # -- room -----------------------------------------------------------------------

    def resizeEvent(self, event: QResizeEvent) -> None:
        wide = event.size().width() >= NARROW
        if wide != (event.oldSize().width() >= NARROW):
            self.options.setChecked(wide)
        self._arrange()
        super().resizeEvent(event)

    def _arrange(self) -> None:
        """With little room, either the options or the pages show."""
        on = self.options.isChecked()
        self.tabs.setVisible(on)
        self.right.setVisible(not on or self.width() >= NARROW)
