"""The field vector at a place over one period: drawn, scrubbed by hand, and played."""

from __future__ import annotations

import logging
from pathlib import Path

from PySide6.QtCore import QEvent, Qt, QTimer, Signal
from PySide6.QtGui import QHideEvent, QKeyEvent, QShowEvent
from PySide6.QtWidgets import QComboBox, QHBoxLayout, QSlider, QWidget

from app.cycle_values import (
    CyclePlace,
    CycleRequest,
    at_place,
    caption_text,
    component_text,
    cycle_at,
    flux_text,
    place_text,
    summary_text,
    waves_csv,
)
from app.document import Document
from app.field_store import load_kernels
from app.figures import FIGURE_KINDS, ask_figure, write_figure
from app.messages import Messages
from app.page import Page
from app.panels.panel import Words, button, scrolled
from app.theme import LIGHT, STEP, qt_palette, theme_for
from app.variant_acts import with_shown
from app.view_state import ViewState
from app.views.cycle_board import CycleBoard, first_component
from app.worker import Outdated, Worker
from engine.currents import Component
from engine.cycle_view import CycleView
from engine.errors import ComputationCancelled, UserError
from engine.units import in_unit, significant

#: Between two pictures, and for one whole period, while it plays. [ms]
_FRAME, _ROUND = 40, 4000


