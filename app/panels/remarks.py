"""Remarks: what is open, what a person lets stand, and what is still assumed."""

from __future__ import annotations

import datetime

from PySide6.QtCore import QEvent, Qt, Signal
from PySide6.QtGui import QColor, QFont
from PySide6.QtWidgets import (
    QHBoxLayout,
    QListWidgetItem,
    QPushButton,
    QTabWidget,
    QWidget,
)

from app.document import Document
from app.panels.assumed import AssumptionsPage
from app.panels.field import ValueField
from app.panels.panel import Panel, Words, column
from app.panels.wrapped_items import WrappedList
from app.remark_search import Found, RemarkSearch
from app.theme import STEP, theme_shown
from engine.edits import added, checked, removed, unused_id
from engine.errors import UserError
from engine.items import ConfirmedRemark
from engine.layout import Layout
from engine.remarks import Remark
from engine.results import Assessment
from engine.variant_remarks import remarks_on

SEVERITIES: tuple[tuple[str, str, str], ...] = (
    ("blocking", "blocks the assessment", "block the assessment"),
    ("warning", "warning", "warnings"),
    ("note", "note", "notes"),
)

_REMARK = Qt.ItemDataRole.UserRole
_CONFIRMED = Qt.ItemDataRole.UserRole + 1


def is_confirmable(remark: Remark) -> bool:
    """Whether a person may let the remark stand; what blocks has to be mended.

    Net current that ends in the open (W01) may be let stand, and stays in the list.
    """
    return remark.severity != "blocking" or remark.code == "W01"


def counts_text(found: Found) -> str:
    """How many of each kind: "1 warning · 3 notes · 28 assumed values"."""
    parts = []
    for severity, one, many in SEVERITIES:
        count = sum(remark.severity == severity for remark in found.open)
        if count:
            parts.append(f"{count} {one if count == 1 else many}")
    count = len(found.assumed)
    if count:
        parts.append(f"{count} assumed value{'s' if count != 1 else ''}")
    return " · ".join(parts) or "No remark, and no value is assumed"


