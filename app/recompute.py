"""Keeps map, margins and height curve in step with the layout, in the background.

A coarse map at once, the fine one after; a newer request stops an older one. Nothing
here ever waits for a result, and every signal is sent from the window's own thread.
"""

from __future__ import annotations

import time
from collections.abc import Callable
from dataclasses import dataclass, replace
from threading import Lock

from PySide6.QtCore import QCoreApplication, QObject, Qt, QTimer, Signal

from app.document import Document
from app.field_store import FieldStore, load_kernels
from app.height_curve import HeightCurve, curve_heights, height_curve
from app.map_drawing import map_picture
from app.map_picture import MapPicture
from app.map_request import MapRequest, Rect, heights_of, map_values, zone_of
from app.margin_values import Margins, Seeds, exact_margins, sampled_margins, seeds_of
from app.view_state import Look, ViewState
from app.worker import Outdated, Worker
from engine.errors import ComputationCancelled, UserError
from engine.layout import Layout

#: Exact margins that are remembered, so that undo shows them at once.
_REMEMBERED = 6

#: Seconds between sampled margins while newer maps wait, at least; they never take
#: more than a quarter of the time.
_SAMPLED_EVERY = 0.12

#: Seconds between two notices of progress.
_NOTICE = 0.1


@dataclass(frozen=True)
class Request:
    """Everything that the results depend on.

    Attributes
    ----------
    rect : Rect or None
        What the plan shows; None before there is a view. [m]
    is_preview : bool
        Something is being dragged: coarse map and sampled margins only.
    """

    layout: Layout
    look: Look
    rect: Rect | None
    pixels: tuple[int, int]
    is_preview: bool

    def map_request(self, coarse: bool) -> MapRequest | None:
        """The map that is wanted."""
        if self.rect is None:
            return None
        heights, name = heights_of(self.layout, self.look)
        return MapRequest(
            self.layout,
            self.look.case,
            heights,
            self.rect,
            self.pixels,
            "coarse" if coarse else "fine",
            name,
        )

    @property
    def shows_same_map(self) -> tuple[object, ...]:
        """Equal for requests whose map is the same, but for its fineness."""
        look = self.look
        return (self.layout, look.case, look.height, look.zone, self.rect, self.pixels)

    @property
    def shows_same_curve(self) -> tuple[object, ...]:
        """Equal for requests whose height curve is the same."""
        return (self.layout, self.look.case, self.look.zone)


@dataclass(frozen=True)
class _Result:
    """What the thread hands over."""

    request: Request
    what: object


@dataclass(frozen=True)
class _Progress:
    fraction: float
    text: str


class Recompute(QObject):
    """Answers every change of document and view.

    Parameters
    ----------
    stale_after : int
        Without a new map for so long, the old one is called out of date. [ms]

    Signals
    -------
    map_ready(MapPicture)
        A new picture, or the last one with `is_stale` set.
    margins_ready(Margins)
        Sampled while dragging, exact once settled.
    curve_ready(HeightCurve or None)
        None where no zone has a floor.
    progress(fraction, text)
        Of what takes long; 1.0 and no text when all is done.
    stale(bool)
        Whether what is shown no longer belongs to the layout.
    problem(str)
        Why there is no map, as a sentence; empty when there is one again.
    """

    map_ready = Signal(object)
    margins_ready = Signal(object)
    curve_ready = Signal(object)
    progress = Signal(float, str)
    stale = Signal(bool)
    problem = Signal(str)
    _handed_over = Signal(object)

    def __init__(
        self,
        document: Document,
        view_state: ViewState,
        *,
        stale_after: int = 150,
        clock: Callable[[], float] = time.monotonic,
    ) -> None:
        super().__init__()
        self._document, self._view_state = document, view_state
        self._rect: Rect | None = None
        self._pixels = (800, 600)
        self._clock = clock
        self._newest: Request | None = None
        self._picture: MapPicture | None = None
        self._is_stale = False
        self._undelivered = 0
        self._counting = Lock()
        self._results = _Results(self._hand_over, clock)
        self._handed_over.connect(self._deliver, Qt.ConnectionType.QueuedConnection)
        self._stale_timer = QTimer(self)
        self._stale_timer.setSingleShot(True)
        self._stale_timer.setInterval(stale_after)
        self._stale_timer.timeout.connect(self._call_stale)
        self._worker: Worker[Request] = Worker(
            "recompute", self._results.compute, load_kernels, share=0.5
        )
        document.changed.connect(self._on_changed)
        document.settled.connect(self._on_changed)
        view_state.changed.connect(self._on_changed)

    @property
    def is_idle(self) -> bool:
        """All that was asked is computed and delivered."""
        return self._worker.is_idle and self._undelivered == 0

    @property
    def is_stale(self) -> bool:
        return self._is_stale

    def set_view(self, rect: Rect | None, pixels: tuple[int, int]) -> None:
        """Say what rectangle of the plan shows, on how many pixels; None: none. [m]"""
        self._rect, self._pixels = rect, pixels
        self.ask()

    def ask(self) -> None:
        """Compute what the document and the view show now, unless that is known."""
        request = Request(
            self._document.layout,
            self._view_state.look,
            self._rect,
            self._pixels,
            self._document.is_previewing,
        )
        if request == self._newest:
            return
        if self._rect is None:
            self._stale_timer.stop()
        elif self._newest is None or request.layout is not self._newest.layout:
            self._stale_timer.start()
        self._newest = request
        self._worker.ask(request)

    def wait_until_idle(self, timeout: float = 30.0) -> bool:
        """Run the event loop until all is delivered, for tests; False: it took longer.

        Parameters
        ----------
        timeout : float
            [s]
        """
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
        for signal in (
            self._document.changed,
            self._document.settled,
            self._view_state.changed,
        ):
            signal.disconnect(self._on_changed)
        self._stale_timer.stop()
        self._worker.close()

    def _on_changed(self, *_: object) -> None:
        self.ask()

    def _hand_over(self, what: object) -> None:
        """Called in the thread."""
        with self._counting:
            self._undelivered += 1
        self._handed_over.emit(what)

    def _deliver(self, what: object) -> None:
        with self._counting:
            self._undelivered -= 1
        if isinstance(what, _Progress):
            self.progress.emit(what.fraction, what.text)
            return
        if isinstance(what, Exception):
            raise what
        assert isinstance(what, _Result)
        found = what.what
        if isinstance(found, MapPicture):
            self._picture = found
            self._stale_timer.stop()
            self._set_stale(False)
            self.problem.emit("")
            self.map_ready.emit(found)
        elif isinstance(found, Margins):
            self.margins_ready.emit(found)
        elif isinstance(found, UserError):
            self._call_stale()
            self.problem.emit(str(found))
        else:
            assert found is None or isinstance(found, HeightCurve)
            self.curve_ready.emit(found)

    def _call_stale(self) -> None:
        self._stale_timer.stop()
        if self._picture is not None and not self._picture.is_stale:
            self._picture = replace(self._picture, is_stale=True)
            self.map_ready.emit(self._picture)
        self._set_stale(True)

    def _set_stale(self, is_stale: bool) -> None:
        if is_stale != self._is_stale:
            self._is_stale = is_stale
            self.stale.emit(is_stale)


