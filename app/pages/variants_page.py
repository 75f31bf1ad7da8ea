"""The page of variants: their list, the table of places, and maps side by side."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from PySide6.QtCore import QEvent, Qt, Signal
from PySide6.QtWidgets import QSplitter, QTabWidget, QVBoxLayout, QWidget

from app.asking_page import AskingPage
from app.document import EVERYTHING, Document
from app.figures import write_figure
from app.messages import Messages
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


class VariantsPage(AskingPage):
    """Follows the document while it shows; computes in threads of its own."""

    _told = Signal(float, str)
    # Its maps; the variants stand in a list of its own.
    followed = frozenset({"zone", "height", "case"})

    def __init__(
        self, document: Document, view_state: ViewState, messages: Messages
    ) -> None:
        # The signal is there only once the page is.
        tables = VariantTables(lambda share, text: self._told.emit(share, text))
        super().__init__(
            "Variants", document, messages, computed="comparison of variants",
            work=tables.table, file_name="variants.png",
        )  # fmt: skip
        self._view_state = view_state
        self.answer: TableAnswer | None = None
        self._held: Layout | None = None
        self._build()
        self._told.connect(self._tell_progress, Qt.ConnectionType.QueuedConnection)
        self._follow(document.whole_changed)
        self._follow(document.changed, self._on_opened)
        self.setFocusProxy(self.list)

    @property
    def is_idle(self) -> bool:
        """Nothing is being computed or waits to be asked."""
        return super().is_idle and self.maps.is_idle

    @property
    def shown(self) -> object:
        return self.maps.change if self._shows_maps else self.answer

    def close_worker(self) -> None:
        """Stop the threads, before the window goes."""
        super().close_worker()
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
        self.put_beside_title(controls, self.state)
        self.list = VariantList(self._document, self._messages)
        self.raised, self.differing = Words("", "warning"), Words("")
        self.table = VariantTable()
        self.compared = QWidget()
        self.compared.setAutoFillBackground(True)
        box = QVBoxLayout(self.compared)
        box.setContentsMargins(0, STEP, 0, 0)
        box.setSpacing(STEP)
        for part in (self.raised, self.differing, self.reason):
            box.addWidget(part)
        box.addWidget(self.table, 1)
        # Alone, a sentence stands at the top.
        box.addStretch(0)
        self._parts = (self.table,)
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

    def changeEvent(self, event: QEvent) -> None:
        super().changeEvent(event)
        if event.type() == QEvent.Type.PaletteChange and hasattr(self, "table"):
            self.table.viewport().update()

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

    def _show(self, request: Any, answer: object) -> None:
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
        super()._tell(text)
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
        self._copy("" if self.answer is None else table_tabs(self.answer), "table")

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
