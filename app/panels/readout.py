"""The field at the pointer, in the status line."""

from __future__ import annotations

import logging
from dataclasses import replace

from PySide6.QtCore import Qt, QTimer, Signal
from PySide6.QtWidgets import QLabel, QSizePolicy, QWidget

from app.document import Document
from app.map_request import height_figures
from app.readout_values import Readout, ReadoutRequest, readout
from app.view_state import ViewState
from app.worker import Outdated, Worker
from engine.errors import ComputationCancelled, UserError
from engine.layout import Layout
from engine.units import in_unit, significant, text_beside


def readout_text(found: Readout, layout: Layout) -> str:
    """ "5.20 1.35 1.00 m (Office +1.00) · 5.9 µT (x 1.2 y 5.1 z 2.7) · 0.79 of …"."""
    unit, length = layout.settings.flux_density_unit, layout.settings.length_unit
    place = " ".join(height_figures(c, length) for c in found.at) + f" {length}"
    if found.above_floor is not None:
        above = height_figures(found.above_floor, length)
        place += f" ({found.floor_name} +{above})"
    if found.resultant is None:
        return f"{place} · {found.reason}"
    parts = [place, _value(found, unit)]
    if found.ratio is not None:
        parts.append(f"{text_beside(found.ratio, 1.0)} of {found.level_title}")
    return " · ".join(parts)


def _value(found: Readout, unit: str) -> str:
    """The resultant and its components."""
    assert found.resultant is not None
    text = f"{significant(in_unit(found.resultant, unit))} {unit}"
    if found.is_direct:
        text = f"DC {text}"
    if found.is_bound:
        text = f"at most {text}"
    if found.was is not None:
        text += f", was {significant(in_unit(found.was, unit))}"
    if found.components is not None:
        x, y, z = (significant(in_unit(c, unit)) for c in found.components)
        text += f" (x {x} y {y} z {z})"
    if found.near_field:
        text += ", near field, even current assumed"
    return text


def _with_held(request: ReadoutRequest) -> Readout:
    """The field, and what it is at the same place in the layout that is held."""
    found = readout(request)
    if request.held is None or request.held is request.layout:
        return found
    try:
        before = readout(replace(request, layout=request.held, held=None))
    except UserError:
        return found
    return replace(found, was=before.resultant)


class ReadoutLine(QLabel):
    """Follows the pointer; computes in a thread of its own.

    `DrawingView.pointer_moved` goes to `show_at`, `pointer_left` to `clear_place`.

    Signals
    -------
    shown(Readout or None)
        What the line says now.
    """

    shown = Signal(object)
    _found = Signal(object, object)

    def __init__(
        self,
        document: Document,
        view_state: ViewState,
        parent: QWidget | None = None,
    ) -> None:
        super().__init__(parent)
        self._document, self._view_state = document, view_state
        self._at: tuple[float, float, float | None] | None = None
        self._held: Layout | None = None
        self._asked: ReadoutRequest | None = None
        self.setTextFormat(Qt.TextFormat.PlainText)
        self.setAccessibleName("Field at the pointer")
        self.setToolTip(
            "Place under the pointer, RMS flux density with its components along x, y "
            "and z, and the highest ratio to a reference level"
        )
        self.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Fixed)
        self.setAlignment(Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter)
        self._found.connect(self._show, Qt.ConnectionType.QueuedConnection)
        self._worker: Worker[ReadoutRequest] = Worker(
            "readout", self._compute, share=0.2
        )
        # Several changes at once are one question.
        self._soon = QTimer(self)
        self._soon.setSingleShot(True)
        self._soon.setInterval(0)
        self._soon.timeout.connect(self._ask)
        document.changed.connect(self._on_changed)
        view_state.changed.connect(self._on_changed)

    def show_at(self, x: float, y: float, z: float | None = None) -> None:
        """Tell the field there; `z` where the view states it. [m]"""
        self._at = (x, y, z)
        self._soon.start()

    def clear_place(self) -> None:
        """The pointer is somewhere else."""
        self._at = None
        self._asked = None
        self._soon.stop()
        self.clear()
        self.shown.emit(None)

    def hold(self, on: bool) -> None:
        """Let the values of the layout as it is stand beside the coming ones."""
        self._held = self._document.committed if on else None
        self._on_changed()

    @property
    def is_idle(self) -> bool:
        """Nothing is being computed or waits to be asked."""
        return self._worker.is_idle and not self._soon.isActive()

    def close_worker(self) -> None:
        """Stop the thread, before the window goes."""
        self._document.changed.disconnect(self._on_changed)
        self._view_state.changed.disconnect(self._on_changed)
        self._soon.stop()
        self._worker.close()

    def _on_changed(self, *_: object) -> None:
        if self._at is not None:
            self._soon.start()

    def _ask(self) -> None:
        if self._at is None:
            return
        request = ReadoutRequest(
            self._document.layout, self._view_state.look, *self._at, self._held
        )
        if request != self._asked:
            self._asked = request
            self._worker.ask(request)

    def _compute(self, request: ReadoutRequest, outdated: Outdated) -> None:
        """In the thread. Not stopped by the next place: the line must keep up."""
        try:
            self._found.emit(request, _with_held(request))
        except ComputationCancelled:
            return
        except UserError as error:
            self._found.emit(request, str(error))
        except Exception:
            logging.getLogger(__name__).exception("The field at the pointer failed")
            self._found.emit(request, "")

    def _show(self, request: ReadoutRequest, found: object) -> None:
        if self._at is None:
            return
        if isinstance(found, Readout):
            self.setText(readout_text(found, request.layout))
            self.shown.emit(found)
        else:
            self.setText(str(found))
            self.shown.emit(None)