class _Results:
    """What the thread does and remembers; nothing here touches a window."""

    def __init__(
        self, hand_over: Callable[[object], None], clock: Callable[[], float]
    ) -> None:
        self._hand_over = hand_over
        self._clock = clock
        self._store = FieldStore()
        self._exact: list[Margins] = []
        self._seeds: Seeds = {}
        self._coarse: tuple[object, ...] | None = None
        self._fine: tuple[object, ...] | None = None
        self._margins: Layout | None = None
        self._curve: tuple[object, ...] | None = None
        self._told = 0.0
        self._sample_again = -1e9

    def compute(self, request: Request, outdated: Outdated) -> None:
        """All that a request asks for, the quickest first."""
        steps = [self._coarse_map]
        if request.is_preview:
            steps += [self._sampled_margins]
        else:
            steps += [self._fine_map, self._exact_margins, self._height_curve]
        self._told = self._clock()
        for step in steps:
            if outdated() and step != self._sampled_margins:
                return
            try:
                step(request, outdated)
            except ComputationCancelled:
                return
            except UserError as error:
                self._hand_over(_Result(request, error))
            except Exception as error:
                self._hand_over(error)
                return
        self._hand_over(_Progress(1.0, ""))

    def _coarse_map(self, request: Request, outdated: Outdated) -> None:
        """Never stopped by a newer request: a drag must show something."""
        wanted = request.map_request(coarse=True)
        same = request.shows_same_map
        if wanted is None or same in (self._coarse, self._fine):
            return
        self._fine = None
        values = map_values(wanted, self._store)
        self._hand_over(_Result(request, map_picture(values)))
        self._coarse = same

    def _fine_map(self, request: Request, outdated: Outdated) -> None:
        wanted = request.map_request(coarse=False)
        same = request.shows_same_map
        if wanted is None or same == self._fine:
            return
        values = map_values(wanted, self._store, cancelled=outdated)
        self._hand_over(_Result(request, map_picture(values)))
        self._fine, self._coarse = same, None

    def _sampled_margins(self, request: Request, outdated: Outdated) -> None:
        # A quick drag asks for maps without end; margins get their turn all the same.
        now = self._clock()
        if outdated() and now < self._sample_again:
            return
        self._margins = None
        sampled = sampled_margins(request.layout, self._store, self._seeds)
        done = self._clock()
        self._sample_again = max(now + _SAMPLED_EVERY, done + 3.0 * (done - now))
        self._hand_over(_Result(request, sampled))

    def _exact_margins(self, request: Request, outdated: Outdated) -> None:
        layout = request.layout
        if layout is self._margins:
            return
        known = next((m for m in self._exact if m.layout is layout), None)
        if known is None:
            known = exact_margins(
                layout, cancelled=outdated, progress=lambda f, t: self._tell(f, t)
            )
            self._exact = [known, *self._exact][:_REMEMBERED]
        self._margins = layout
        self._seeds = seeds_of(known)
        self._hand_over(_Result(request, known))

    def _height_curve(self, request: Request, outdated: Outdated) -> None:
        same = request.shows_same_curve
        if same == self._curve:
            return
        zone = zone_of(request.layout, request.look.zone)
        curve = None
        if zone is not None:
            curve = height_curve(
                request.layout,
                request.look.case,
                zone.id,
                curve_heights(request.layout),
                cancelled=outdated,
            )
        self._curve = same
        self._hand_over(_Result(request, curve))

    def _tell(self, fraction: float, text: str) -> None:
        now = self._clock()
        if now - self._told >= _NOTICE:
            self._told = now
            self._hand_over(_Progress(fraction, text))
