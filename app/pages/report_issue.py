"""Issuing a revision, and the revisions that were issued."""

from __future__ import annotations

from PySide6.QtCore import Signal
from PySide6.QtWidgets import (
    QFormLayout,
    QLabel,
    QLineEdit,
    QPlainTextEdit,
    QVBoxLayout,
    QWidget,
)

from app.document import Document
from app.pages.plain_table import PlainTable
from app.panels.panel import Words, button
from app.report_revisions import check, file_stem
from app.theme import STEP
from engine.errors import UserError
from engine.items import IssuedRevision

#: Rows of the list before it scrolls.
_ROWS = 8


class ReportIssue(QWidget):
    """The form and the list; what they ask for is done by whoever listens.

    Signals
    -------
    issue_wanted(revision, date, note, name)
        The name is that of the two files, without revision and ending.
    changes_wanted(IssuedRevision)
    """

    issue_wanted = Signal(str, str, str, str)
    changes_wanted = Signal(object)

    def __init__(self, document: Document) -> None:
        super().__init__()
        self._document = document
        self._proposed = ("", "", "")
        self._listed: tuple[IssuedRevision, ...] | None = None
        self.revision = _line("Revision", "Name of the revision, such as B")
        self.date = _line("Date", "As it is to be printed")
        self.name = _line(
            "File name", "Of the layout and the report; the revision is added to it"
        )
        self.note = QPlainTextEdit()
        self.note.setAccessibleName("What changed")
        self.note.setToolTip("What changed; stands in the list of revisions")
        self.note.setTabChangesFocus(True)
        self.note.setFixedHeight(16 * STEP)
        self.reason = Words(style="warning")
        self.reason.hide()
        self.issue = button(
            "Issue revision …",
            "Asks for a folder, then freezes the layout and its report there",
            self._on_issue,
        )
        self.explained = Words(
            "Freezes the layout and its report, of the base, in two files that the "
            "program never writes over, and lists the revision in this layout."
        )
        self.again = Words("", "plain")
        self.again.hide()
        self.list = PlainTable("Issued revisions")
        self.list.setFixedHeight((_ROWS + 1) * 6 * STEP)
        self.nothing = Words("No revision was issued yet.")
        self.changes = button(
            "Changes since it",
            "Edits and results that moved since the chosen revision",
            self._on_changes,
        )
        self._arrange()

    def _arrange(self) -> None:
        rows = QFormLayout()
        rows.setHorizontalSpacing(2 * STEP)
        rows.setVerticalSpacing(STEP)
        rows.setFieldGrowthPolicy(QFormLayout.FieldGrowthPolicy.AllNonFixedFieldsGrow)
        for words, widget in (
            ("Revision", self.revision),
            ("Date", self.date),
            ("File name", self.name),
        ):
            label = QLabel(words)
            label.setBuddy(widget)
            rows.addRow(label, widget)
        changed = QLabel("What changed")
        changed.setBuddy(self.note)
        heading = Words("Issued revisions", "plain")
        font = heading.font()
        font.setBold(True)
        heading.setFont(font)
        heading.setContentsMargins(0, 3 * STEP, 0, 0)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(STEP)
        column.addLayout(rows)
        for part in (
            changed, self.note, self.explained, self.reason, self.issue, heading,
            self.nothing, self.list, self.changes, self.again,
        ):  # fmt: skip
            column.addWidget(part)
        column.addStretch(1)
        self.list.selectionModel().selectionChanged.connect(lambda *_: self._enable())

    @property
    def chosen(self) -> IssuedRevision | None:
        """The revision chosen in the list; the last one where none is."""
        issued = self._document.whole.revisions[::-1]
        rows = self.list.selectionModel().selectedRows()
        if rows and rows[0].row() < len(issued):
            return issued[rows[0].row()]
        return issued[0] if issued else None

    def refresh(self) -> None:
        """Show what the layout lists, and propose what comes next."""
        title = self._document.layout.title
        stem = file_stem(self._document.path, self._document.layout)
        # What a person typed stays.
        proposed = (title.revision, title.date, stem)
        fields = (self.revision, self.date, self.name)
        for field, old, new in zip(fields, self._proposed, proposed, strict=True):
            if field.text() == old:
                field.setText(new)
        self._proposed = proposed
        if self._document.whole.revisions == self._listed:
            return
        self._listed = self._document.whole.revisions
        issued = self._listed[::-1]
        rows = [
            (r.revision, r.date, r.program_version, " ".join(r.note.split()))
            for r in issued
        ]
        self.list.show_rows((), ())
        self.list.show_rows(
            ("Revision", "Date", "Program", "What changed"), rows, words=4
        )
        self.list.setVisible(bool(rows))
        self.changes.setVisible(bool(rows))
        self.nothing.setVisible(not rows)
        height = (min(len(rows), _ROWS) + 1) * 6 * STEP + 5 * STEP
        self.list.setFixedHeight(height)
        self._enable()

    def begin(self) -> None:
        """A revision is to be issued: the keyboard goes to its name."""
        self.revision.setFocus()
        self.revision.selectAll()

    def start_over(self) -> None:
        """The revision was issued, or another layout is open."""
        for field in (self.revision, self.date, self.name, self.note):
            field.clear()
        self._proposed = ("", "", "")
        self.refuse("")

    def tell_again(self, sentence: str) -> None:
        """Say how far this program is from the one that issued the revision."""
        self.again.setText(sentence)
        self.again.setVisible(bool(sentence))

    def refuse(self, sentence: str) -> None:
        """Say why nothing was issued; empty: take that back."""
        self.reason.setText(sentence)
        self.reason.setVisible(bool(sentence))

    def _enable(self) -> None:
        chosen = self.chosen
        if chosen is not None:
            name = chosen.revision.replace("&", "&&")
            self.changes.setText(f"Changes since {name[:20]}")

    def _on_issue(self) -> None:
        asked = (
            self.revision.text().strip(),
            self.date.text().strip(),
            self.name.text().strip(),
        )
        try:
            check(self._document.whole, *asked)
        except UserError as error:
            self.refuse(str(error))
            return
        self.refuse("")
        revision, date, name = asked
        self.issue_wanted.emit(revision, date, self.note.toPlainText().strip(), name)

    def _on_changes(self) -> None:
        if self.chosen is not None:
            self.changes_wanted.emit(self.chosen)


def _line(name: str, tip: str) -> QLineEdit:
    made = QLineEdit()
    made.setAccessibleName(name)
    made.setToolTip(tip)
    made.setMaxLength(400)
    return made
