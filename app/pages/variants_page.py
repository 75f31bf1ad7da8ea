"""The page of variants: their list, the table of places, and maps side by side."""

from __future__ import annotations

from pathlib import Path

from PySide6.QtCore import QEvent, Qt, QTimer, Signal
from PySide6.QtGui import QGuiApplication, QShowEvent
from PySide6.QtWidgets import QSplitter, QTabWidget, QVBoxLayout, QWidget

from app.answers import Answers
from app.document import EVERYTHING, Document
from app.figures import FIGURE_KINDS, ask_figure, write_figure
from app.messages import Messages
from app.page import Page
from app.pages.variant_list import VariantList
from app.pages.variant_map_tab import VariantMapTab
from app.pages.variant_table import VariantTable
from app.panels.panel import Words, button
from app.theme import LIGHT, STEP, qt_palette
from app.variant_values import TableAnswer, TableRequest, VariantTables
from app.variant_words import (
    differing_texts,
    held_of,
    raised_texts,
    table_csv,
    table_tabs,
)
from app.view_state import ViewState
from app.wrapping import WrappingRow
from engine.layout import Layout

NO_PLACES = "Draw a zone where people are, or place a receptor, to compare variants"


class VariantsPage(Page):
    """Follows the document while it shows; computes in threads of its own."""

    _told = Signal(float, str)

    def __init__(
        self, document: Document, view_state: ViewState, messages: Messages
    ) -> None:
        super().__init__("Variants")
        self._document, self._view_state = document, view_state
        self._messages = messages
        self.answer: TableAnswer | None = None
        self._held: Layout | None = None
        self._build()
        self._told.connect(self._tell_progress, Qt.ConnectionType.QueuedConnection)
        tables = VariantTables(self._told.emit)
        self._answers = Answers("comparison of variants", tables.table, self)
        self._answers.ready.connect(self._show)
        self._soon = QTimer(self, singleShot=True, interval=0)
        self._soon.timeout.connect(self._ask)
        document.whole_changed.connect(self._on_changed)
        document.changed.connect(self._on_opened)
        self.setFocusProxy(self.list)

    @property
    def is_idle(self) -> bool:
        """Nothing is being computed or waits to be asked."""
        idle = self._answers.is_idle and not self._soon.isActive()
        return idle and self.maps.is_idle

    def close_worker(self) -> None:
        """Stop the threads, before the window goes."""
        self._document.whole_changed.disconnect(self._on_changed)
        self._document.changed.disconnect(self._on_opened)
        self._soon.stop()
        self._answers.close()
        self.maps.close_worker()

    def hold(self, on: bool) -> None:
        """Let the values of base and variants as they are stand beside the coming."""
        self._held = self._document.whole if on else None
        self._on_changed()

    # -- building -----------------------------------------------------------------

    def _build(self) -> None:
        controls = QWidget()
        row = WrappingRow(controls, 2 * STEP, 0)
        for widget in (
            button(
                "Copy table", "The table as cells for a spreadsheet", self.copy_table
            ),
            button("Export …", "As PNG, SVG or CSV, with its caption", self.export),
        ):
            row.addWidget(widget)
        self.state = Words("", "warning")
        self.state.setWordWrap(False)
        self.put_beside_title(controls, self.state)
        self.list = VariantList(self._document, self._messages)
        self.raised, self.differing = Words("", "warning"), Words("")
        self.reason = Words("", "plain")
        self.table = VariantTable()
        self.compared = QWidget()
        self.compared.setAutoFillBackground(True)
        box = QVBoxLayout(self.compared)
        box.setContentsMargins(0, STEP, 0, 0)
        box.setSpacing(STEP)
        for part in (self.raised, self.differing, self.reason):
            box.addWidget(part)
        box.addWidget(self.table, 1)
        self.tabs = QTabWidget()
        self.tabs.setAccessibleName("Base and variants")
        self.tabs.setDocumentMode(True)
        self.tabs.addTab(self.compared, "Table of places")
        self.maps = VariantMapTab(self._document, self._view_state)
        self.tabs.addTab(self.maps, "Maps")
        self.tabs.setTabToolTip(0, "Every place in the base and in the variants")
        self.tabs.setTabToolTip(1, "The maps of base and variant, and their change")
        split = QSplitter(Qt.Orientation.Horizontal)
        split.setChildrenCollapsible(False)
        split.addWidget(self.list)
        split.addWidget(self.tabs)
        split.setStretchFactor(1, 1)
        split.setSizes([52 * STEP, 190 * STEP])
        self.list.setMinimumWidth(40 * STEP)
        self.column.addWidget(split, 1)

    # -- events -------------------------------------------------------------------

    def showEvent(self, event: QShowEvent) -> None:
        self._soon.start()
        super().showEvent(event)

    def changeEvent(self, event: QEvent) -> None:
        super().changeEvent(event)
        if event.type() == QEvent.Type.PaletteChange and hasattr(self, "table"):
            self.table.viewport().update()

    def _on_changed(self) -> None:
        if self.isVisible():
            self._soon.start()

    def _on_opened(self, _layout: object, ids: object) -> None:
        if ids == EVERYTHING:
            self.answer = self._held = None
            self.table.show_answer(None, {})

    # -- computing ----------------------------------------------------------------

    def _ask(self) -> None:
        whole = self._document.whole
        if not whole.zones and not whole.receptors:
            self._answers.forget()
            self._tell(NO_PLACES)
            return
        if self._answers.ask(TableRequest(whole, self._held)):
            if self.answer is None:
                self._tell("The comparison is being computed …")
            else:
                self.state.setText("out of date")

    def _tell_progress(self, share: float, text: str) -> None:
        if not self._answers.is_idle:
            self.state.setText(f"{100 * share:.0f} % · {text}"[:60])

    def _show(self, request: TableRequest, answer: object) -> None:
        if request.whole is not self._document.whole:
            return
        self.state.setText("")
        if not isinstance(answer, TableAnswer):
            self.answer = None
            self._tell(str(answer))
            return
        self.answer = answer
        self._tell("")
        raised = "\n".join(raised_texts(answer))
        self.raised.setText(raised)
        self.raised.setVisible(bool(raised))
        differing = "\n".join(differing_texts(answer))
        self.differing.setText(differing)
        self.differing.setVisible(bool(differing))
        self.table.show_answer(answer, held_of(answer))

    def _tell(self, text: str) -> None:
        """Say why there is no table."""
        self.reason.setText(text)
        self.reason.setVisible(bool(text))
        self.table.setVisible(not text)
        for widget in (self.raised, self.differing):
            widget.setVisible(not text and bool(widget.text()))

    # -- handing on ---------------------------------------------------------------

    @property
    def _shows_maps(self) -> bool:
        return self.tabs.currentWidget() is self.maps

    def caption(self) -> str:
        """What the table shows, in one line."""
        layout = self._document.whole
        project = layout.title.project
        text = "Base and variants · worst counted load case of each place"
        return f"{project} · {text}" if project else text

    def copy_table(self) -> None:
        """Put the table on the clipboard."""
        if self.answer is None:
            self._messages.warn("There is no table to copy yet.")
            return
        QGuiApplication.clipboard().setText(table_tabs(self.answer))
        self._messages.inform("The table is on the clipboard.")

    def export(self) -> None:
        """Ask where to, and write what is in front."""
        shown = self.maps.change if self._shows_maps else self.answer
        if shown is None:
            self._messages.warn("There is nothing to export yet.")
            return
        path = ask_figure(self, "Export", "variants.png", FIGURE_KINDS)
        if path is not None:
            with self._messages.shown():
                self.write(path)
                self._messages.inform(f"{path} was written.")

    def write(self, path: Path) -> None:
        """Write what is in front: a picture, light as on paper, or its numbers.

        Raises
        ------
        UserError
            When the file cannot be written.
        """
        if self._shows_maps:
            self.maps.write(path)
            return
        answer = self.answer
        if answer is None:
            raise ValueError("nothing is shown")
        table = VariantTable()
        table.setPalette(qt_palette(LIGHT))
        table.show_answer(answer, held_of(answer))
        table.show_whole()
        caption = "\n".join([self.caption(), *raised_texts(answer)])
        write_figure(path, table, caption, table_csv(answer))
        table.deleteLater()
