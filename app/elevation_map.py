"""Keeps the map of the elevation that shows in step with the layout, in a thread.

A coarse map at once, the fine one after, as on plan; every signal is sent from the
window's own thread. Nothing is computed while no elevation shows.
"""

from __future__ import annotations

import time
from collections.abc import Callable
from dataclasses import dataclass, replace
from threading import Lock

from PySide6.QtCore import QCoreApplication, QObject, Qt, QTimer, Signal

from app.document import Document
from app.elevation_plane import plane_text, upright_of
from app.field_store import FieldStore
from app.map_drawing import map_picture
from app.map_picture import MapPicture
from app.map_request import MapRequest, Rect, map_values
from app.upright_masks import UprightMasks
from app.view_state import ViewState
from app.worker import Outdated, Worker
from engine.elevation import Upright
from engine.errors import ComputationCancelled, UserError
from engine.layout import Layout
from engine.zone_assessment import zone_floor

#: Memory for responses; the plan's has its own. [byte]
_LIMIT = 96 * 2**20


@dataclass(frozen=True)
class _Request:
    """A map that is wanted, for one view."""

    view: str
    layout: Layout
    case: str
    upright: Upright
    rect: Rect
    pixels: tuple[int, int]
    name: str
    is_preview: bool

    def wanted(self, *, coarse: bool) -> MapRequest:
        return MapRequest(
            self.layout,
            self.case,
            _levels(self.layout, self.rect),
            self.rect,
            self.pixels,
            "coarse" if coarse else "fine",
            self.name,
            self.upright,
        )

    @property
    def same(self) -> tuple[object, ...]:
        """Equal for requests whose map is the same, but for its fineness."""
        return (self.view, self.layout, self.case, self.upright, self.rect, self.pixels)


def _levels(layout: Layout, rect: Rect) -> tuple[float, ...]:
    """Heights of people and receptors that show: whose reference levels count. [m]"""
    found = {receptor.at[2] for receptor in layout.receptors}
    for zone in layout.zones:
        floor = zone_floor(layout, zone)
        if floor is not None:
            found |= {floor + h for h in zone.heights}
    shown = {z for z in found if rect[1] <= z <= rect[3]}
    return tuple(sorted(shown or {rect[1], rect[3]}))


class ElevationMap(QObject):
    """Answers every change of document, look and sight of one elevation at a time.

    Signals
    -------
    map_ready(view, MapPicture)
        A new picture, or the last one with `is_stale` set.
    problem(sentence)
        Why there is no map; empty when there is one again.
    """

    map_ready = Signal(str, object)
    problem = Signal(str)
    _handed_over = Signal(object, object)

    def __init__(
        self, document: Document, view_state: ViewState, *, stale_after: int = 150
    ) -> None:
        super().__init__()
        self._document, self._view_state = document, view_state
        self._view = ""
        self._rect: Rect = (0.0, 0.0, 1.0, 1.0)
        self._pixels = (1, 1)
        self._newest: _Request | None = None
        self._shown: dict[str, MapPicture] = {}
        self._undelivered = 0
        self._counting = Lock()
        self._store = FieldStore(_LIMIT)
        self._coarse: tuple[object, ...] = ()
        self._fine: tuple[object, ...] = ()
        self._handed_over.connect(self._deliver, Qt.ConnectionType.QueuedConnection)
        self._stale_timer = QTimer(self)
        self._stale_timer.setSingleShot(True)
        self._stale_timer.setInterval(stale_after)
        self._stale_timer.timeout.connect(self._call_stale)
        self._worker: Worker[_Request] = Worker("elevation map", self._compute)
        self._signals = (document.changed, document.settled, view_state.changed)
        for signal in self._signals:
            signal.connect(self._on_changed)

    @property
    def is_idle(self) -> bool:
        """All that was asked is computed and delivered."""
        return self._worker.is_idle and self._undelivered == 0

    def set_view(self, view: str, rect: Rect, pixels: tuple[int, int]) -> None:
        """Say which elevation shows, what of it, and on how many pixels. [m]"""
        self._view, self._rect, self._pixels = view, rect, pixels
        self.ask()

    def rest(self) -> None:
        """No elevation shows."""
        self._view, self._newest = "", None
        self._stale_timer.stop()

    def ask(self) -> None:
        """Compute what shows now, unless that is known."""
        layout, look = self._document.layout, self._view_state.look
        upright = upright_of(layout, look, self._view) if self._view else None
        if upright is None:
            return
        request = _Request(
            self._view,
            layout,
            look.case,
            upright,
            self._rect,
            self._pixels,
            plane_text(layout, look, self._view),
            self._document.is_previewing,
        )
        if request == self._newest:
            return
        if self._newest is None or request.layout is not self._newest.layout:
            self._stale_timer.start()
        self._newest = request
        self._worker.ask(request)

    def wait_until_idle(self, timeout: float = 30.0) -> bool:
        """Run the event loop until all is delivered, for tests. [s]"""
        end = time.monotonic() + timeout
        while not self.is_idle:
            if time.monotonic() > end:
                return False
            QCoreApplication.processEvents()
            time.sleep(0.001)
        QCoreApplication.processEvents()
        return True

    def close(self) -> None:
        """Stop computing, before the window goes."""
        for signal in self._signals:
            signal.disconnect(self._on_changed)
        self._stale_timer.stop()
        self._worker.close()

    def _on_changed(self, *_: object) -> None:
        self.ask()

    # -- in the thread ----------------------------------------------------------

    def _compute(self, request: _Request, outdated: Outdated) -> None:
        steps: list[Callable[[_Request, Outdated], None]] = [self._coarse_map]
        if not request.is_preview:
            steps.append(self._fine_map)
        for step in steps:
            if outdated() and step == self._fine_map:
                return
            try:
                step(request, outdated)
            except ComputationCancelled:
                return
            except Exception as error:
                self._hand_over(request, error)
                return

    def _coarse_map(self, request: _Request, outdated: Outdated) -> None:
        """Never stopped by a newer request: a drag must show something."""
        if request.same in (self._coarse, self._fine):
            return
        self._fine = ()
        self._draw(request, coarse=True)
        self._coarse = request.same

    def _fine_map(self, request: _Request, outdated: Outdated) -> None:
        if request.same == self._fine:
            return
        self._draw(request, coarse=False, outdated=outdated)
        self._fine, self._coarse = request.same, ()

    def _draw(
        self, request: _Request, *, coarse: bool, outdated: Outdated | None = None
    ) -> None:
        wanted = request.wanted(coarse=coarse)
        values = map_values(wanted, self._store, cancelled=outdated)
        self._hand_over(request, map_picture(values, UprightMasks(values)))

    def _hand_over(self, request: _Request, what: object) -> None:
        with self._counting:
            self._undelivered += 1
        self._handed_over.emit(request, what)

    # -- in the window's thread -------------------------------------------------

    def _deliver(self, request: _Request, what: object) -> None:
        with self._counting:
            self._undelivered -= 1
        if isinstance(what, UserError):
            self._call_stale()
            self.problem.emit(str(what))
        elif isinstance(what, Exception):
            raise what
        elif request.view == self._view:
            assert isinstance(what, MapPicture)
            self._shown[request.view] = what
            self._stale_timer.stop()
            self.problem.emit("")
            self.map_ready.emit(request.view, what)

    def _call_stale(self) -> None:
        self._stale_timer.stop()
        shown = self._shown.get(self._view)
        if shown is not None and not shown.is_stale:
            self._shown[self._view] = replace(shown, is_stale=True)
            self.map_ready.emit(self._view, self._shown[self._view])
