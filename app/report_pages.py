"""The report in the window: its page, its files, its revisions."""

from __future__ import annotations

from functools import cached_property
from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtCore import QObject
from PySide6.QtWidgets import QFileDialog

from app.chosen_file import ask_where_to_write
from app.document import EVERYTHING
from app.menus import Command
from app.reopened import Reopened
from app.report_revisions import (
    FoundChanges,
    Frozen,
    Issue,
    file_stem,
    found_changes,
    freeze,
    frozen_file,
    frozen_layout,
    recorded,
)
from engine.errors import Cancelled, Progress
from engine.items import IssuedRevision
from engine.written_file import write_file

if TYPE_CHECKING:
    from app.main_window import MainWindow
    from app.pages.report_page import ReportPage
    from engine.report.choices import Choices

_TABLES = "Workbook (*.xlsx);;CSV files in a folder (*)"


class ReportPages(QObject):
    """Opens the page of the report, and does what it asks for."""

    def __init__(self, window: MainWindow) -> None:
        super().__init__(window)
        self._window = window
        #: Which layout was opened: a record belongs to that one alone.
        self._opened = 0
        window.document.changed.connect(self._on_changed)
        self.reopened = Reopened(window.document, self)
        self.reopened.found.connect(self._on_reopened)
        self.reopened.look()

    @cached_property
    def page(self) -> ReportPage:
        # Here: what draws pages takes long to load.
        from app.pages.report_page import ReportPage

        page = self._window.with_page(ReportPage(self._window.document))
        page.write_wanted.connect(self.choose_pdf)
        page.tables_wanted.connect(self.choose_tables)
        page.issue.issue_wanted.connect(self.choose_folder)
        page.issue.changes_wanted.connect(self.choose_changes)
        page.issue.tell_again(self.reopened.sentence)
        return page

    # -- commands -----------------------------------------------------------------

    def commands(self) -> tuple[Command, ...]:
        """Entries of the menu Report."""
        return (
            Command("Report …", self.open, "Ctrl+Shift+R",
                    "Its pages as they will be written, and what stands in them"),
            Command("Issue revision …", self.open_issue, "",
                    "Freeze layout and report under a revision"),
        )  # fmt: skip

    def open(self) -> None:
        """Show the pages of the report, of the base or the variant that is shown."""
        variant = self._window.document.variant
        self.page.choices.choose_variant(None if variant is None else variant.id)
        self._window.show_page(self.page)

    def open_issue(self) -> None:
        """Show the form of a revision."""
        self._window.show_page(self.page)
        self.page.show_issue()

    def close(self) -> None:
        """Stop the threads, before the window goes."""
        self.reopened.close()
        if "page" in vars(self):
            self.page.close_worker()

    # -- files --------------------------------------------------------------------

    def choose_report(self) -> None:
        """Ask where to, and write the report by the options of its page."""
        choices = self._choices()
        path = ask_where_to_write(
            self._window,
            f"Write {choices.kind}",
            self._proposed(".pdf", choices.variant),
            "PDF (*.pdf)",
        )
        if path is not None:
            self.write_report(path, choices)

    def _choices(self) -> Choices:
        """As the page has them; before it was open: of what is shown."""
        if "page" in vars(self):
            return self.page.choices.choices
        from engine.report.choices import Choices

        variant = self._window.document.variant
        return Choices(variant=None if variant is None else variant.id)

    def write_report(self, path: Path, choices: Choices) -> None:
        """Compute and write a report in the background."""
        whole = self._window.document.whole
        names = {v.id: v.title for v in whole.variants}
        of = names.get(choices.variant or "", "the base")
        told = f"{path} was written, the {choices.kind} of {of}."

        def work(cancelled: Cancelled, progress: Progress) -> None:
            # Here: what draws on paper takes long to load.
            from engine.report.writing import write_report

            write_report(whole, path, choices, cancelled=cancelled, progress=progress)

        self._window.jobs.start(
            f"Writing the {choices.kind}",
            work,
            lambda _: self._window.messages.inform(told),
        )

    def choose_pdf(self) -> None:
        """Ask where to, and write the pages that are shown."""
        with self._window.messages.shown():
            self.page.current()
            path = ask_where_to_write(
                self._window,
                "Write PDF",
                self._proposed(".pdf", self._variant),
                "PDF (*.pdf)",
            )
            if path is not None:
                self.write_pdf(path)

    def write_pdf(self, path: Path) -> None:
        """Write the very bytes that are shown.

        Raises
        ------
        UserError
            When they are out of date, or cannot be written.
        """
        made = self.page.current()
        write_file(path, made.content)
        self._window.messages.inform(f"{path} was written.")

    def choose_tables(self) -> None:
        """Ask where to, and write the tables of the report that is shown."""
        with self._window.messages.shown():
            self.page.current()
            name, kind = QFileDialog.getSaveFileName(
                self._window,
                "Write tables",
                self._proposed(".xlsx", self._variant),
                _TABLES,
            )
            if name:
                path = Path(name)
                if kind.startswith("CSV"):
                    path = path.with_suffix("")
                elif not path.suffix:
                    path = path.with_suffix(".xlsx")
                self.write_tables(path)

    def write_tables(self, path: Path) -> None:
        """Write the tables of the report that is shown.

        Raises
        ------
        UserError
            When it is out of date, or a file cannot be written.
        """
        from engine.commands.tables import write_tables

        matter = self.page.current().matter
        write_tables(matter.assessment, matter.remarks, matter.unit, path)
        self._window.messages.inform(f"{path} was written.")

    @property
    def _variant(self) -> str | None:
        """The one of the pages that are shown."""
        variant: str | None = self.page.choices.variant.value
        return variant

    def _proposed(self, ending: str, variant: str | None) -> str:
        document = self._window.document
        stem = file_stem(document.path, document.layout)
        if variant is not None:
            stem += f"-{variant}"
        folder = Path() if document.path is None else document.path.parent
        return str(folder / f"{stem}{ending}")

    # -- revisions ----------------------------------------------------------------

    def choose_folder(self, revision: str, date: str, note: str, name: str) -> None:
        """Ask for the folder of the frozen files, and issue the revision."""
        path = self._window.document.path
        folder = QFileDialog.getExistingDirectory(
            self._window,
            f"Folder for revision {revision}",
            str(path.parent) if path is not None else "",
        )
        if folder:
            whole = self._window.document.whole
            choices = self.page.choices.choices
            self.issue(Issue(whole, choices, revision, date, note, Path(folder), name))

    def issue(self, issue: Issue) -> None:
        """Freeze layout and report in the background, then list the revision."""
        opened = self._opened

        def work(cancelled: Cancelled, progress: Progress) -> Frozen:
            return freeze(issue, cancelled, progress)

        self._window.jobs.start(
            f"Issuing revision {issue.revision}",
            work,
            lambda frozen: self._on_frozen(frozen, opened),
        )

    def _on_frozen(self, frozen: Frozen, opened: int) -> None:
        document, messages = self._window.document, self._window.messages
        revision = frozen.issue.revision
        files = f"{frozen.layout_file.name} and {frozen.report_file.name}"
        where = frozen.layout_file.parent
        if opened != self._opened:
            messages.warn(
                f"Revision {revision} was issued: {files} were written in {where}. "
                "Another layout is open meanwhile, so only the frozen layout lists it."
            )
            return
        self.page.issue.start_over()
        variant = document.variant
        with messages.shown():
            document.edit_whole(
                f"Issue revision {revision}",
                recorded(document.whole, frozen),
                None if variant is None else variant.id,
            )
            messages.inform(
                f"Revision {revision} was issued: {files} were written in {where}. "
                "Save the layout to keep the record of it."
            )

    def choose_changes(self, revision: IssuedRevision) -> None:
        """Find the layout that was issued, asking where it is, and what changed."""
        window = self._window
        with window.messages.shown():
            path = frozen_file(window.document.path, revision)
            if path is None:
                name, _ = QFileDialog.getOpenFileName(
                    window,
                    f"Layout issued as revision {revision.revision}; without it, edits "
                    "are not told",
                    "",
                    "Layouts (*.json)",
                )
                path = Path(name) if name else None
            self.find_changes(revision, path)

    def find_changes(self, revision: IssuedRevision, path: Path | None) -> None:
        """Say what changed since a revision, by the layout that was issued.

        Raises
        ------
        UserError
            When the file is not that layout.
        """
        before = None if path is None else frozen_layout(path, revision)
        whole, opened = self._window.document.whole, self._opened

        def work(cancelled: Cancelled, progress: Progress) -> FoundChanges:
            return found_changes(whole, revision, before, cancelled, progress)

        def done(found: FoundChanges) -> None:
            if opened == self._opened:
                self.page.show_changes(found)
                if self._window.document.whole is not whole:
                    self.page.changes.set_stale()

        title = f"Comparing with revision {revision.revision}"
        self._window.jobs.start(title, work, done)

    # -- following ----------------------------------------------------------------

    def _on_changed(self, _layout: object, ids: object) -> None:
        if ids == EVERYTHING:
            self._opened += 1

    def _on_reopened(self, sentence: str, moved: bool) -> None:
        messages = self._window.messages
        (messages.warn if moved else messages.inform)(sentence)
        if "page" in vars(self):
            self.page.issue.tell_again(sentence)