class CyclePage(Page):
    """Follows document and view while it shows; computes in a thread of its own."""

    _found = Signal(object, object)

    def __init__(
        self, document: Document, view_state: ViewState, messages: Messages
    ) -> None:
        super().__init__("Field over one period")
        self._document, self._view_state = document, view_state
        self._messages = messages
        self.place: CyclePlace | None = None
        self._pointed: CyclePlace | None = None
        self.view: CycleView | None = None
        self._asked: CycleRequest | None = None
        self._shown: CycleRequest | None = None
        self._component: Component | None = None
        self.board = CycleBoard()
        self.summary, self.now = Words(style="plain"), Words(style="plain")
        self.reason = Words(style="plain")
        self._build()
        self._found.connect(self._show, Qt.ConnectionType.QueuedConnection)
        self._worker: Worker[CycleRequest] = Worker(
            "cycle", self._compute, load_kernels
        )
        self._soon = QTimer(self, singleShot=True, interval=0)
        self._soon.timeout.connect(self._ask)
        self._clock = QTimer(self, interval=_FRAME)
        self._clock.timeout.connect(self._advance)
        document.changed.connect(self._on_changed)
        view_state.changed.connect(self._on_changed)

    # -- what is asked ----------------------------------------------------------

    def show_place(self, place: CyclePlace) -> None:
        """Show another place; a receptor's is followed when it moves."""
        self.place = place
        if not place.receptor:
            self._pointed = place
        self._fill_places()
        self._soon.start()

    @property
    def is_idle(self) -> bool:
        """Nothing is being computed or waits to be asked."""
        return self._worker.is_idle and not self._soon.isActive()

    @property
    def is_playing(self) -> bool:
        return self._clock.isActive()

    def close_worker(self) -> None:
        """Stop the thread, before the window goes."""
        self._document.changed.disconnect(self._on_changed)
        self._view_state.changed.disconnect(self._on_changed)
        self._clock.stop()
        self._soon.stop()
        self._worker.close()

    # -- building ---------------------------------------------------------------

    def _build(self) -> None:
        self.places = _choice("Place whose field is shown: a receptor or the pointer")
        self.places.activated.connect(self._on_place)
        self.frequencies = _choice("Frequency whose ellipse and currents are drawn")
        self.frequencies.activated.connect(self._on_frequency)
        self.play = button("Play", "Turns through the period (Space)", self.toggle)
        self.slider = QSlider(Qt.Orientation.Horizontal)
        self.slider.setAccessibleName("Instant of the period")
        self.slider.setToolTip("Instant of the period in milliseconds; arrow keys step")
        self.slider.valueChanged.connect(self._on_instant)
        export = button("Export …", "As PNG, SVG or CSV, with its caption", self.export)
        head = QHBoxLayout()
        for choice in (self.places, self.frequencies):
            head.addWidget(choice)
        head.addStretch(1)
        head.addWidget(export)
        foot = QHBoxLayout()
        foot.addWidget(self.play)
        foot.addWidget(self.slider, 1)
        self.column.setSpacing(2 * STEP)
        self.column.addLayout(head)
        for widget in (self.reason, self.summary):
            self.column.addWidget(widget)
        # In a low window the board keeps its size and is scrolled.
        self._area = scrolled(self.board)
        self.column.addWidget(self._area, 1)
        self._controls = QWidget()
        self._controls.setLayout(foot)
        foot.setContentsMargins(0, 0, 0, 0)
        self.column.addWidget(self._controls)
        self.column.addWidget(self.now)
        # Alone, a sentence stands at the top.
        self.column.addStretch(0)
        self.reason.hide()

    # -- events -----------------------------------------------------------------

    def showEvent(self, event: QShowEvent) -> None:
        self._fill_places()
        self._soon.start()
        super().showEvent(event)

    def hideEvent(self, event: QHideEvent) -> None:
        self._stop()
        super().hideEvent(event)

    def changeEvent(self, event: QEvent) -> None:
        super().changeEvent(event)
        if event.type() == QEvent.Type.PaletteChange and hasattr(self, "_clock"):
            self._draw()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        step = {Qt.Key.Key_Left: -1, Qt.Key.Key_Right: 1}.get(Qt.Key(event.key()))
        if event.key() == Qt.Key.Key_Space:
            self.toggle()
        elif step is not None and self.board.instants:
            self.slider.setValue((self.slider.value() + step) % self.board.instants)
        else:
            super().keyPressEvent(event)

    def toggle(self) -> None:
        """Play, or stop playing."""
        if self.is_playing:
            self._stop()
        elif self.board.instants:
            self._clock.start()
            self.play.setText("Stop")

    def _stop(self) -> None:
        self._clock.stop()
        self.play.setText("Play")

    def _advance(self) -> None:
        count = self.board.instants
        if not count:
            self._stop()
            return
        step = max(1, round(count * _FRAME / _ROUND))
        self.slider.setValue((self.slider.value() + step) % count)

    def _on_changed(self, *_: object) -> None:
        if self.isVisible():
            self._fill_places()
            self._soon.start()

    def _on_place(self, index: int) -> None:
        self.show_place(self.places.itemData(index))

    def _on_frequency(self, index: int) -> None:
        self._component = self.frequencies.itemData(index)
        self._draw()

    def _on_instant(self, index: int) -> None:
        self.board.show_instant(index)
        self._tell_instant()

    # -- computing --------------------------------------------------------------

    def _ask(self) -> None:
        layout = self._document.layout
        if self.place is None:
            self._tell("Choose a place: a receptor, or point at one on the drawing.")
            return
        self.place = at_place(layout, self.place)
        request = CycleRequest(layout, self._view_state.look.case, self.place)
        if request != self._asked:
            self._asked = request
            if self.view is None:
                self._tell("The field is being computed …")
            self._worker.ask(request)

    def _compute(self, request: CycleRequest, _outdated: Outdated) -> None:
        """In the thread. One place is quick: a drag keeps up by finishing it."""
        try:
            self._found.emit(request, cycle_at(request))
        except ComputationCancelled:
            return
        except UserError as error:
            self._found.emit(request, str(error))
        except Exception:
            logging.getLogger(__name__).exception("The field over a period failed")
            self._found.emit(request, "The field over a period could not be computed.")

    # -- showing ----------------------------------------------------------------

    def _show(self, request: CycleRequest, found: object) -> None:
        if self._asked is None or request.place != self._asked.place:
            return
        self._shown = request
        self.view = found if isinstance(found, CycleView) else None
        self._tell("" if self.view is not None else str(found))
        if self.view is not None:
            self._fill_frequencies(self.view)
            self._draw()

    def _tell(self, sentence: str) -> None:
        """Say why there is nothing to see; nothing else shows then."""
        self.reason.setText(sentence)
        self.reason.setVisible(bool(sentence))
        for widget in (self.summary, self._area, self._controls, self.now):
            widget.setVisible(not sentence)
        self.frequencies.setVisible(not sentence)

    def _draw(self) -> None:
        if self.view is None or self._shown is None:
            return
        layout = self._shown.layout
        index = max(self.frequencies.currentIndex(), 0)
        theme = theme_for(self.palette())
        self.board.show_component(layout, self.view, index, theme)
        self._controls.setVisible(self.board.wave is not None)
        self.slider.setRange(0, max(0, self.board.instants - 1))
        self.slider.setPageStep(max(1, self.board.instants // 12))
        self.board.show_instant(self.slider.value())
        self.summary.setText(summary_text(layout, self.view))
        self._tell_instant()

    def _tell_instant(self) -> None:
        wave = self.board.wave
        if wave is None or self._shown is None:
            self.now.setText("")
            return
        unit = self._shown.layout.settings.flux_density_unit
        index = min(self.slider.value(), len(wave.times) - 1)
        x, y, z = (significant(in_unit(v, unit)) for v in wave.vectors[index])
        self.now.setText(
            f"{1e3 * wave.times[index]:.2f} ms of {1e3 * wave.period:.2f} ms · "
            f"x {x} y {y} z {z} {unit}".replace("-", "−")
            + f" · |B| {flux_text(wave.magnitudes[index], unit)}"
        )

    def _fill_places(self) -> None:
        layout = self._document.layout
        entries = [
            (place_text(layout, p), p)
            for p in (CyclePlace(r.at, r.id) for r in layout.receptors)
        ]
        if self._pointed is not None:
            entries.append((f"Pointed at: {place_text(layout, self._pointed)}",
                            self._pointed))  # fmt: skip
        if self.place is None and entries:
            self.place = entries[0][1]
        shown = None if self.place is None else at_place(layout, self.place)
        self.places.clear()
        for text, place in entries:
            self.places.addItem(text, place)
        places = [place for _, place in entries]
        self.places.setCurrentIndex(places.index(shown) if shown in places else -1)
        self.places.setVisible(bool(entries))

    def _fill_frequencies(self, view: CycleView) -> None:
        assert self._shown is not None
        components = [e.component for e in view.ellipses]
        self.frequencies.clear()
        for component in components:
            text = component_text(self._shown.layout, component)
            self.frequencies.addItem(text, component)
        chosen = self._component in components and self._component is not None
        index = (
            components.index(self._component)  # type: ignore[arg-type]
            if chosen else first_component(view)
        )  # fmt: skip
        self.frequencies.setCurrentIndex(index)
        self.frequencies.setEnabled(len(components) > 1)

    # -- exporting --------------------------------------------------------------

    def export(self) -> None:
        """Ask where to, and write what is shown."""
        if self.view is None:
            self._messages.warn("There is nothing to export yet.")
            return
        path = ask_figure(self, "Export the period", "period.png", FIGURE_KINDS)
        if path is not None:
            with self._messages.shown():
                self.write(path)
                self._messages.inform(f"{path} was written.")

    def write(self, path: Path) -> None:
        """Write the board as PNG or SVG, light as on paper, or its numbers as CSV.

        Raises
        ------
        UserError
            When the file cannot be written.
        """
        if self.view is None or self._shown is None:
            raise ValueError("nothing is shown")
        layout, request = self._shown.layout, self._shown
        caption = caption_text(layout, request.case, request.place)
        caption = with_shown(self._document, caption)
        text = f"{caption} · {summary_text(layout, self.view)}"
        index = max(self.frequencies.currentIndex(), 0)
        before = self.board.palette()
        self.board.setPalette(qt_palette(LIGHT))
        self.board.show_component(layout, self.view, index, LIGHT)
        try:
            write_figure(path, self.board, text, waves_csv(layout, self.view, caption))
        finally:
            self.board.setPalette(before)
            self._draw()


def _choice(tip: str) -> QComboBox:
    box = QComboBox()
    box.setToolTip(tip)
    box.setAccessibleName(tip)
    box.setSizeAdjustPolicy(QComboBox.SizeAdjustPolicy.AdjustToContents)
    return box
