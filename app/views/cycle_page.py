"""The field vector at a place over one period: drawn, scrubbed by hand, and played."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from PySide6.QtCore import QEvent, Qt, QTimer
from PySide6.QtGui import QHideEvent, QKeyEvent, QShowEvent
from PySide6.QtWidgets import QComboBox, QHBoxLayout, QSlider, QWidget

from app.asking_page import AskingPage, on_paper
from app.cycle_values import (
    Cycle,
    CyclePlace,
    CycleRequest,
    at_place,
    caption_text,
    component_text,
    flux_text,
    place_text,
    summary_text,
    waves_csv,
    with_held,
)
from app.document import Document
from app.figures import write_figure
from app.messages import Messages
from app.panels.panel import Words, button, scrolled
from app.theme import LIGHT, STEP, theme_for
from app.variant_acts import with_shown
from app.view_state import ViewState
from app.views.cycle_board import CycleBoard, first_component
from engine.currents import Component
from engine.cycle_view import CycleView
from engine.layout import Layout
from engine.units import in_unit, significant

#: Between two pictures, and for one whole period, while it plays. [ms]
_FRAME, _ROUND = 40, 4000


class CyclePage(AskingPage):
    """Follows document and view while it shows; computes in a thread of its own."""

    def __init__(
        self, document: Document, view_state: ViewState, messages: Messages
    ) -> None:
        super().__init__(
            "Field over one period", document, messages,
            computed="field over one period", work=with_held, file_name="period.png",
        )  # fmt: skip
        self._view_state = view_state
        self.place: CyclePlace | None = None
        self._pointed: CyclePlace | None = None
        self.answer: Cycle | None = None
        self._held: Layout | None = None
        self._component: Component | None = None
        self.board = CycleBoard()
        self.summary, self.now = Words(style="plain"), Words(style="plain")
        self._build()
        self._clock = QTimer(self, interval=_FRAME)
        self._clock.timeout.connect(self._advance)
        self._follow(document.changed)
        self._follow(view_state.changed)

    # -- what is asked ----------------------------------------------------------

    def show_place(self, place: CyclePlace) -> None:
        """Show another place; a receptor's is followed when it moves."""
        self.place = place
        if not place.receptor:
            self._pointed = place
        self._fill_places()
        self._soon.start()

    def hold(self, on: bool) -> None:
        """Let RMS and peak in the layout as it is stand beside the coming ones."""
        self._held = self._document.committed if on else None
        self._on_changed()

    @property
    def view(self) -> CycleView | None:
        """The field that is shown."""
        return None if self.answer is None else self.answer.view

    @property
    def shown(self) -> Cycle | None:
        return self.answer

    @property
    def is_playing(self) -> bool:
        return self._clock.isActive()

    def close_worker(self) -> None:
        """Stop the thread, before the window goes."""
        self._clock.stop()
        super().close_worker()

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
        head.addWidget(self.state)
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
        self._parts = (
            self.summary, self._area, self._controls, self.now, self.frequencies,
        )  # fmt: skip

    # -- events -----------------------------------------------------------------

    def showEvent(self, event: QShowEvent) -> None:
        self._fill_places()
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
        request = CycleRequest(
            layout, self._view_state.look.case, self.place, self._held
        )
        self._put(request, "The field is being computed …")

    # -- showing ----------------------------------------------------------------

    def _show(self, request: Any, answer: object) -> None:
        if self.place is None or request.place != self.place:
            return
        self.answer = answer if isinstance(answer, Cycle) else None
        self.state.setText("")
        self._tell("" if self.answer is not None else str(answer))
        if self.answer is not None:
            self._fill_frequencies(self.answer)
            self._draw()

    def _draw(self) -> None:
        if self.answer is None:
            return
        layout, view = self.answer.request.layout, self.answer.view
        index = max(self.frequencies.currentIndex(), 0)
        theme = theme_for(self.palette())
        self.board.show_component(layout, view, index, theme)
        self._controls.setVisible(self.board.wave is not None)
        self.slider.setRange(0, max(0, self.board.instants - 1))
        self.slider.setPageStep(max(1, self.board.instants // 12))
        self.board.show_instant(self.slider.value())
        self.summary.setText(summary_text(layout, view, self.answer.before))
        self._tell_instant()

    def _tell_instant(self) -> None:
        wave = self.board.wave
        if wave is None or self.answer is None:
            self.now.setText("")
            return
        unit = self.answer.request.layout.settings.flux_density_unit
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

    def _fill_frequencies(self, answer: Cycle) -> None:
        view, layout = answer.view, answer.request.layout
        components = [e.component for e in view.ellipses]
        self.frequencies.clear()
        for component in components:
            text = component_text(layout, component)
            self.frequencies.addItem(text, component)
        chosen = self._component in components and self._component is not None
        index = (
            components.index(self._component)  # type: ignore[arg-type]
            if chosen else first_component(view)
        )  # fmt: skip
        self.frequencies.setCurrentIndex(index)
        self.frequencies.setEnabled(len(components) > 1)

    # -- exporting --------------------------------------------------------------

    def write(self, path: Path) -> None:
        """Write the board as PNG or SVG, light as on paper, or its numbers as CSV.

        Raises
        ------
        UserError
            When the file cannot be written.
        """
        answer = self.answer
        if answer is None:
            raise ValueError("nothing is shown")
        layout, view, request = answer.request.layout, answer.view, answer.request
        caption = caption_text(layout, request.case, request.place)
        caption = with_shown(self._document, caption)
        text = f"{caption} · {summary_text(layout, view, answer.before)}"
        index = max(self.frequencies.currentIndex(), 0)
        with on_paper(self.board):
            self.board.show_component(layout, view, index, LIGHT)
            write_figure(path, self.board, text, waves_csv(layout, view, caption))
        self._draw()


def _choice(tip: str) -> QComboBox:
    box = QComboBox()
    box.setToolTip(tip)
    box.setAccessibleName(tip)
    box.setSizeAdjustPolicy(QComboBox.SizeAdjustPolicy.AdjustToContents)
    return box
