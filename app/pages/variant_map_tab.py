"""Maps of a variant and what it is held against: side by side, difference, ratio."""

from __future__ import annotations

from pathlib import Path

from PySide6.QtCore import QTimer
from PySide6.QtGui import QResizeEvent, QShowEvent
from PySide6.QtWidgets import QBoxLayout, QHBoxLayout, QVBoxLayout, QWidget

from app.answers import Answers
from app.caption_bar import case_text
from app.document import EVERYTHING, Document
from app.figures import write_figure
from app.map_request import case_of, heights_of
from app.pages.profile_controls import choice
from app.panels.panel import Words
from app.theme import LIGHT, STEP, qt_palette
from app.variant_map_words import at_text, change_csv, summary_text
from app.variant_maps import (
    DIFFERENCE,
    RATIO,
    SIDES,
    Change,
    ChangeMaps,
    ChangeRequest,
    panes,
    title_of,
)
from app.view_state import ViewState
from app.views.map_pane import MapLegend, MapPane, Sight
from app.wrapping import WrappingRow

NO_VARIANT = "Add a variant: its map stands here beside that of the base."


class VariantMapTab(QWidget):
    """Follows document, load case and height while it shows."""

    def __init__(self, document: Document, view_state: ViewState) -> None:
        super().__init__()
        self._document, self._view_state = document, view_state
        self.change: Change | None = None
        self._sight: Sight | None = None
        self._build()
        self._answers = Answers("maps of variants", ChangeMaps().change, self)
        self._answers.ready.connect(self._show)
        self._soon = QTimer(self, singleShot=True, interval=0)
        self._soon.timeout.connect(self._ask)
        document.whole_changed.connect(self._on_whole)
        document.changed.connect(self._on_opened)
        view_state.changed.connect(self._on_changed)

    @property
    def is_idle(self) -> bool:
        """Nothing is being computed or waits to be asked."""
        return self._answers.is_idle and not self._soon.isActive()

    def close_worker(self) -> None:
        """Stop the thread, before the window goes."""
        self._document.whole_changed.disconnect(self._on_whole)
        self._document.changed.disconnect(self._on_opened)
        self._view_state.changed.disconnect(self._on_changed)
        self._soon.stop()
        self._answers.close()

    def _build(self) -> None:
        controls = QWidget()
        row = WrappingRow(controls, 2 * STEP, 0)
        self.how = choice("Two maps, their difference, or their ratio", 40)
        self.how.addItems([SIDES, DIFFERENCE, RATIO])
        self.how.activated.connect(lambda _k: self._paint())
        self.variant = choice("Variant that is looked at", 60)
        self.against = choice("What it is held against", 60)
        for chosen in (self.variant, self.against):
            chosen.activated.connect(lambda _k: self._soon.start())
        for widget in (self.how, self.variant, Words("against"), self.against):
            if isinstance(widget, Words):
                widget.setWordWrap(False)
            row.addWidget(widget)
        self.told = Words("", "plain")
        self.pointer = Words(" ")
        self.pointer.setWordWrap(False)
        self.pointer.setMinimumWidth(1)
        self.left, self.right, self.legend = MapPane(), MapPane(), MapLegend()
        self.board = QWidget()
        beside = QHBoxLayout(self.board)
        self._two = QBoxLayout(QBoxLayout.Direction.LeftToRight)
        for row_of_parts in (beside, self._two):
            row_of_parts.setContentsMargins(0, 0, 0, 0)
            row_of_parts.setSpacing(STEP)
        beside.addLayout(self._two, 1)
        for pane in (self.left, self.right):
            self._two.addWidget(pane, 1)
            pane.moved.connect(self._look)
            pane.pointed.connect(self._point)
            pane.left.connect(lambda: self.pointer.setText(" "))
        beside.addWidget(self.legend)
        box = QVBoxLayout(self)
        box.setContentsMargins(0, STEP, 0, 0)
        box.setSpacing(STEP)
        for part in (controls, self.told):
            box.addWidget(part)
        box.addWidget(self.board, 1)
        box.addWidget(self.pointer)

    # -- events -------------------------------------------------------------------

    def showEvent(self, event: QShowEvent) -> None:
        self._soon.start()
        super().showEvent(event)

    def resizeEvent(self, event: QResizeEvent) -> None:
        super().resizeEvent(event)
        self._arrange()

    def _arrange(self) -> None:
        """Two maps stand over each other where they become larger so."""
        if self.change is None:
            return
        x0, y0, x1, y1 = self.change.area
        across, up = self.board.width() - self.legend.width(), self.board.height()
        beside = min(across / 2 / (x1 - x0), up / (y1 - y0))
        over = min(across / (x1 - x0), up / 2 / (y1 - y0))
        direction = QBoxLayout.Direction.LeftToRight
        if over > beside:
            direction = QBoxLayout.Direction.TopToBottom
        self._two.setDirection(direction)

    def _on_changed(self, *_: object) -> None:
        if self.isVisible():
            self._soon.start()

    def _on_whole(self) -> None:
        # What is chosen is what is looked at, until another one is.
        chosen = self._document.variant
        self._fill()
        if chosen is not None:
            self.variant.setCurrentIndex(self.variant.findData(chosen.id))
        self._on_changed()

    def _on_opened(self, _layout: object, ids: object) -> None:
        if ids == EVERYTHING:
            self.change = self._sight = None
            self._paint()

    def _look(self, sight: Sight | None) -> None:
        self._sight = sight
        for pane in (self.left, self.right):
            pane.set_sight(sight)

    def _point(self, x: float, y: float) -> None:
        text = " " if self.change is None else at_text(self.change, x, y)
        self.pointer.setText(text or " ")

    # -- computing ----------------------------------------------------------------

    def _fill(self) -> None:
        whole = self._document.whole
        for box, first in ((self.variant, ()), (self.against, (("Base", None),))):
            before = box.currentData()
            entries = [*first, *((v.title, v.id) for v in whole.variants)]
            box.clear()
            for title, variant in entries:
                box.addItem(title, variant)
            box.setCurrentIndex(max(0, box.findData(before)) if entries else -1)

    def _ask(self) -> None:
        if self.variant.count() != len(self._document.whole.variants):
            self._on_whole()
        whole, look = self._document.whole, self._view_state.look
        if not whole.variants:
            self._answers.forget()
            self.change = None
            self._paint()
            self.told.setText(NO_VARIANT)
            return
        heights, name = heights_of(self._document.committed, look)
        request = ChangeRequest(
            whole, self.variant.currentData(), self.against.currentData(), look.case,
            heights, name,
        )  # fmt: skip
        if self._answers.ask(request):
            self.told.setText("The maps are being computed …")

    def _show(self, request: ChangeRequest, answer: object) -> None:
        if request.whole is not self._document.whole:
            return
        self.change = answer if isinstance(answer, Change) else None
        self._paint()
        if not isinstance(answer, Change):
            self.told.setText(str(answer))

    def _paint(self) -> None:
        shown = (
            () if self.change is None else panes(self.change, self.how.currentText())
        )
        padded = (*shown, None, None)
        for pane, content in zip((self.left, self.right), padded, strict=False):
            pane.show_map(content)
        self.legend.show_map(shown[0] if shown else None)
        self.board.setVisible(bool(shown))
        self.right.setVisible(len(shown) > 1)
        self._arrange()
        if self.change is not None:
            self.told.setText(summary_text(self.change))

    # -- handing on ---------------------------------------------------------------

    def caption(self) -> str:
        """Quantity, heights, load case and what is compared, in one line."""
        assert self.change is not None
        request = self.change.request
        case = case_text(request.whole, case_of(request.whole, request.case).id)
        before = "base"
        if request.against is not None:
            before = f"variant {title_of(request.whole, request.against)}"
        after = title_of(request.whole, request.variant)
        return " · ".join(
            (
                f"{self.how.currentText()} of RMS flux density",
                request.heights_name,
                case,
                f"variant {after} against {before}",
            )
        )

    def write(self, path: Path) -> None:
        """Write the maps in front, light as on paper, or the numbers behind them.

        Raises
        ------
        UserError
            When the file cannot be written.
        """
        if self.change is None:
            raise ValueError("nothing is shown")
        before = self.board.palette()
        self.board.setPalette(qt_palette(LIGHT))
        try:
            caption = f"{self.caption()}\n{summary_text(self.change)}"
            write_figure(path, self.board, caption, change_csv(self.change))
        finally:
            self.board.setPalette(before)