class RemarksPanel(Panel):
    """The remarks of the layout, with the way to what they are about.

    Signals
    -------
    go_to(place)
        A (3,) place that the drawing is to show. [m]
    counted(count)
        How many remarks are open.
    """

    #: `Layout` as a whole: any edit may bring or mend a remark.
    shows = Layout.__struct_fields__

    go_to = Signal(object)
    counted = Signal(int)

    def __init__(self, document: Document) -> None:
        super().__init__(document)
        self._assessment: Assessment | None = None
        self._found: Found | None = None
        self._search = RemarkSearch()
        self._search.found.connect(self.show_found)
        document.settled.connect(self._on_settled)
        self.head = Words(style="plain")
        self.results = Words()
        self.list = WrappedList()
        self.list.setAccessibleName("Remarks")
        self.list.setToolTip("A click selects what the remark is about and goes there")
        self.list.itemClicked.connect(self._on_item)
        self.list.itemActivated.connect(self._on_item)
        self.list.currentItemChanged.connect(lambda _new, _old: self._show_foot())
        self._foot = self._confirm_form()
        page = QWidget()
        box = column(page)
        box.addWidget(self.list, 1)
        box.addWidget(self._foot)
        self.assumed = AssumptionsPage(document)
        self.tabs = QTabWidget()
        self.tabs.setAccessibleName("Remarks and assumed values")
        self.tabs.setDocumentMode(True)
        self.tabs.addTab(page, "Remarks")
        self.tabs.addTab(self.assumed, "Assumed")
        self.tabs.setTabToolTip(0, "What to bear in mind, what blocks a comparison")
        self.tabs.setTabToolTip(
            1, "Values that no document, measurement or person backs"
        )
        outer = column(self, 3 * STEP)
        outer.addWidget(self.head)
        outer.addWidget(self.results)
        outer.addWidget(self.tabs, 1)
        self._show_foot()

    def set_assessment(self, assessment: Assessment | None) -> None:
        """Take the newest results; remarks on them are looked for as well."""
        self._assessment = assessment
        self._ask()

    def close_search(self) -> None:
        """End the background search, when the window goes."""
        self._search.close()

    def refresh(self) -> None:
        if not self._document.is_previewing:
            self._ask()

    def show_found(self, found: Found) -> None:
        """Show what was found, unless the layout is another by now."""
        if found.layout is not self._document.committed:
            return
        self._found = found
        self.head.setText(counts_text(found))
        self.results.setText(
            ""
            if found.has_results
            else "Remarks on results follow with the margins of this layout."
        )
        self.results.setVisible(not found.has_results)
        self.assumed.show_assumptions(found.layout, found.assumed)
        count = len(found.assumed)
        self.tabs.setTabText(1, f"Assumed ({count})" if count else "Assumed")
        self.tabs.setTabText(0, f"Remarks ({len(found.open)})")
        self._fill_list(found)
        self.counted.emit(len(found.open))

    def remark(self) -> Remark | None:
        """The current remark."""
        item = self.list.currentItem()
        found: Remark | None = None if item is None else item.data(_REMARK)
        return found

    def confirm(self) -> None:
        """Let the current remark stand, in the name that is typed."""
        remark = self.remark()
        by = self.by.line.text().strip()
        if remark is None:
            return
        if not by:
            self.by.refuse("State who lets the remark stand.")
            return
        layout = self._document.committed
        new = ConfirmedRemark(
            id=unused_id(layout, f"confirmed-{remark.code}"),
            code=remark.code,
            items=remark.items,
            by=by,
            date=self.date.line.text().strip(),
            note=self.note.line.text().strip(),
        )
        try:
            after = added(layout, checked(new))
        except UserError as error:
            self.by.refuse(str(error))
            return
        self._document.edit(f"Let remark {remark.code} stand", after)

    def take_back(self) -> None:
        """Open the current remark again."""
        item = self.list.currentItem()
        confirmed = None if item is None else item.data(_CONFIRMED)
        if confirmed is not None:
            after = removed(self._document.committed, confirmed.id)
            self._document.edit(f"Open remark {confirmed.code} again", after)

    def changeEvent(self, event: QEvent) -> None:
        if event.type() == QEvent.Type.PaletteChange and hasattr(self, "assumed"):
            self.assumed.table.colour()
            if self._found is not None:
                self._fill_list(self._found)
        super().changeEvent(event)

    def _ask(self) -> None:
        variant = self._document.variant
        own: tuple[Remark, ...] = ()
        if variant is not None:
            own = remarks_on(self._document.whole, variant)
        path = self._document.path
        folder = None if path is None else path.parent
        self._search.ask(self._document.committed, self._assessment, own, folder)

    def _on_settled(self, _layout: Layout) -> None:
        # The tab's count is wanted even while another panel is in front.
        self._ask()

    def _confirm_form(self) -> QWidget:
        form = QWidget()
        box = column(form)
        self.why = Words()
        self.by = ValueField.words(
            lambda _text: None, name="Confirmed by", hint="Name",
            tip="Who has looked at the remark and lets it stand",
        )  # fmt: skip
        self.date = ValueField.words(
            lambda _text: None, name="Date of confirmation", hint="Date",
            tip="Date of the confirmation", most=40,
        )  # fmt: skip
        self.date.set_value(datetime.date.today().isoformat())
        self.note = ValueField.words(
            lambda _text: None, name="Reason", hint="Reason",
            tip="Why the remark may stand",
        )  # fmt: skip
        self.confirm_button = QPushButton("Let it stand")
        self.confirm_button.setToolTip("Move the remark to the confirmed ones")
        self.confirm_button.clicked.connect(self.confirm)
        self.take_back_button = QPushButton("Open it again")
        self.take_back_button.setToolTip("Take the confirmation back")
        self.take_back_button.clicked.connect(self.take_back)
        self._who = QWidget()
        row = QHBoxLayout(self._who)
        row.setContentsMargins(0, 0, 0, 0)
        row.setSpacing(STEP)
        row.addWidget(self.by, 3)
        row.addWidget(self.date, 2)
        box.addWidget(self.why)
        box.addWidget(self._who)
        box.addWidget(self.note)
        box.addWidget(self.confirm_button)
        box.addWidget(self.take_back_button)
        return form

    def _fill_list(self, found: Found) -> None:
        at = self.list.currentRow()
        self.list.blockSignals(True)
        self.list.clear()
        for severity, one, many in SEVERITIES:
            group = [r for r in found.open if r.severity == severity]
            if group:
                words = one if len(group) == 1 else many
                self._heading(f"{len(group)} {words}")
            for remark in group:
                self._entry(remark, None)
        if found.confirmed:
            self._heading(f"{len(found.confirmed)} confirmed")
        for remark, confirmed in found.confirmed:
            self._entry(remark, confirmed)
        self.list.setCurrentRow(min(at, self.list.count() - 1))
        self.list.blockSignals(False)
        self._show_foot()

    def _heading(self, text: str) -> None:
        item = QListWidgetItem(text)
        item.setFlags(Qt.ItemFlag.NoItemFlags)
        font = QFont(self.list.font())
        font.setBold(True)
        item.setFont(font)
        item.setForeground(QColor(theme_shown().text))
        self.list.addItem(item)

    def _entry(self, remark: Remark, confirmed: ConfirmedRemark | None) -> None:
        text = f"{remark.code}  {remark.sentence}"
        if remark.case:
            case = self._document.layout.by_id().get(remark.case)
            title = case.title if case is not None else remark.case
            text += "" if f"“{title}”" in remark.sentence else f" [{title}]"
        if confirmed is not None:
            by = ", ".join(x for x in (confirmed.by, confirmed.date) if x)
            text += f" — let stand by {by}" if by else " — let stand"
            text += f": {confirmed.note}" if confirmed.note else ""
        item = QListWidgetItem(text)
        item.setData(_REMARK, remark)
        item.setData(_CONFIRMED, confirmed)
        theme = theme_shown()
        colour = {"blocking": theme.warning, "warning": theme.text}
        is_open = confirmed is None
        item.setForeground(
            QColor(colour.get(remark.severity, theme.text) if is_open else theme.muted)
        )
        self.list.addItem(item)

    def _on_item(self, item: QListWidgetItem) -> None:
        remark: Remark | None = item.data(_REMARK)
        if remark is None:
            return
        self._document.select(remark.items)
        if remark.place is not None:
            self.go_to.emit(remark.place)

    def _show_foot(self) -> None:
        item = self.list.currentItem()
        remark = self.remark()
        confirmed = None if item is None else item.data(_CONFIRMED)
        can_confirm = (
            remark is not None and confirmed is None and is_confirmable(remark)
        )
        self._foot.setVisible(remark is not None)
        self._who.setVisible(can_confirm)
        self.note.setVisible(can_confirm)
        self.confirm_button.setVisible(can_confirm)
        self.take_back_button.setVisible(confirmed is not None)
        if can_confirm:
            self.why.setText("A named person may look at the remark and let it stand.")
        elif confirmed is None:
            self.why.setText("This blocks the assessment and has to be mended.")
        self.why.setVisible(confirmed is None)
